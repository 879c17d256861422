"""A transformer: any number of windings on one core, with magnetising and leakage inductance and winding resistance.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, HENRY, NONE, OHM, VOLT, WATT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    if "turns" in given:
        return []
    return [(None, "its turns are not given", "Add `turns = 230 : 12`, one number a winding; only ratios count.")]


def _build(frame: Frame, part: Part) -> None:
    """All windings share the core's volts per turn of the first winding; each has its own impedance in series."""
    turns = part.given("turns")
    core = (part.name, "core")
    for port in part.ports:
        index = port.index
        ratio = 1.0 if index == 0 else frame.parameter(turns[index] / turns[0], positive=True)
        frame.series(
            part,
            {**part.across(port), core: -ratio},
            port=port.name,
            resistance=part.value("resistance", index),
            inductance=part.value("leakage", index),
        )
    if part.given("magnetising") is not None:
        frame.series(part, {core: 1.0}, port="core", inductance=part.value("magnetising"))


TRANSFORMER = Kind(
    "transformer",
    "windings on one core; ideal where no inductance or resistance is given",
    "windings",
    (
        Key("turns", "turns of each winding; only their ratios count", NONE, form="ratio", low=0.0, open_low=True),
        Key("magnetising", "magnetising inductance seen from the first winding", HENRY, low=0.0, open_low=True),
        Key("leakage", "leakage inductance of each winding, seen from itself", HENRY, form="ratio", low=0.0),
        Key("resistance", "resistance of each winding, seen from itself", OHM, form="ratio", low=0.0),
        Key("rated_power", "apparent power it stands", WATT, low=0.0, open_low=True, rating=True),
        Key(
            "rated_voltage",
            "test sheet: rated voltage of each winding",
            VOLT,
            form="ratio",
            low=0.0,
            open_low=True,
            available=False,
        ),
        Key(
            "short_circuit_voltage",
            "test sheet: short-circuit voltage over rated voltage",
            NONE,
            low=0.0,
            open_low=True,
            available=False,
        ),
        Key(
            "no_load_current",
            "test sheet: current of the first winding at no load",
            AMPERE,
            low=0.0,
            open_low=True,
            available=False,
        ),
        Key("copper_loss", "test sheet: loss in the windings at rated power", WATT, low=0.0, available=False),
    ),
    check=_check,
    build=_build,
)
