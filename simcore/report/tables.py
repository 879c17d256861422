"""Aligned tables for a terminal: text columns to the left, numbers to the right.

Knows text only: no figures, no units, no files.
"""

from __future__ import annotations

from collections.abc import Sequence

INDENT = "  "
GAP = "   "


def table(headings: Sequence[str], rows: Sequence[Sequence[str]], left: int = 1) -> list[str]:
    """The lines of a table: headings, a rule, one line a row; the first `left` columns are text, the others numbers.

    headings: of each column; rows: cells of each row, as many as headings
    """
    cells = [list(headings), *map(list, rows)]
    if any(len(row) != len(headings) for row in cells):
        raise ValueError("a row has not as many cells as the table has columns")
    widths = [max(len(row[column]) for row in cells) for column in range(len(headings))]
    lines = [_line(row, widths, left) for row in cells]
    lines.insert(1, INDENT + "-" * (sum(widths) + len(GAP) * (len(widths) - 1)))
    return lines


def _line(row: Sequence[str], widths: Sequence[int], left: int) -> str:
    aligned = [
        cell.ljust(width) if column < left else cell.rjust(width)
        for column, (cell, width) in enumerate(zip(row, widths, strict=True))
    ]
    return (INDENT + GAP.join(aligned)).rstrip()
