"""A source: sine, harmonics, constant and points added up, in volts or in amperes, with its series impedance.

Knows the keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

from grammar.quantities import AMPERE, ANGLE, HENRY, HERTZ, NONE, OHM, SECOND, VOLT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.components.recorded import spectrum
from simcore.equations.values import Value

WAVEFORM_KEYS = (
    Key(
        "sine",
        "amplitude of the sine, with `rms` or `peak` after the value",
        VOLT,
        form="amplitude",
        low=0.0,
        alternatives=(AMPERE,),
    ),
    Key("frequency", "frequency of the sine", HERTZ, low=0.0, open_low=True),
    Key("phase", "phase of the sine at t = 0; 0 deg is its upward zero crossing", ANGLE, default=0.0),
    Key(
        "harmonics",
        "harmonics as order: share of the sine @ angle, the angle in the harmonic's own degrees",
        NONE,
        form="harmonics",
        at=ANGLE,
        low=0.0,
    ),
    Key("constant", "constant part", VOLT, alternatives=(AMPERE,)),
    Key(
        "points",
        "values over time, joined by straight lines; two at one time make a jump",
        VOLT,
        form="series",
        at=SECOND,
        alternatives=(AMPERE,),
    ),
    Key("period", "time after which the points repeat", SECOND, low=0.0, open_low=True),
    Key(
        "samples",
        "CSV file with a recorded trace; with a period its harmonics up to the 50th, else joined by straight lines",
        NONE,
        form="text",
    ),
    Key("column", "column of the recorded trace, by default the second", NONE, form="text"),
    Key("scale", "factor on the recorded trace", NONE, default=1.0),
)

IMPEDANCE_KEYS = (
    Key("series_resistance", "resistance in series", OHM, default=0.0, low=0.0),
    Key("series_inductance", "inductance in series", HENRY, default=0.0, low=0.0),
)


def check_waveform(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """The rules between the keys of a waveform, which a three-phase set shares."""
    faults: list[tuple[str | None, str, str]] = []
    if not any(key in given for key in ("sine", "constant", "points", "samples")):
        faults.append((None, "it has no waveform", "Give `sine`, `constant`, `points` or `samples`."))
    if "sine" in given and "frequency" not in given:
        faults.append(("sine", "its sine has no frequency", "Add `frequency = 50 Hz`, or the frequency you have."))
    for key in ("frequency", "phase", "harmonics"):
        if key in given and "sine" not in given:
            faults.append((key, f"{key} is given without a sine", f"Add `sine`, or leave {key} out."))
    if "period" in given and not ("points" in given or "samples" in given):
        faults.append(("period", "a period is given without points", "It repeats `points`: add them or leave it out."))
    if "points" in given and "samples" in given:
        faults.append(("samples", "samples are given beside points", "Give the one or the other."))
    for key in ("column", "scale"):
        if key in given and "samples" not in given:
            faults.append((key, f"{key} is given without samples", f"Add `samples`, or leave {key} out."))
    return faults + check_points("points", given) + _check_harmonics(given)


def check_points(key: str, given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """The rules for a list over time."""
    points = given.get(key)
    if not isinstance(points, tuple):
        return []
    times = [float(time) for time, _ in points]
    if any(later < earlier for earlier, later in pairwise(times)):
        return [(key, "the times of its points do not rise", "Write the points in the order of their times.")]
    if any(first == third for first, third in zip(times, times[2:], strict=False)):
        return [(key, "three of its points stand at one time", "Two at one time make a jump: leave one out.")]
    period = given.get("period")
    if isinstance(period, float) and (times[0] < 0.0 or times[-1] > period):
        return [(key, "its points do not lie within one period", "Keep the times between 0 s and the period.")]
    return []


def _check_harmonics(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    harmonics = given.get("harmonics")
    if not isinstance(harmonics, tuple):
        return []
    orders = [order for order, _, _ in harmonics]
    if any(order < 2 or order != round(order) for order in orders):
        cure = "Orders are whole numbers from 2 on: `[3: 2 %, 5: 1 % @ 170 deg]`."
        return [("harmonics", "an order of a harmonic is no whole number above 1", cure)]
    if len(dict.fromkeys(orders)) != len(orders):
        return [("harmonics", "a harmonic is given twice", "Give each order once.")]
    return []


def waveform(frame: Frame, part: Part, factor: float = 1.0, delay: float = 0.0, index: int = 0) -> Value:
    """The source's value over time, in V or A.

    factor: on the sine, its harmonics included; delay: in rad of the fundamental; index: which of several amplitudes
    """
    total = part.value("constant")
    if part.given("sine") is not None:
        values, measure, _ = part.given("sine")
        peak = values[min(index, len(values) - 1)] * factor * (math.sqrt(2.0) if measure == "rms" else 1.0)
        phase = part.given("phase") - delay
        for order, share, angle in ((1.0, 1.0, 0.0), *(part.given("harmonics") or ())):
            wave = frame.sine(order * part.given("frequency"), order * phase + angle)
            total = total + frame.parameter(share * peak) * wave
    if part.given("points") is not None:
        total = total + frame.waveform(part.given("points"), part.given("period"))
    if part.given("samples") is not None:
        total = total + _recorded(frame, part, factor, delay)
    return total


def _recorded(frame: Frame, part: Part, factor: float, delay: float) -> Value:
    """A recorded trace: its mean and harmonics where it repeats, else straight lines between its points."""
    points, scale, period = part.given("samples"), part.given("scale") * factor, part.given("period")
    if period is None:
        return frame.waveform([(time, scale * value) for time, value in points], None)
    found = spectrum(points, period)
    total = frame.parameter(scale * found.mean)
    for order, peak, phase in found.harmonics:
        total = total + frame.parameter(scale * peak) * frame.sine(order / period, phase - order * delay)
    return total


def describe(given: dict[str, Any]) -> list[str]:
    """For `look`: what was made of a recorded period."""
    if "samples" not in given or "period" not in given:
        return []
    found = spectrum(given["samples"], given["period"])
    return [f"{len(found.harmonics)} harmonics kept, which miss at most {100.0 * found.missed:.2g} % of its peak"]


def _build(frame: Frame, part: Part) -> None:
    weights = part.across(part.ports[0])
    if part.unit == "A":
        frame.current(part, weights, waveform(frame, part))
        return
    frame.series(
        part,
        weights,
        resistance=part.value("series_resistance"),
        inductance=part.value("series_inductance"),
        source=waveform(frame, part),
    )


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    faults = check_waveform(given)
    sine = given.get("sine")
    if isinstance(sine, tuple) and sine[2]:
        cure = f"Write `rms` or `peak` alone; `{sine[2]}` is for a three_phase set."
        faults.append(("sine", f"a single source has no {sine[2]} amplitude", cure))
    return faults


SOURCE = Kind(
    "source",
    "ideal source with a series impedance; what is given together adds",
    "branch",
    WAVEFORM_KEYS + IMPEDANCE_KEYS,
    check=_check,
    build=_build,
    describe=describe,
)
