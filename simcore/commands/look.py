"""`bulkrail look`: the circuit as understood, nothing solved."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from simcore.commands.options import add_file, add_settings
from simcore.commands.speaking import complain, say

if TYPE_CHECKING:
    from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    look = commands.add_parser("look", help="show the circuit as understood, and what each study will do")
    add_file(look)
    add_settings(look)
    look.set_defaults(action=_look)


def _look(options: argparse.Namespace) -> Outcome:
    from simcore.report.session import look_at

    return look_at(options.file, dict(options.settings), say, complain)
