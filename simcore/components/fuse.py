"""A fuse: a resistance that its current heats, and that melts.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, I2T, OHM
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.equations.values import Value

MOLTEN = 1e9
"""Resistance in Ohm of a molten fuse; the arc is not described."""

FOR_GOOD = 1.25
"""Current over the rated one that a fuse stands for good (conventional non-fusing current: IEC 60269-1, from
memory)."""

_SMALL = 0.01


def _build(frame: Frame, part: Part) -> None:
    """Melts when dH/dt = i^2 - H / tau has brought H to the melting I2t.

    A surge shorter than tau counts in full; tau = melting I2t / (1.25 rated current)^2 is such that a steady current of
    that size just does not melt it; without a rated current no heat is lost. Source: heat balance of one lump (common
    practice, no source).
    """
    weights = part.across(part.ports[0])
    limit = part.given("melting_i2t")
    if limit is None:
        frame.series(part, weights, resistance=part.value("resistance"))
        return
    molten = frame.flag(part, "molten", False)
    resistance = molten.choose(MOLTEN, part.value("resistance"))
    rated = part.given("rated_current")
    rate = frame.parameter(0.0 if rated is None else (FOR_GOOD * rated) ** 2 / limit, positive=True)

    def law(voltage: Value, before: Value) -> tuple[Value, Value, dict[str, Value]]:
        current = voltage / resistance
        heated = (before + frame.step * current * current) / (1.0 + frame.step * rate)
        after = molten.choose(before, heated)
        return current, after, {"heat": after}

    melting = frame.parameter(limit, positive=True)
    frame.carrying(part, weights, law, quantity="heat", small=_SMALL * melting, scale=frame.small_voltage)
    heat = [frame.sensed_quantity()]
    frame.threshold(part, heat, melting, armed=[(molten, False)], sets=[(molten, True)], tells="melts")


FUSE = Kind(
    "fuse",
    "resistance that melts when its squared current has added up",
    "branch",
    (
        Key("rated_current", "current it carries for good", AMPERE, low=0.0, open_low=True, rating=True),
        Key("resistance", "its cold resistance", OHM, low=0.0, open_low=True, required=True),
        Key("melting_i2t", "integral of the squared current at which it melts", I2T, low=0.0, open_low=True),
    ),
    build=_build,
)
