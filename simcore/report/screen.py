"""What a terminal can show: how wide it is, and whether it takes colours.

Knows text only.
"""

from __future__ import annotations

import os
import re
import shutil
import sys
import textwrap
from collections.abc import Sequence
from dataclasses import dataclass

from simcore.judge.outcome import State

_COLOURS = {State.HOLDS: "32", State.FAILS: "1;31", State.UNDECIDED: "33", State.NOT_JUDGED: "33"}
_STATE = re.compile(rf"^(\s*)({'|'.join(State)})(?=\s|$)")
NARROWEST = 40


@dataclass(frozen=True)
class Screen:
    """width: characters a line, None for a file or pipe, where lines are as long as they are; colour: whether verdicts
    are coloured."""

    width: int | None = None
    colour: bool = False

    def fitted(self, lines: Sequence[str]) -> list[str]:
        """Lines broken at spaces where they are too wide, what follows set in further."""
        if self.width is None:
            return list(lines)
        found: list[str] = []
        for line in lines:
            indent = line[: len(line) - len(line.lstrip())]
            parts = [line]
            if len(line) > self.width:
                parts = textwrap.wrap(line.strip(), self.width, initial_indent=indent, subsequent_indent=f"{indent}  ")
            found += parts
        return found

    def painted(self, lines: Sequence[str]) -> list[str]:
        """Lines with the verdict that they start with coloured, where colours are shown at all."""
        return [_STATE.sub(_paint, line) for line in lines] if self.colour else list(lines)


def _paint(match: re.Match[str]) -> str:
    return f"{match[1]}\x1b[{_COLOURS[State(match[2])]}m{match[2]}\x1b[0m"


def present_screen() -> Screen:
    """The terminal that standard output goes to. NO_COLOR, set to anything, and a dumb terminal get no colours."""
    if not sys.stdout.isatty():
        return Screen()
    plain = bool(os.environ.get("NO_COLOR")) or os.environ.get("TERM") == "dumb"
    return Screen(max(shutil.get_terminal_size().columns, NARROWEST), not plain)
