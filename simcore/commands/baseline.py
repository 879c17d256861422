"""`bulkrail keep` and `bulkrail compare`: figures kept beside a design, and what has drifted since."""

from __future__ import annotations

import argparse

from simcore.commands.options import add_amount, add_files, add_junit
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add both verbs."""
    keep = commands.add_parser("keep", help="keep today's figures beside the description, in <stem>.kept.csv")
    add_files(keep)
    keep.set_defaults(action=_keep)
    compare = commands.add_parser("compare", help="solve again and report what drifted beyond the bounds")
    add_files(compare)
    add_junit(compare)
    add_amount(compare, "print only what drifted or is missing", "print what drifted as JSON, for programs")
    compare.set_defaults(action=_compare)


def _keep(options: argparse.Namespace) -> Outcome:
    from simcore.report.drift import keep_files

    return keep_files(options.files, say, complain)


def _compare(options: argparse.Namespace) -> Outcome:
    from simcore.report.drift import compare_files

    return compare_files(options.files, options.junit, say, complain, options.quiet, options.json)
