"""A transformer: any number of windings on one core, with magnetising and leakage inductance and winding resistance.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from grammar.quantities import AMPERE, HENRY, HERTZ, NONE, OHM, VOLT, WATT, show
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.components.saturation import CLOSED, Saturation

_SHEET = ("rated_voltage", "short_circuit_voltage", "no_load_current", "copper_loss", "rated_frequency")
_DIRECT = ("turns", "magnetising", "leakage", "resistance")


@dataclass(frozen=True)
class Windings:
    """What a transformer's equations need: turns; leakage (H) and resistance (Ohm) of each winding, seen from itself;
    magnetising inductance (H) seen from the first, None for an ideal core."""

    turns: tuple[float, ...]
    leakage: tuple[float, ...]
    resistance: tuple[float, ...]
    magnetising: float | None


def windings_of(given: dict[str, Any]) -> Windings:
    """As given, or worked out from the test sheet.

    Short-circuit impedance Z = u_k U^2 / S, resistance R = P_copper U^2 / S^2, reactance sqrt(Z^2 - R^2); half of each
    in the first winding, the other half in the other windings together, which then carry equal shares of the power;
    magnetising reactance U / I_0, the core's loss left out. Source: short-circuit and no-load test, IEC 60076-1 (from
    memory); the halves: common practice, no source.
    """
    if "rated_voltage" not in given:
        count = len(given["turns"])
        none = (0.0,) * count
        return Windings(
            given["turns"], given.get("leakage", none), given.get("resistance", none), given.get("magnetising")
        )
    voltages = given["rated_voltage"]
    omega = 2.0 * math.pi * given.get("rated_frequency", 50.0)
    resistance = reactance = 0.0
    if "rated_power" in given:
        base = voltages[0] ** 2 / given["rated_power"]
        resistance = given.get("copper_loss", 0.0) * base / given["rated_power"]
        reactance = math.sqrt(max(0.0, (given.get("short_circuit_voltage", 0.0) * base) ** 2 - resistance**2))
    others = len(voltages) - 1
    shares = [0.5, *(0.5 * others * (each / voltages[0]) ** 2 for each in voltages[1:])]
    idle = given.get("no_load_current")
    return Windings(
        tuple(voltages),
        tuple(share * reactance / omega for share in shares),
        tuple(share * resistance for share in shares),
        None if idle is None else voltages[0] / (omega * idle),
    )


def _check(given: dict[str, Any]) -> list[tuple[str | None, str, str]]:
    sheet, direct = ([key for key in keys if key in given] for keys in (_SHEET, _DIRECT))
    if sheet and direct:
        what = f"{direct[0]} is given beside the test sheet's {sheet[0]}"
        return [(direct[0], what, "Describe it by the one or by the other.")]
    if not sheet and "turns" not in given:
        return [(None, "its turns are not given", "Add `turns = 230 : 12`, one number a winding; only ratios count.")]
    faults: list[tuple[str | None, str, str]] = []
    if sheet and "rated_voltage" not in given:
        faults.append((sheet[0], f"{sheet[0]} is given without rated_voltage", "Add `rated_voltage = 230 V : 12 V`."))
    for key in ("short_circuit_voltage", "copper_loss"):
        if key in given and "rated_power" not in given:
            faults.append((key, f"{key} is given without rated_power", "Add `rated_power`, which it holds at."))
    if not faults and "short_circuit_voltage" in given and "copper_loss" in given:
        share = given["copper_loss"] / given["rated_power"]
        if share > given["short_circuit_voltage"]:
            what = f"its copper loss alone makes {100.0 * share:.3g} % of short-circuit voltage"
            faults.append(("short_circuit_voltage", what, "Check both against the test sheet."))
    if "saturation_current" in given and not ("magnetising" in given or "no_load_current" in given):
        cure = "Add `magnetising`, or `no_load_current` of the test sheet."
        faults.append(("saturation_current", "its core saturates but has no inductance", cure))
    return faults


def _build(frame: Frame, part: Part) -> None:
    """All windings share the core's volts per turn of the first winding; each has its own impedance in series."""
    found = windings_of(part.everything)
    core = (part.name, "core")
    for port in part.ports:
        index = port.index
        ratio = 1.0 if index == 0 else frame.parameter(found.turns[index] / found.turns[0], positive=True)
        frame.series(
            part,
            {**part.across(port), core: -ratio},
            port=port.name,
            resistance=frame.parameter(found.resistance[index], positive=True),
            inductance=frame.parameter(found.leakage[index], positive=True),
        )
    if found.magnetising is None:
        return
    if part.given("saturation_current") is None:
        magnetising = frame.parameter(found.magnetising, positive=True)
        frame.series(part, {core: 1.0}, port="core", inductance=magnetising)
        return
    limit = part.given("saturation_current")
    Saturation(frame, found.magnetising, limit, CLOSED).stamp(part, {core: 1.0}, 0.0, port="core")


def _describe(given: dict[str, Any]) -> list[str]:
    """For `look`: what the test sheet comes to."""
    if "rated_voltage" not in given:
        return []
    found = windings_of(given)
    shown = [
        "leakage = " + " : ".join(show(each, HENRY) for each in found.leakage),
        "resistance = " + " : ".join(show(each, OHM) for each in found.resistance),
    ]
    if found.magnetising is not None:
        shown.append(f"magnetising = {show(found.magnetising, HENRY)}")
    return ["from the test sheet: " + ", ".join(shown)]


TRANSFORMER = Kind(
    "transformer",
    "windings on one core; ideal where no inductance or resistance is given",
    "windings",
    (
        Key("turns", "turns of each winding; only their ratios count", NONE, form="ratio", low=0.0, open_low=True),
        Key("magnetising", "magnetising inductance seen from the first winding", HENRY, low=0.0, open_low=True),
        Key("leakage", "leakage inductance of each winding, seen from itself", HENRY, form="ratio", low=0.0),
        Key("resistance", "resistance of each winding, seen from itself", OHM, form="ratio", low=0.0),
        Key(
            "saturation_current",
            "crest of the first winding's magnetising current at which the inductance has fallen by 30 %",
            AMPERE,
            low=0.0,
            open_low=True,
        ),
        Key("rated_power", "apparent power it stands", WATT, low=0.0, open_low=True, rating=True),
        Key(
            "rated_voltage",
            "test sheet: rated voltage of each winding at no load, rms",
            VOLT,
            form="ratio",
            low=0.0,
            open_low=True,
        ),
        Key(
            "short_circuit_voltage",
            "test sheet: short-circuit voltage over rated voltage, all other windings shorted",
            NONE,
            low=0.0,
            high=1.0,
            open_low=True,
        ),
        Key("no_load_current", "test sheet: rms current of the first at no load", AMPERE, low=0.0, open_low=True),
        Key("copper_loss", "test sheet: loss in the windings at rated power", WATT, low=0.0),
        Key("rated_frequency", "test sheet: frequency it holds at", HERTZ, default=50.0, low=0.0, open_low=True),
    ),
    check=_check,
    build=_build,
    describe=_describe,
)
