"""A recorded trace as a description names it: a CSV file beside it, a column of times and one of values.

It knows text and units, and nothing of sources or figures.
"""

from __future__ import annotations

import csv
import math
import re
from itertools import pairwise

from grammar.expressions import nearest
from grammar.quantities import AMPERE, SECOND, VOLT, Dimension, Quantity, quantity

MOST_ROWS = 20_000
_HEADING = re.compile(r"(.*\S)\s*\[(\S+)\]")


class Unreadable(ValueError):
    """A file that is no recorded trace; the text says why, `cure` what to do."""

    def __init__(self, what: str, cure: str):
        super().__init__(what)
        self.cure = cure


def trace_of(text: str, column: str | None) -> tuple[tuple[tuple[float, float], ...], Dimension]:
    """The points (time in s, value in SI units) of a trace and the values' dimension, V or A.

    text: RFC 4180, headed by names with units, the first column being `time [s]`; column: the name of the other one,
    by default the second. Raises Unreadable.
    """
    rows = list(csv.reader(text.splitlines()))
    if len(rows) < 3 or len(rows[0]) < 2:
        raise Unreadable("it holds no trace", "It starts with a line `time [s],u [V]`, and a line for each instant.")
    if len(rows) > MOST_ROWS + 1:
        raise Unreadable(f"it has more than {MOST_ROWS} rows", "Thin it out, or record one period.")
    headings = [_heading(text) for text in rows[0]]
    if headings[0][1].dimension != SECOND:
        raise Unreadable("its first column is no time", "Head it `time [s]`.")
    names = [name for name, _ in headings]
    if column is not None and column not in names[1:]:
        near = nearest(column, names[1:])
        cure = f"Did you mean {near}?" if near else f"Its columns: {', '.join(names[1:])}."
        raise Unreadable(f"it has no column {column}", cure)
    place = 1 if column is None else names.index(column, 1)
    unit = headings[place][1]
    if unit.dimension not in (VOLT, AMPERE):
        raise Unreadable(f"its column {names[place]} is neither in V nor in A", "Head it with its unit: `u [V]`.")
    sizes = (headings[0][1].value, unit.value)
    points = tuple((_number(row, 0) * sizes[0], _number(row, place) * sizes[1]) for row in rows[1:] if row)
    if any(not later[0] > earlier[0] for earlier, later in pairwise(points)):
        points = _joined(points)
    return points, unit.dimension


def _joined(points: tuple[tuple[float, float], ...]) -> tuple[tuple[float, float], ...]:
    """A trace of ours has an instant twice where its signal jumps; of such a pair the later value counts."""
    kept: dict[float, float] = {}
    for time, value in points:
        if kept and time < next(reversed(kept)):
            raise Unreadable("its times do not rise", "Write its rows in the order of their times.")
        kept[time] = value
    return tuple(kept.items())


def _heading(text: str) -> tuple[str, Quantity]:
    """A column's name and the size of its unit."""
    match = _HEADING.fullmatch(text.strip())
    if match is None:
        raise Unreadable(f"a column is headed `{text[:40]}`, without a unit", "Head each one as in `u [V]`.")
    try:
        return match[1], quantity(1.0, match[2])
    except (KeyError, ValueError):
        cure = "Use `time [s]`, and V or A with a prefix."
        raise Unreadable(f"the unit [{match[2][:20]}] is not known", cure) from None


def _number(row: list[str], place: int) -> float:
    try:
        value = float(row[place])
    except (IndexError, ValueError):
        value = math.nan
    if not math.isfinite(value):
        raise Unreadable(f"a row holds no number where one is due: {','.join(row)[:40]}", "Mend it or leave it out.")
    return value
