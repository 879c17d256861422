"""`bulkrail size`: the value of a let that just meets a requirement, and the next preferred one."""

from __future__ import annotations

import argparse
from pathlib import Path

from simcore.commands.options import add_file, add_out, add_settings
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome
from simcore.judge.preferred import SERIES


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    size = commands.add_parser("size", help="find the value of a let that just meets a requirement")
    add_file(size)
    size.add_argument(
        "--let",
        metavar="NAME",
        dest="lets",
        action="append",
        required=True,
        help="the let to size; given twice, the second is sized at values of the first",
    )
    size.add_argument(
        "--for",
        metavar="CLAIM",
        dest="claim",
        required=True,
        help='what must hold, as behind `require`: "full_load: ripple(u_out) <= 1 V"',
    )
    size.add_argument("--series", choices=list(SERIES), default="E12", help="of preferred values (IEC 60063)")
    size.add_argument("--from", metavar="VALUE", dest="first", help="smallest value of the (first) let")
    size.add_argument("--to", metavar="VALUE", dest="last", help="largest value of the (first) let")
    add_settings(size)
    add_out(size)
    size.set_defaults(action=_size)


def _size(options: argparse.Namespace) -> Outcome:
    from simcore.report.sizes import size_file

    if len(options.lets) > 2:
        complain("--let may be given twice at most")
        complain("    cure: fix the others with --set")
        return Outcome.INPUT_WRONG
    folder = options.out or Path("results") / Path(options.file).stem
    ends = (options.first, options.last)
    return size_file(
        options.file,
        options.lets,
        options.claim,
        options.series,
        ends,
        dict(options.settings),
        folder,
        say,
        complain,
    )
