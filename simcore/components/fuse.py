"""A fuse: a resistance that counts the integral of its squared current.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, I2T, OHM
from simcore.components.kind import Key, Kind

FUSE = Kind(
    "fuse",
    "resistance that melts when its squared current has added up",
    "branch",
    (
        Key("rated_current", "current it carries for good", AMPERE, low=0.0, open_low=True, rating=True),
        Key("resistance", "its cold resistance", OHM, low=0.0),
        Key("melting_i2t", "integral of the squared current at which it melts", I2T, low=0.0, open_low=True),
    ),
)
