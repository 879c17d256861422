"""Aligned tables for a terminal: text columns to the left, numbers to the right.

Knows text only: no figures, no units, no files.
"""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

INDENT = "  "
GAP = "   "
NARROWEST = 16
"""Of a text column that is broken."""


def table(headings: Sequence[str], rows: Sequence[Sequence[str]], left: int = 1, width: int | None = None) -> list[str]:
    """The lines of a table: headings, a rule, one line a row; the first `left` columns are text, the others numbers.

    headings: of each column; rows: cells of each row, as many as headings
    width: characters a line may have: the widest text column is broken where that helps, and columns that are still
    beyond follow below, behind the text columns again
    """
    cells = [list(headings), *map(list, rows)]
    if any(len(row) != len(headings) for row in cells):
        raise ValueError("a row has not as many cells as the table has columns")
    widths = [max(len(row[column]) for row in cells) for column in range(len(headings))]
    longest = max(range(left), key=lambda column: widths[column], default=0)
    if width is not None and left:
        widths[longest] = _narrowed(widths, longest, left, width)
    broken = [part for row in cells for part in _broken(row, longest, widths)]
    head = len(_broken(cells[0], longest, widths))
    lines: list[str] = []
    for columns in _blocks(widths, left, width):
        chosen = [widths[column] for column in columns]
        block = [_line([row[column] for column in columns], chosen, left) for row in broken]
        block.insert(head, INDENT + "-" * (sum(chosen) + len(GAP) * (len(chosen) - 1)))
        lines += [""] * bool(lines) + block
    return lines


def _narrowed(widths: Sequence[int], longest: int, left: int, width: int) -> int:
    """How wide the widest text column is to be: whatever fits first of all, then needs the fewest blocks, then breaks
    the least."""

    def cost(chosen: int) -> tuple[bool, int, int]:
        trial = [*widths[:longest], chosen, *widths[longest + 1 :]]
        blocks = _blocks(trial, left, width)
        widest = max(len(INDENT) + sum(trial[each] + len(GAP) for each in block) - len(GAP) for block in blocks)
        return widest > width, len(blocks), -chosen

    return min(range(min(NARROWEST, widths[longest]), widths[longest] + 1), key=cost)


def _broken(row: list[str], column: int, widths: Sequence[int]) -> list[list[str]]:
    """A row as several where a text cell is wider than its column."""
    if len(row[column]) <= widths[column]:
        return [row]
    parts = textwrap.wrap(row[column], widths[column]) or [""]
    rest = [[part if at == column else "" for at in range(len(row))] for part in parts[1:]]
    return [[*row[:column], parts[0], *row[column + 1 :]], *rest]


def _blocks(widths: Sequence[int], left: int, width: int | None) -> list[list[int]]:
    """Which columns stand beside one another: the text columns in each block, at least one other with them."""
    text, blocks = list(range(left)), [list(range(left))]
    for column in range(left, len(widths)):
        needed = len(INDENT) + sum(widths[each] + len(GAP) for each in blocks[-1]) + widths[column]
        if width is not None and needed > width and len(blocks[-1]) > left:
            blocks.append(list(text))
        blocks[-1].append(column)
    return blocks


def _line(row: Sequence[str], widths: Sequence[int], left: int) -> str:
    aligned = [
        cell.ljust(width) if column < left else cell.rjust(width)
        for column, (cell, width) in enumerate(zip(row, widths, strict=True))
    ]
    return (INDENT + GAP.join(aligned)).rstrip()
