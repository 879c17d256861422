"""Where the command prints: standard output for people and programs, standard error for mistakes and progress."""

from __future__ import annotations

import os
import sys
from typing import TextIO


def say(text: str) -> None:
    """Print what was asked for."""
    _print(text, sys.stdout)


def complain(text: str) -> None:
    """Print a mistake or progress, apart from what was asked for."""
    _print(text, sys.stderr)


def _print(text: str, stream: TextIO) -> None:
    """Print to a stream. A reader who has gone away ends the printing and nothing else."""
    try:
        print(text, file=stream, flush=True)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())
