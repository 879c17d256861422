"""A capacitor: i = capacitance dv/dt, with the resistance and inductance of its leads and its leakage.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from itertools import pairwise
from typing import Any

from grammar.quantities import AMPERE, FARAD, HENRY, HERTZ, KELVIN, KELVIN_PER_WATT, NONE, OHM, SECOND, VOLT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _check(given: dict[str, Any]) -> list[tuple[str | None, str, str]]:
    point = given.get("endurance")
    if isinstance(point, tuple) and not 200.0 <= point[1] <= 1000.0:
        cure = "Write the core's temperature behind the @: `5000 h @ 105 degC`."
        return [("endurance", "endurance holds at no temperature that a capacitor could have", cure)]
    factors = given.get("frequency_factors")
    if not isinstance(factors, tuple):
        return []
    if "rated_ripple_current" not in given:
        cure = "Add `rated_ripple_current`, with the frequency that it holds at."
        return [("frequency_factors", "frequency_factors are given without rated_ripple_current", cure)]
    frequencies = [0.0, *(frequency for frequency, _ in factors)]
    if any(one >= other for one, other in pairwise(frequencies)):
        cure = "Write frequencies above zero, rising: `[100 Hz: 1, 1 kHz: 1.3, 10 kHz: 1.4]`."
        return [("frequency_factors", "the frequencies don't rise", cure)]
    return []


def _build(frame: Frame, part: Part) -> None:
    port = part.ports[0]
    leads = {"resistance": part.value("series_resistance"), "inductance": part.value("series_inductance")}
    capacitance = {"capacitance": part.value("capacitance"), "initial_voltage": part.value("initial_voltage")}
    leaks = part.given("leakage_resistance") is not None
    bare = all(value.constant == 0.0 for value in leads.values())
    if not leaks or bare:
        frame.series(part, part.across(port), **leads, **capacitance)
        inside = part.across(port)
    else:
        inner = f"{part.name}.inner"
        inside = {inner: 1.0, port.b: -1.0}
        frame.series(part, {port.a: 1.0, inner: -1.0}, **leads)
        frame.series(part, inside, **capacitance)
    if leaks:
        frame.series(part, inside, resistance=part.value("leakage_resistance"))


CAPACITOR = Kind(
    "capacitor",
    "capacitance, with its losses where they are given",
    "branch",
    (
        Key("capacitance", "its capacitance", FARAD, low=0.0, open_low=True, required=True),
        Key("series_resistance", "equivalent series resistance", OHM, default=0.0, low=0.0),
        Key("series_inductance", "equivalent series inductance", HENRY, default=0.0, low=0.0),
        Key("leakage_resistance", "resistance across the capacitance", OHM, low=0.0, open_low=True),
        Key("initial_voltage", "voltage at the start of a transient", VOLT, default=0.0),
        Key("rated_voltage", "voltage it stands", VOLT, low=0.0, open_low=True, rating=True),
        Key(
            "rated_ripple_current",
            "rms ripple current it stands, with the frequency this holds at",
            AMPERE,
            form="point",
            at=HERTZ,
            low=0.0,
            open_low=True,
            rating=True,
            bare=True,
        ),
        Key(
            "frequency_factors",
            "factors on its rated ripple current by frequency",
            NONE,
            form="series",
            at=HERTZ,
            low=0.0,
            open_low=True,
        ),
        Key("rated_temperature", "core temperature it stands", KELVIN, low=0.0, open_low=True, rating=True),
        Key("endurance", "life at a core temperature", SECOND, form="point", at=KELVIN, low=0.0, open_low=True),
        Key("thermal_resistance", "thermal resistance from core to ambient", KELVIN_PER_WATT, low=0.0),
        Key("temperature", "core temperature it runs at", KELVIN, low=50.0, high=1000.0),
        Key("ambient", "temperature around it, where it differs from the circuit's", KELVIN, low=0.0, open_low=True),
    ),
    value_key="capacitance",
    check=_check,
    build=_build,
)
