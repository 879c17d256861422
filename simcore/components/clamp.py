"""A clamp: a voltage limiter given by points of its curve, such as a voltage-dependent resistor.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math

import numpy as np

from grammar.quantities import AMPERE, JOULE, VOLT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.equations.values import Value, exp, larger, log

_LEAK = 1e-12
_NOTHING = 1e-9


def power_law(points: tuple[tuple[float, float], ...]) -> tuple[float, float]:
    """Voltage at 1 A and exponent of i = (v / V_1)^exponent through points (V, A), by least squares in logarithms."""
    voltages, currents = np.log(np.array(points)).T
    exponent, offset = np.polyfit(voltages, currents, 1)
    return math.exp(-offset / exponent), float(exponent)


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    points = given.get("clamping")
    if not isinstance(points, tuple):
        return []
    if len(points) < 2:
        return [("clamping", "one point does not fix its curve", "Give a second one at another current.")]
    if any(not current > 0.0 for _, current in points):
        return [("clamping", "a point has no current above zero", "Write the points as V @ A: `430 V @ 1 mA`.")]
    cure = "Check the points: write them as V @ A."
    rising = sorted(points, key=lambda point: point[1])
    pairs = zip(rising, rising[1:], strict=False)
    if any(not (low[0] < high[0] and low[1] < high[1]) for low, high in pairs):
        return [("clamping", "its voltage does not rise with its current", cure)]
    if power_law(points)[1] < 1.0:
        return [("clamping", "its points make no clamp: the current rises slower than the voltage", cure)]
    return []


def _build(frame: Frame, part: Part) -> None:
    """i = (v / V_1)^exponent, alike in both directions (the power law of voltage-dependent resistors; IEC 61051-1, from
    memory)."""
    single, exponent = (frame.parameter(number, positive=True) for number in power_law(part.given("clamping")))
    lowest = min(voltage for voltage, _ in part.given("clamping"))
    scale = frame.parameter(lowest, positive=True) / exponent

    def law(voltage: Value) -> Value:
        return exp(exponent * log(larger(voltage / single, _NOTHING)))

    port = part.ports[0]
    for weights in ({port.a: 1.0, port.b: -1.0}, {port.b: 1.0, port.a: -1.0}):
        frame.nonlinear(part, weights, law, scale=scale, critical=frame.parameter(lowest, positive=True), leak=_LEAK)


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
    check=_check,
    build=_build,
)
