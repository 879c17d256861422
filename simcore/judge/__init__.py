"""Requirements held against figures and their error bounds, and what the outcome means."""
