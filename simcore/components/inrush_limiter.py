"""An inrush limiter: a resistance that falls as its own loss heats it.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, JOULE, JOULE_PER_KELVIN, KELVIN, OHM, WATT_PER_KELVIN
from simcore.components.kind import Key, Kind

INRUSH_LIMITER = Kind(
    "inrush_limiter",
    "resistor with a negative temperature coefficient",
    "branch",
    (
        Key("cold_resistance", "resistance at 25 degC", OHM, low=0.0, open_low=True, required=True),
        Key("sensitivity", "constant of its exponential law", KELVIN, low=0.0, open_low=True, required=True),
        Key(
            "dissipation", "loss for each kelvin above ambient", WATT_PER_KELVIN, low=0.0, open_low=True, required=True
        ),
        Key("heat_capacity", "heat for each kelvin", JOULE_PER_KELVIN, low=0.0, open_low=True, required=True),
        Key("rated_current", "current it carries for good", AMPERE, low=0.0, open_low=True, rating=True),
        Key("rated_energy", "energy of a switch-on it stands", JOULE, low=0.0, open_low=True, rating=True),
    ),
)
