"""A capacitor: i = capacitance dv/dt, with the resistance and inductance of its leads and its leakage.

Knows its keys, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, FARAD, HENRY, HERTZ, KELVIN, OHM, VOLT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


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
        Key("ambient", "temperature around it, where it differs from the circuit's", KELVIN, low=0.0, open_low=True),
    ),
    value_key="capacitance",
    build=_build,
)
