"""A figure: a number with its dimension and the bound of its numerical error, or the reason why there is none.

It must not know where a number came from; arithmetic of figures is a figure.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from grammar.quantities import NONE, Dimension

ROUNDING = 1e-12
"""Relative error granted to rounding, of the magnitude the figure was formed from (some thousand ulp: long sums)."""

CHANCE = 3e-7
"""Share of a figure that its bound is never below: two solutions can agree better than either is right."""

CHANCE_OF_STEPS = 0.5
"""The same over the tolerance of a step. Of 1800 settled figures worked out outside, two solutions agreed by chance in
a few: their errors were up to 2.7 times the tolerance, their difference next to nothing."""

SAFETY = 2.0
"""Bound over the difference of two solutions.

Where errors fall at least as fast as the square root of the tolerance, a ratio of ten leaves a fine error of at most
0.46 of the difference. Measured against published figures of a bridge with reservoir (17 figures, six pairs of
tolerances from 3e-3 to 1e-6): mostly 0.14, at most 1.15 (a ripple whose two errors were alike by chance). Two covers
that chance.
"""


@dataclass(frozen=True)
class Figure:
    """A number judged or printed.

    value: in the SI unit of dimension; nan where the figure is undefined (note says why); inf for an instant that does
           not come (beyond then says how far the study saw)
    bound: largest numerical error expected, same unit; None where it was not worked out
    note: what the reader must know, "" where there is nothing
    beyond: the value is known to be larger than this, where it is inf
    scale: magnitude of what the figure was formed from, for rounding
    chance: share of it that two solutions may both be off by
    """

    value: float
    dimension: Dimension
    bound: float | None = None
    note: str = ""
    beyond: float | None = None
    scale: float = 0.0
    chance: float = CHANCE

    @property
    def defined(self) -> bool:
        """Whether there is a value at all."""
        return not math.isnan(self.value)

    @property
    def rounding(self) -> float:
        """What rounding alone may make of it, in its unit."""
        if not math.isfinite(self.value):
            return 0.0
        return ROUNDING * max(abs(self.value), self.scale)

    def __neg__(self) -> Figure:
        return formed(-self.value, self.dimension, (self,))

    def __add__(self, other: Figure) -> Figure:
        return formed(self.value + other.value, self.dimension, (self, other))

    def __sub__(self, other: Figure) -> Figure:
        return formed(self.value - other.value, self.dimension, (self, other))

    def __mul__(self, other: Figure) -> Figure:
        scale = _size(self) * _size(other)
        return formed(self.value * other.value, self.dimension * other.dimension, (self, other), scale)

    def __truediv__(self, other: Figure) -> Figure:
        dimension = self.dimension / other.dimension
        if other.defined and abs(other.value) <= other.rounding:
            return undefined(dimension, "it divides by zero")
        scale = _size(self) * _size(other) / other.value**2
        return formed(self.value / other.value, dimension, (self, other), scale)


def undefined(dimension: Dimension, reason: str) -> Figure:
    """The figure that has no value, and why."""
    return Figure(math.nan, dimension, note=f"undefined: {reason}")


def plain(value: float, dimension: Dimension = NONE) -> Figure:
    """A number without error, as written in a requirement."""
    return Figure(value, dimension)


def _size(figure: Figure) -> float:
    return max(abs(figure.value), figure.scale)


def formed(value: float, dimension: Dimension, parts: Sequence[Figure], scale: float | None = None) -> Figure:
    """A result of arithmetic on parts: undefined where one of them is, or where it is an instant that does not come."""
    notes = dict.fromkeys(part.note for part in parts if part.note)
    if any(not part.defined for part in parts):
        return Figure(math.nan, dimension, note="; ".join(notes))
    if any(math.isinf(part.value) for part in parts):
        return undefined(dimension, "it is made of an instant that does not come within the study")
    if not math.isfinite(value):
        return undefined(dimension, "a function or power has no finite value there")
    if scale is None:
        scale = max(_size(part) for part in parts)
    chance = max(part.chance for part in parts)
    return Figure(value, dimension, note="; ".join(notes), scale=scale, chance=chance)


def bounded(coarse: Figure, fine: Figure) -> Figure:
    """The fine figure with the bound that its difference from the coarse one and rounding leave.

    coarse, fine: the same figure on solutions of the same study at a tolerance and at a tighter one
    Returns the fine value with bound SAFETY |fine - coarse| + chance |fine| + rounding. Where only one of the two has a
    finite value, the bound is infinite: nothing is known. An instant that comes in neither is returned as it is.
    Source: common practice, no source; the factor is reasoned at SAFETY.
    """
    if coarse.defined != fine.defined:
        return replace(fine, bound=math.inf, note=fine.note or coarse.note)
    if not fine.defined:
        return fine
    if math.isinf(fine.value) and fine.value == coarse.value:
        return fine
    if math.isinf(fine.value) or math.isinf(coarse.value):
        note = "it comes in one of two solutions only"
        return replace(fine, bound=math.inf, beyond=None, note=note)
    difference = abs(fine.value - coarse.value)
    rounding = coarse.rounding + fine.rounding
    chance = fine.chance * max(abs(fine.value), abs(coarse.value)) if difference > rounding else 0.0
    return replace(fine, bound=SAFETY * difference + chance + rounding)
