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


def table(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    left: int = 1,
    width: int | None = None,
    grouping: int | None = None,
) -> list[str]:
    """The lines of a table: headings, a rule, one line a row; the first `left` columns are text, the others numbers.

    headings: of each column; rows: cells of each row, as many as headings
    width: characters a line may have: the widest text column is broken where that helps, and columns that are still
    beyond follow below, behind the text columns again
    grouping: the text column that stands over rows that share it instead, where that spares a block or fits
    """
    if any(len(row) != len(headings) for row in rows):
        raise ValueError("a row has not as many cells as the table has columns")
    plain = _laid_out(headings, rows, left, width)
    if grouping is None or _strain(plain, width) == (False, 1):
        return _joined(plain)
    groups = dict.fromkeys(row[grouping] for row in rows)
    order = [row for group in groups for row in rows if row[grouping] == group]
    shorter = [[*row[:grouping], *row[grouping + 1 :]] for row in order]
    cut = [*headings[:grouping], *headings[grouping + 1 :]]
    grouped = _laid_out(cut, shorter, left - 1, width, [row[grouping] for row in order])
    return _joined(min(plain, grouped, key=lambda blocks: _strain(blocks, width)))


def _strain(blocks: Sequence[Sequence[str]], width: int | None) -> tuple[bool, int]:
    """What speaks against a layout: whether it is too wide, then how many blocks it has."""
    return width is not None and any(len(line) > width for block in blocks for line in block), len(blocks)


def _joined(blocks: Sequence[Sequence[str]]) -> list[str]:
    return [line for at, block in enumerate(blocks) for line in ([""] if at else []) + list(block)]


def _laid_out(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    left: int,
    width: int | None,
    groups: Sequence[str] = (),
) -> list[list[str]]:
    """The blocks of a table; groups: of each row, what stands over the first of those that share it."""
    cells = [list(headings), *map(list, rows)]
    widths = [max(len(row[column]) for row in cells) for column in range(len(headings))]
    longest = max(range(left), key=lambda column: widths[column], default=0)
    if width is not None and left:
        widths[longest] = _narrowed(widths, longest, left, width)
    broken = [_broken(row, longest, widths) for row in cells]
    blocks = []
    for columns in _blocks(widths, left, width):
        chosen = [widths[column] for column in columns]
        block: list[str] = []
        for at, parts in enumerate(broken):
            if groups and at and (at == 1 or groups[at - 1] != groups[at - 2]):
                block.append(f"{INDENT}{groups[at - 1]}:")
            block += [_line([row[column] for column in columns], chosen, left) for row in parts]
            if at == 0:
                block.append(INDENT + "-" * (sum(chosen) + len(GAP) * (len(chosen) - 1)))
        blocks.append(block)
    return blocks


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
