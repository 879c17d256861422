"""Measurements of cost and error, printed as tables: `python -m tests.benchmark [PART ...]`. Nothing here is a test."""
