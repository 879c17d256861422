"""A clamp: a voltage limiter given by two points of its curve.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, JOULE, VOLT
from simcore.components.kind import Key, Kind

CLAMP = Kind(
    "clamp",
    "voltage limiter, alike in both directions",
    "branch",
    (
        Key(
            "clamping",
            "points of its curve",
            VOLT,
            form="curve",
            at=AMPERE,
            low=0.0,
            open_low=True,
            required=True,
        ),
        Key("rated_energy", "energy of a surge it stands", JOULE, low=0.0, open_low=True, rating=True),
    ),
)
