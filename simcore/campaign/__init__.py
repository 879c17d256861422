"""Sweeps: a design solved in many variants, each alone, on as many processes as there are."""
