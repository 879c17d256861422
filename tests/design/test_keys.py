"""The keys of every kind, held to the table of the language: which there are, and the form and unit each is given in."""

from __future__ import annotations

import math
from typing import Any

import pytest

from grammar.description import Datasheet
from grammar.scanner import tokens_of
from simcore.components import KINDS
from simcore.design.files import load_text
from simcore.design.scopes import Scope, Sheet
from simcore.design.values import Reader, Values

WAVEFORM = {
    "sine": ("325 V peak", ((325.0,), "peak", "")),
    "frequency": ("50 Hz", 50.0),
    "phase": ("90 deg", math.pi / 2),
    "harmonics": ("[3: 2 % @ 180 deg, 5: 1 %]", ((3.0, 0.02, math.pi), (5.0, 0.01, 0.0))),
    "constant": ("-12 V", -12.0),
    "points": ("[0 s: 0 V, 1 ms: 5 V, 1 ms: 0 V]", ((0.0, 0.0), (1e-3, 5.0), (1e-3, 0.0))),
    "period": ("20 ms", 0.02),
    "samples": ('"site.csv"', "site.csv"),
    "column": ('"u_L1 [V]"', "u_L1 [V]"),
    "scale": ("1.1", 1.1),
    "series_resistance": ("0.4 Ohm", 0.4),
    "series_inductance": ("200 uH", 2e-4),
}
DIODE = {
    "forward": ("[0.7 V @ 10 mA, 0.9 V @ 1 A]", ((0.7, 0.01), (0.9, 1.0))),
    "saturation_current": ("1 nA", 1e-9),
    "ideality_factor": ("1.8", 1.8),
    "series_resistance": ("20 mOhm", 0.02),
    "reverse_leakage": ("5 uA @ 400 V", (5e-6, 400.0)),
    "breakdown_voltage": ("1 kV @ 5 mA", (1000.0, 5e-3)),
    "breakdown_resistance": ("2 Ohm", 2.0),
    "junction_capacitance": ("15 pF @ 4 V", (15e-12, 4.0)),
    "built_in_voltage": ("0.7 V", 0.7),
    "capacitance_exponent": ("0.5", 0.5),
    "recovery_charge": ("2 uC @ 1 A", (2e-6, 1.0)),
    "carrier_lifetime": ("5 us", 5e-6),
    "thermal_resistance": ("40 K/W", 40.0),
    "data_temperature": ("25 degC", 298.15),
    "temperature": ("100 degC", 373.15),
    "ambient": ("50 degC", 323.15),
    "bandgap": ("1.12 V", 1.12),
    "temperature_exponent": ("3", 3.0),
    "in_series": ("4", 4.0),
    "in_parallel": ("2", 2.0),
    "rated_reverse_voltage": ("400 V", 400.0),
    "rated_mean_current": ("1 A", 1.0),
    "rated_surge_current": ("30 A @ 8.3 ms", (30.0, 8.3e-3)),
    "surge_half_cycles": ("[5: 20 A, 100: 8 A]", ((5.0, 20.0), (100.0, 8.0))),
    "rated_i2t": ("5 A^2 s", 5.0),
    "rated_junction_temperature": ("150 degC", 423.15),
}
TABLE: dict[str, dict[str, tuple[str, Any]]] = {
    "source": WAVEFORM,
    "three_phase": WAVEFORM
    | {
        "sine": ("400 V line rms", ((400.0,), "rms", "line")),
        "sequence": ("negative", "negative"),
        "unbalance": ("1 : 0.95 : 1", (1.0, 0.95, 1.0)),
        "short_circuit_power": ("10 MVA", 1e7),
        "reactance_ratio": ("7", 7.0),
    },
    "resistor": {"resistance": ("4.7 kOhm", 4700.0), "rated_power": ("2 W", 2.0)},
    "capacitor": {
        "capacitance": ("4700 uF", 4.7e-3),
        "series_resistance": ("45 mOhm", 0.045),
        "series_inductance": ("10 nH", 1e-8),
        "leakage_resistance": ("10 MOhm", 1e7),
        "initial_voltage": ("-5 V", -5.0),
        "rated_voltage": ("25 V", 25.0),
        "rated_ripple_current": ("2 A @ 100 Hz", (2.0, 100.0)),
        "frequency_factors": ("[100 Hz: 1, 1 kHz: 1.3]", ((100.0, 1.0), (1000.0, 1.3))),
        "rated_temperature": ("105 degC", 378.15),
        "endurance": ("5000 h @ 105 degC", (1.8e7, 378.15)),
        "thermal_resistance": ("20 K/W", 20.0),
        "temperature": ("70 degC", 343.15),
        "ambient": ("60 degC", 333.15),
    },
    "inductor": {
        "inductance": ("3 H", 3.0),
        "series_resistance": ("600 Ohm", 600.0),
        "saturation_current": ("2 A", 2.0),
        "initial_current": ("-1 A", -1.0),
        "rated_current": ("1 A", 1.0),
    },
    "transformer": {
        "turns": ("230 : 12 : 12", (230.0, 12.0, 12.0)),
        "magnetising": ("5 H", 5.0),
        "leakage": ("1 mH : 10 uH : 10 uH", (1e-3, 1e-5, 1e-5)),
        "resistance": ("5 Ohm : 0.1 Ohm : 0.1 Ohm", (5.0, 0.1, 0.1)),
        "rated_power": ("120 VA", 120.0),
        "rated_voltage": ("230 V : 12 V : 12 V", (230.0, 12.0, 12.0)),
        "short_circuit_voltage": ("6 %", 0.06),
        "no_load_current": ("60 mA", 0.06),
        "copper_loss": ("5 W", 5.0),
        "rated_frequency": ("60 Hz", 60.0),
        "saturation_current": ("2 A", 2.0),
    },
    "diode": DIODE,
    "thyristor": DIODE | {"firing_angle": ("30 deg", math.pi / 6), "firing_reference": ("voltage(L1 -> L3)", None), "holding_current": ("20 mA", 0.02)},
    "switch": {
        "closed_resistance": ("10 mOhm", 0.01),
        "open_resistance": ("1 MOhm", 1e6),
        "initially": ("closed", "closed"),
        "opens_at": ("5 ms", 5e-3),
        "closes_at": ("10 ms", 0.01),
        "control": ("voltage(plus -> minus)", None),
        "closes_above": ("20 V", 20.0),
        "opens_below": ("18 V", 18.0),
        "delay": ("10 ms", 0.01),
    },
    "load": {
        "power": ("60 W", 60.0),
        "cut_in": ("90 V", 90.0),
        "cut_out": ("75 V", 75.0),
        "current": ("[0 s: 1 A, 1 ms: 2 A]", ((0.0, 1.0), (1e-3, 2.0))),
        "resistance": ("10 Ohm", 10.0),
        "period": ("20 ms", 0.02),
    },
    "fuse": {"rated_current": ("3.15 A", 3.15), "resistance": ("30 mOhm", 0.03), "melting_i2t": ("25 A^2 s", 25.0)},
    "inrush_limiter": {
        "cold_resistance": ("10 Ohm", 10.0),
        "sensitivity": ("2800 K", 2800.0),
        "dissipation": ("15 mW/K", 0.015),
        "heat_capacity": ("300 mJ/K", 0.3),
        "rated_current": ("3 A", 3.0),
        "rated_energy": ("20 J", 20.0),
    },
    "clamp": {"clamping": ("[430 V @ 1 mA, 710 V @ 50 A]", ((430.0, 1e-3), (710.0, 50.0))), "rated_energy": ("100 J", 100.0)},
}  # fmt: skip
VALUE_KEYS = {"resistor": "resistance", "capacitor": "capacitance", "inductor": "inductance"}
ALL = [(kind, key) for kind, keys in TABLE.items() for key in keys]


