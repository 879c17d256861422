"""An inrush limiter: a resistance that falls as its own loss heats it.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, JOULE, JOULE_PER_KELVIN, KELVIN, OHM, WATT_PER_KELVIN
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.equations.values import Value, exp

_COLD = 298.15
_SMALL = 1.0


def _build(frame: Frame, part: Part) -> None:
    """R = R_25 exp(B (1/T - 1/298.15 K)), C dT/dt = v i - D (T - T_ambient).

    A step takes R at the temperature before it, and the heat balance linearised there at the step's current (linearly
    implicit; the error is extrapolated away like that of the step). Along that line heat falls with temperature, so
    that steps of any length end at the rest state wherever that is stable, whatever is in series. Source: the
    exponential law and heat balance of IEC 60539-1 (from memory).
    """
    cold, sensitivity = part.value("cold_resistance"), part.value("sensitivity")
    ambient = frame.parameter(part.temperature(), positive=True)
    rate = frame.step / part.value("heat_capacity")
    dissipation = part.value("dissipation")

    def law(voltage: Value, before: Value) -> tuple[Value, Value, dict[str, Value]]:
        current = voltage / (cold * exp(sensitivity * (1.0 / before - 1.0 / _COLD)))
        heat = voltage * current
        slope = dissipation + heat * sensitivity / (before * before)
        after = before + rate * (heat - dissipation * (before - ambient)) / (1.0 + rate * slope)
        return current, after, {"temperature": after}

    small = frame.graph.constant(_SMALL)
    frame.carrying(
        part,
        part.across(part.ports[0]),
        law,
        quantity="temperature",
        small=small,
        initial=ambient,
        scale=frame.small_voltage,
    )


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
    build=_build,
)
