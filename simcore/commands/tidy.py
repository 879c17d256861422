"""`bulkrail tidy`: files put in canonical order and layout where they lie."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from simcore.commands.speaking import complain, say

if TYPE_CHECKING:
    from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    tidy = commands.add_parser("tidy", help="put files in canonical order and layout, comments kept")
    tidy.add_argument("files", metavar="FILE", nargs="+", help="a description or a file of data sheets")
    tidy.set_defaults(action=_tidy)


def _tidy(options: argparse.Namespace) -> Outcome:
    from simcore.report.tidying import tidy_files

    return tidy_files(options.files, say, complain)