def test_the_kinds_and_their_keys() -> None:
    assert list(KINDS) == list(TABLE)
    assert {name: sorted(kind.key) for name, kind in KINDS.items()} == {
        name: sorted(keys) for name, keys in TABLE.items()
    }
    assert {name: kind.value_key for name, kind in KINDS.items() if kind.value_key} == VALUE_KEYS
    assert all(key.meaning for kind in KINDS.values() for key in kind.keys)
    assert all(
        key.rating == (key.name.startswith("rated_") and not key.meaning.startswith("test sheet"))
        for kind in KINDS.values()
        for key in kind.keys
    )


def given(kind: str, key: str, text: str) -> tuple[Values, list[str]]:
    """A key as a data sheet gives it, whether or not this version solves it, and what is wrong with it."""
    project, mistakes = load_text(f"datasheet X: {kind} {{\n{key} = {text}\n}}\n", "x")
    assert not mistakes, mistakes
    (node,) = project.top.description.statements
    assert isinstance(node, Datasheet)
    scope = Scope(project, {})
    return Reader(scope).sheet(Sheet(project.top, node), KINDS[kind]), [mistake.what for mistake in scope.mistakes]


def near(found: Any, wanted: Any) -> bool:
    if isinstance(wanted, tuple):
        return isinstance(found, tuple) and len(found) == len(wanted) and all(map(near, found, wanted))
    return found == pytest.approx(wanted, rel=1e-14) if isinstance(wanted, float) else found == wanted


@pytest.mark.parametrize(("kind", "key"), ALL, ids=lambda part: part)
def test_each_key_is_read_in_its_form(kind: str, key: str) -> None:
    text, wanted = TABLE[kind][key]
    values, wrong = given(kind, key, text)
    assert not wrong and not values.failed
    if wanted is not None:
        assert near(values.given[key], wanted)
    else:
        assert values.given[key].name == "voltage"


@pytest.mark.parametrize(
    ("kind", "key"),
    [each for each in ALL if KINDS[each[0]].key[each[1]].form not in ("text", "word", "expression")],
    ids=lambda part: part,
)
def test_each_key_refuses_another_unit(kind: str, key: str) -> None:
    """Farad per second is the unit of no key: with it in the place of the first one, or of none, the text is refused."""
    tokens = [token for token in tokens_of(TABLE[kind][key][0]) if token.kind != "blank"]
    first = next(position for position, token in enumerate(tokens) if token.kind == "number")
    rest = tokens[first + 1 + (tokens[first + 1 : first + 2] != [] and tokens[first + 1].kind == "unit") :]
    text = " ".join([*(token.text for token in tokens[:first]), "1 F/s", *(token.text for token in rest)])
    values, wrong = given(kind, key, text)
    assert values.failed and len(wrong) == 1


@pytest.mark.parametrize("unit", ["V", "A"])
def test_a_source_is_in_volts_or_in_amperes(unit: str) -> None:
    for key, text in (("sine", f"1 {unit} rms"), ("constant", f"1 {unit}"), ("points", f"[0 s: 1 {unit}]")):
        assert not given("source", key, text)[1]
    assert given("three_phase", "sine", "1 A line rms")[1] == ["sine is given in A"]
