"""`bulkrail sweep`: solve many variants, find the worst cases."""

from __future__ import annotations

import argparse
from pathlib import Path

from simcore.commands.options import add_amount, add_files, add_out, add_settings, folders
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    sweep = commands.add_parser("sweep", help="solve the sweeps: worst cases and where they lie, pass rates, tables")
    add_files(sweep)
    add_out(sweep)
    sweep.add_argument(
        "--sweep", metavar="NAME", action="append", default=[], help="solve this sweep only; may be repeated"
    )
    sweep.add_argument(
        "--sensitivity",
        action="store_true",
        help="solve no sweep, but how far each requirement's figure follows each let",
    )
    sweep.add_argument(
        "--workers", metavar="N", type=_count, help="processes to solve on, by default one a core; 1: in this one"
    )
    sweep.add_argument("--scheduler", metavar="ADDRESS", default="", help="solve on the workers of a dask scheduler")
    sweep.add_argument("--resume", action="store_true", help="go on with an interrupted sweep")
    sweep.add_argument(
        "--bill", action="store_true", help="the bill of ratings over all studies and sweeps too, as bill.csv"
    )
    sweep.add_argument(
        "--page", metavar="FILE", type=Path, help="write the whole report with the worst cases as one HTML page too"
    )
    add_amount(sweep, "print only what does not hold", "print the worst cases as JSON, for programs")
    add_settings(sweep)
    sweep.set_defaults(action=_sweep)


def _count(text: str) -> int:
    if not text.isdecimal() or not 1 <= int(text) <= 1024:
        raise argparse.ArgumentTypeError(f'"{text}" is not a number of workers from 1 to 1024')
    return int(text)


def _sweep(options: argparse.Namespace) -> Outcome:
    from simcore.judge.outcome import worst
    from simcore.report.sweep_session import Asked, sensitivity_of_file, sweep_file

    places = folders(options.files, options.out)
    if places is None:
        return Outcome.INPUT_WRONG
    if options.page is not None and len(places) > 1:
        complain("--page takes one description")
        complain("    cure: run each apart, with a page of its own")
        return Outcome.INPUT_WRONG
    if options.sensitivity and (options.bill or options.page is not None or options.quiet or options.json):
        complain("--sensitivity goes with none of --bill, --page, --quiet and --json: it solves no sweep")
        complain("    cure: call it apart; its table is sensitivity.csv")
        return Outcome.INPUT_WRONG
    more = options.workers, options.scheduler, options.resume, options.bill, options.page
    asked = Asked(options.sweep, dict(options.settings), *more, options.quiet, options.json)
    if options.sensitivity:
        return worst([sensitivity_of_file(file, folder, asked, say, complain) for file, folder in places.items()])
    objects: list[str] = []
    tell = objects.append if options.json else say
    outcomes = [sweep_file(file, folder, asked, tell, complain) for file, folder in places.items()]
    if options.json:
        say(f"[{', '.join(objects)}]")
    return worst(outcomes)
