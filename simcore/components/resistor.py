"""A resistor: v = resistance i.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import OHM, WATT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _build(frame: Frame, part: Part) -> None:
    frame.series(part, part.across(part.ports[0]), resistance=part.value("resistance"))


RESISTOR = Kind(
    "resistor",
    "linear resistance",
    "branch",
    (
        Key("resistance", "its resistance", OHM, low=0.0, required=True),
        Key("rated_power", "dissipation it stands", WATT, low=0.0, open_low=True, rating=True),
    ),
    value_key="resistance",
    build=_build,
)
