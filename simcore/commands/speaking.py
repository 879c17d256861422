"""Where the command prints: standard output for people and programs, standard error for mistakes and progress."""

from __future__ import annotations

import os
import sys


def say(text: str) -> None:
    """Print what was asked for. A reader who has gone away ends the printing and nothing else."""
    try:
        print(text, flush=True)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def complain(text: str) -> None:
    """Print a mistake or progress, apart from what was asked for."""
    print(text, file=sys.stderr, flush=True)
