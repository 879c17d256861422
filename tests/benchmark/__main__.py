"""`python -m tests.benchmark [stepping] [settings] [settled] [accuracy] [command] [operations]
[campaign]`: prints tables, all by default."""

from __future__ import annotations

import os
import sys
from importlib import import_module

PARTS = ("command", "operations", "stepping", "settings", "settled", "accuracy", "campaign")
"""In this order: a process that is started is counted with at least the memory that this one has by then."""


def main(wanted: list[str]) -> int:
    """Print the tables of the parts wanted, or of all; returns the exit status."""
    unknown = [name for name in wanted if name not in PARTS]
    if unknown:
        print(f"no part is called {unknown[0]}; there are {', '.join(PARTS)}", file=sys.stderr)
        return 2
    for name in sorted(wanted or PARTS, key=PARTS.index):
        for line in import_module(f"tests.benchmark.{name}").tables():
            print(line, flush=True)
        print()
    return 0


if __name__ == "__main__":
    os.environ.setdefault("OMP_NUM_THREADS", "1")  # CPU times of one thread, before numpy is loaded
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    sys.exit(main(sys.argv[1:]))
