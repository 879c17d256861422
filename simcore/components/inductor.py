"""An inductor: v = inductance di/dt + series_resistance i, the inductance falling with the current where it saturates.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from collections.abc import Hashable

from grammar.quantities import AMPERE, HENRY, OHM
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.components.saturation import GAPPED, Saturation


def _build(frame: Frame, part: Part) -> None:
    port = part.ports[0]
    resistance, start = part.value("series_resistance"), part.value("initial_current")
    if part.given("saturation_current") is None:
        inductance = part.value("inductance")
        ends = part.across(port)
        frame.series(part, ends, resistance=resistance, inductance=inductance, initial_current=start)
        return
    inner: Hashable = port.a
    if resistance.constant != 0.0:
        inner = f"{part.name}.inner"
        frame.series(part, {port.a: 1.0, inner: -1.0}, resistance=resistance)
    core = Saturation(frame, part.given("inductance"), part.given("saturation_current"), GAPPED)
    core.stamp(part, {inner: 1.0, port.b: -1.0}, part.given("initial_current"))


INDUCTOR = Kind(
    "inductor",
    "inductance, with the resistance of its winding where it is given",
    "branch",
    (
        Key("inductance", "its inductance", HENRY, low=0.0, open_low=True, required=True),
        Key("series_resistance", "resistance of its winding", OHM, default=0.0, low=0.0),
        Key("saturation_current", "current at which the inductance has fallen by 30 %", AMPERE, low=0.0, open_low=True),
        Key("initial_current", "current at the start of a transient", AMPERE, default=0.0),
        Key("rated_current", "rms current it stands", AMPERE, low=0.0, open_low=True, rating=True),
    ),
    value_key="inductance",
    build=_build,
)
