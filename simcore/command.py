"""The `bulkrail` command: finds the verb that is asked for, and turns what it comes to into an exit status.

Imports nothing heavy until a verb needs it, and knows neither circuits nor figures.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Sequence

from simcore.commands import baseline, draw, look, run, size, sweep, tidy
from simcore.commands.speaking import complain
from simcore.judge.outcome import Outcome

VERBS = (run, sweep, size, baseline, look, draw, tidy)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command with the given arguments, by default those of the process; returns the exit status."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    options = _parser().parse_args(arguments)
    action: Callable[[argparse.Namespace], Outcome] = options.action
    try:
        return action(options).status
    except KeyboardInterrupt:
        complain("interrupted; no file is half written")
        return Outcome.INTERRUPTED.status


def _parser() -> argparse.ArgumentParser:
    from simcore import __version__

    parser = argparse.ArgumentParser(
        prog="bulkrail",
        description="Solves rectifier circuits described in text and judges them against what they must hold.",
        epilog="exit status: " + "; ".join(f"{outcome.status} {outcome.sentence}" for outcome in Outcome),
    )
    parser.add_argument("--version", action="version", version=f"bulkrail {__version__}")
    commands = parser.add_subparsers(metavar="COMMAND", required=True)
    for verb in VERBS:
        verb.add(commands)
    return parser


if __name__ == "__main__":
    sys.exit(main())
