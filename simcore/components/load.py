"""A load that takes a given power, current or resistance.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, OHM, SECOND, VOLT, WATT
from simcore.components.kind import Key, Kind

LOAD = Kind(
    "load",
    "load of constant power, current or resistance",
    "branch",
    (
        Key("power", "power it takes", WATT, form="timed", at=SECOND, low=0.0),
        Key("cut_in", "voltage above which a load of constant power starts", VOLT, low=0.0),
        Key("cut_out", "voltage below which it stops", VOLT, low=0.0),
        Key("current", "current it takes", AMPERE, form="timed", at=SECOND, low=0.0),
        Key("resistance", "its resistance", OHM, form="timed", at=SECOND, low=0.0, open_low=True),
        Key("period", "time after which a list over time repeats", SECOND, low=0.0, open_low=True),
    ),
)
