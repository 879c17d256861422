"""A load that takes a given power, current or resistance, steady or over time.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, OHM, SECOND, VOLT, WATT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.components.source import check_points
from simcore.equations.values import Value, exp, larger, log, sqrt, where

_TAKES = ("power", "current", "resistance")
_IDLE = 1e-12
"""Conductance in S of a load that is off, so that its nodes stay defined."""

_CLOSE = 1e-3
"""Share of the cut-out voltage that stands for the law's scale: its error is of first order."""

_KNEE = 0.01
"""Voltage in V about which a load of constant current lets go: it takes none from 0 V."""


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    takes = [key for key in _TAKES if key in given]
    if len(takes) != 1:
        what = "it takes nothing" if not takes else f"{' and '.join(takes)} are given together"
        return [(takes[1] if takes else None, what, "Give one of `power`, `current` and `resistance`.")]
    faults = check_points(takes[0], given)
    if "period" in given and not isinstance(given[takes[0]], tuple):
        faults.append(("period", "a period is given without a list over time", "It repeats a list: leave it out."))
    levels = [key for key in ("cut_in", "cut_out") if key in given]
    if takes[0] != "power":
        cure = "They are of a load of constant power: leave them out."
        return faults + [(key, f"{key} is given for a load of constant {takes[0]}", cure) for key in levels]
    if len(levels) < 2:
        cure = "Give `cut_in` and `cut_out`, the voltages at which what it feeds starts and stops."
        return [*faults, (None, "a load of constant power has no cut_in and cut_out", cure)]
    cut_in, cut_out = given["cut_in"], given["cut_out"]
    if isinstance(cut_in, float) and isinstance(cut_out, float) and not 0.0 < cut_out < cut_in:
        faults.append(("cut_out", "its cut_out is not between 0 V and its cut_in", "Put `cut_out` under `cut_in`."))
    return faults


def _over_time(frame: Frame, part: Part, key: str) -> Value:
    given = part.given(key)
    return frame.waveform(given, part.given("period")) if isinstance(given, tuple) else part.value(key)


def _build(frame: Frame, part: Part) -> None:
    weights = part.across(part.ports[0])
    if part.given("resistance") is not None:
        resistance = _over_time(frame, part, "resistance")
        # The exponential of the logarithm is known to be positive, which a straight line is not.
        frame.series(part, weights, resistance=resistance if resistance.positive else exp(log(resistance)))
    elif part.given("current") is not None:
        _constant_current(frame, part)
    else:
        _constant_power(frame, part)


def _constant_current(frame: Frame, part: Part) -> None:
    """i = I v / sqrt(v^2 + V_k^2): the current from some V_k = 10 mV on, and nothing from a dead rail."""
    current, knee = larger(_over_time(frame, part, "current"), 0.0), frame.graph.constant(_KNEE)

    def law(voltage: Value) -> Value:
        return current * voltage / sqrt(voltage * voltage + knee * knee)

    def slope(voltage: Value) -> Value:
        square = voltage * voltage + knee * knee
        return current * (knee * knee / (square * sqrt(square)))

    frame.nonlinear(part, part.across(part.ports[0]), law, scale=knee, leak=_IDLE, slope=slope, flattens=True)


def _constant_power(frame: Frame, part: Part) -> None:
    """i = P / v from cut-in to cut-out; the law goes on as a resistance below half the cut-out voltage, which only a
    Newton iterate sees."""
    power, cut_out = _over_time(frame, part, "power"), part.value("cut_out")
    running = frame.flag(part, "running", False)
    least = 0.25 * cut_out * cut_out

    def law(voltage: Value) -> Value:
        taken = power * voltage / larger(voltage * voltage, least)
        return where(running.value - 0.5, taken, 0.0)

    weights = part.across(part.ports[0])
    scale = _CLOSE * cut_out

    def slope(voltage: Value) -> Value:
        """None where the law would fall: there it is a current source whose value is found again at each iterate."""
        resistive = where(voltage * voltage - least, 0.0, power / least)
        return where(running.value - 0.5, resistive, 0.0)

    frame.nonlinear(part, weights, law, scale=scale, straight=0.5 - running.value, leak=_IDLE, slope=slope)
    rail = frame.sensed_voltage(weights)
    starts, stops = [(running, True)], [(running, False)]
    frame.threshold(part, [rail], part.value("cut_in"), armed=stops, sets=starts, tells="starts")
    frame.threshold(part, [rail.times(-1.0)], -cut_out, armed=starts, sets=stops, tells="stops")


LOAD = Kind(
    "load",
    "load of constant power, current or resistance",
    "branch",
    (
        Key("power", "power it takes", WATT, form="timed", at=SECOND, low=0.0),
        Key("cut_in", "voltage above which a load of constant power starts", VOLT, low=0.0),
        Key("cut_out", "voltage below which it stops", VOLT, low=0.0),
        Key("current", "current it takes", AMPERE, form="timed", at=SECOND, low=0.0),
        Key("resistance", "its resistance", OHM, form="timed", at=SECOND, low=0.0, open_low=True),
        Key("period", "time after which a list over time repeats", SECOND, low=0.0, open_low=True),
    ),
    check=_check,
    build=_build,
)
