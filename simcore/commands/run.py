"""`bulkrail run`: solve the studies, judge the requirements, write the results."""

from __future__ import annotations

import argparse
from pathlib import Path

from simcore.commands.options import add_amount, add_files, add_junit, add_out, add_settings, add_studies, folders
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    run = commands.add_parser("run", help="solve the studies, print figures and verdicts, write traces")
    add_files(run)
    add_out(run)
    add_studies(run)
    add_settings(run)
    run.add_argument(
        "--bill",
        action="store_true",
        help="show what each part has to stand beside its ratings, and write it to bill.csv",
    )
    run.add_argument("--page", metavar="FILE", type=Path, help="write the whole report as one HTML page too")
    add_junit(run)
    add_amount(run, "print only what does not hold", "print the summaries as JSON, for programs")
    run.set_defaults(action=_run)


def _run(options: argparse.Namespace) -> Outcome:
    from simcore.report.session import Wishes, run_files

    places = folders(options.files, options.out)
    if places is None:
        return Outcome.INPUT_WRONG
    if options.page is not None and len(places) > 1:
        complain("--page takes one description")
        complain("    cure: run each apart, with a page of its own")
        return Outcome.INPUT_WRONG
    wishes = Wishes(options.bill, options.page, options.junit, options.quiet, options.json)
    return run_files(places, options.study, dict(options.settings), say, complain, wishes)
