"""Limits on the voltage of what can be touched once a design is disconnected, by the capacitance behind it.

Every table checks itself when it is made. It knows no circuits and opens no files.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import pairwise


@dataclass(frozen=True)
class DischargeTable:
    """Limits on a voltage some time after disconnection.

    after: that time in s; volt: capacitance in F -> limit in V; scope: what the reader must know of where it applies
    Raises ValueError for a table that can't be right: with the capacitance the limit falls, and the charge never does.
    """

    name: str
    after: float
    volt: Mapping[float, float]
    scope: str

    def __post_init__(self) -> None:
        rows = list(self.volt.items())
        if not rows or not all(math.isfinite(part) and part > 0.0 for part in (self.after, *sum(rows, ()))):
            raise ValueError(f"{self.name}: a limit, its capacitance and its time are numbers above zero")
        for (less, high), (more, low) in pairwise(rows):
            if not (less < more and high > low):
                raise ValueError(f"{self.name}: the limit does not fall with the capacitance at {more:g} F")
            if less * high > more * low * (1.0 + _ROUNDED):
                raise ValueError(f"{self.name}: the charge falls with the capacitance at {more:g} F")

    def at(self, capacitance: float) -> float:
        """The limit in V for a capacitance in F: that of the next larger one listed, of the largest for all above."""
        return next((volt for listed, volt in self.volt.items() if capacitance <= listed), list(self.volt.values())[-1])


_ROUNDED = 0.01
"""Relative: limits are rounded, which the charge shows."""

_ES1 = {
    0.133e-9: 25e3,
    0.2e-9: 20e3,
    0.4e-9: 10e3,
    0.8e-9: 5e3,
    1.6e-9: 2.5e3,
    4e-9: 1e3,
    8e-9: 500.0,
    12e-9: 350.0,
    18e-9: 250.0,
    28e-9: 200.0,
    41e-9: 150.0,
    61e-9: 125.0,
    91e-9: 100.0,
    170e-9: 75.0,
    300e-9: 60.0,
}
_SCOPE = "the table is from memory, and the edition of the standard in force decides, with its scope and exclusions"

DISCHARGE: dict[str, DischargeTable] = {
    table.name: table
    for table in (
        DischargeTable("IEC 62368-1 ES1", 2.0, _ES1, _SCOPE),
        DischargeTable("IEC 62368-1 ES2", 2.0, {farad: 2.0 * volt for farad, volt in _ES1.items()}, _SCOPE),
    )
}
"""Name -> table. Source: IEC 62368-1:2018, table 5 and 5.5.2.2 (2 s after disconnection of a connector), from memory;
limits of ES2 are twice those of ES1."""
