"""An inductor: v = inductance di/dt + series_resistance i.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, HENRY, OHM
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _build(frame: Frame, part: Part) -> None:
    frame.series(
        part,
        part.across(part.ports[0]),
        resistance=part.value("series_resistance"),
        inductance=part.value("inductance"),
        initial_current=part.value("initial_current"),
    )


INDUCTOR = Kind(
    "inductor",
    "inductance, with the resistance of its winding where it is given",
    "branch",
    (
        Key("inductance", "its inductance", HENRY, low=0.0, open_low=True, required=True),
        Key("series_resistance", "resistance of its winding", OHM, default=0.0, low=0.0),
        Key(
            "saturation_current",
            "current at which the inductance has fallen",
            AMPERE,
            low=0.0,
            open_low=True,
            available=False,
        ),
        Key("initial_current", "current at the start of a transient", AMPERE, default=0.0),
        Key("rated_current", "rms current it stands", AMPERE, low=0.0, open_low=True, rating=True),
    ),
    value_key="inductance",
    build=_build,
)
