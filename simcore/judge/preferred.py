"""Preferred numbers: the series that parts are made in (IEC 60063) and rated in (ISO 3), and the next value of one.

Every series checks itself when it is made. Only E24 is listed; the others are taken from it or worked out.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

SAME = 1e-9
"""Relative difference up to which a value counts as being on a series."""


@dataclass(frozen=True)
class Series:
    """A series by name; values: those from 1 up to, and without, 10, rising. Raises ValueError for one that can't be
    right: each value lies within half a step of the even spacing."""

    name: str
    values: tuple[float, ...]

    def __post_init__(self) -> None:
        count = len(self.values)
        if self.name[1:] != str(count) or self.values != tuple(sorted(set(self.values))):
            raise ValueError(f"{self.name} does not have its number of values, rising")
        for place, value in enumerate(self.values):
            if abs(math.log10(value) - place / count) > 0.5 / count:
                raise ValueError(f"{self.name}: {value} is not in its place")

    def up(self, value: float) -> float:
        """The smallest preferred value that is not below a value above zero."""
        return next(each for each in self._from(value, 0, 1) if each >= value * (1.0 - SAME))

    def down(self, value: float) -> float:
        """The largest preferred value that is not above a value above zero."""
        return next(each for each in self._from(value, len(self.values) - 1, -1) if each <= value * (1.0 + SAME))

    def _from(self, value: float, place: int, step: int) -> Iterator[float]:
        """Preferred values onwards from an end of the decade beside the value's own, in the step's direction."""
        if not (math.isfinite(value) and value > 0.0):
            raise ValueError("only a finite value above zero has preferred neighbours")
        decade = math.floor(math.log10(value)) - step
        while True:
            yield float(f"{self.values[place]}e{decade}")
            place += step
            if not 0 <= place < len(self.values):
                place, decade = place % len(self.values), decade + step


_E24 = (
    *(1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0),
    *(3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1),
)
_E192_EXCEPTION = {9.19: 9.2}


def _e192() -> tuple[float, ...]:
    """Three digits of 10^(k/192), with the one exception that the standard makes."""
    rounded = [round(10.0 ** (place / 192.0), 2) for place in range(192)]
    return tuple(_E192_EXCEPTION.get(value, value) for value in rounded)


SERIES: dict[str, Series] = {
    series.name: series
    for series in (
        *(Series(f"E{count}", _E24[:: 24 // count]) for count in (3, 6, 12, 24)),
        *(Series(f"E{count}", _e192()[:: 192 // count]) for count in (48, 96, 192)),
    )
}
"""Name -> series. Source: IEC 60063:2015."""

R10 = Series("R10", (1.0, 1.25, 1.6, 2.0, 2.5, 3.15, 4.0, 5.0, 6.3, 8.0))
"""What ratings are rounded up to: of fuses, capacitors, transformers and most else. Source: ISO 3:1973, from memory."""
