"""A thyristor: a diode that conducts only once fired, until its current falls below the holding current.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, ANGLE, VOLT
from simcore.components.diode import DIODE_KEYS, check_law
from simcore.components.kind import Key, Kind

THYRISTOR = Kind(
    "thyristor",
    "controlled diode",
    "branch",
    (
        *DIODE_KEYS,
        Key("firing_angle", "angle after the upward zero crossing of the firing reference", ANGLE, low=0.0),
        Key("firing_reference", "voltage whose upward zero crossing the angle counts from", VOLT, form="expression"),
        Key("holding_current", "current below which it stops conducting", AMPERE, low=0.0),
    ),
    check=check_law,
)
