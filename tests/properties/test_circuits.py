"""Random valid circuits of all kinds that this version solves: Kirchhoff's laws, the energy books, and what must not matter."""

from __future__ import annotations

import re

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import simcore
from grammar.layout import write
from grammar.reader import read_text
from simcore.components import KINDS
from simcore.figures.overview import balance

LAW = "saturation_current = 1 nA, ideality_factor = {:r}, series_resistance = 20 mOhm"


def form(text: str, low: float, high: float, logarithmic: bool = False) -> st.SearchStrategy[str]:
    """A part's values with one of them drawn."""
    return st.floats(low, high).map(lambda value: text.replace("{:r}", repr(10.0**value if logarithmic else value)))


VALUES = {
    "resistor": form("{:r} Ohm", 0.0, 4.0, True),
    "capacitor": form("{:r} F, series_resistance = 10 mOhm", -7.0, -3.0, True)
    | form("{:r} F, series_resistance = 50 mOhm, series_inductance = 10 nH, leakage_resistance = 100 kOhm", -7.0, -3.0, True),
    "inductor": form("{:r} H, series_resistance = 0.1 Ohm", -4.0, -1.0, True)
    | form("10 mH, series_resistance = 0.1 Ohm, saturation_current = {:r} A", -2.0, 0.5, True),
    "diode": form(LAW, 1.0, 2.0)
    | form(f"{LAW}, junction_capacitance = 10 nF @ 4 V, recovery_charge = 1 uC @ 1 A, reverse_leakage = 5 uA @ 20 V", 1.0, 2.0)
    | form("saturation_current = 1 nA, ideality_factor = 1.5, breakdown_voltage = {:r} V @ 5 mA, breakdown_resistance = 3 Ohm", 3.0, 15.0)
    | form("forward = [0.65 V @ 10 mA, {:r} V @ 0.3 A, 0.95 V @ 1 A], in_series = 2, in_parallel = 3, temperature = 90 degC, data_temperature = 25 degC", 0.79, 0.81),
    "thyristor": form(f"{LAW.replace('{:r}', '1.8')}, holding_current = 5 mA, firing_angle = {{:r}} deg, firing_reference = voltage(n0 -> g)", 1.0, 150.0),
    "switch": st.just("closes_at = 3 ms, closed_resistance = 10 mOhm")
    | form("control = voltage(n0 -> g), closes_above = {:r} V, opens_below = 2 V, delay = 1 ms, closed_resistance = 10 mOhm, open_resistance = 1 MOhm", 5.0, 15.0),
    "load": form("current = {:r} A", -3.0, -0.5, True)
    | form("resistance = [0 s: 100 Ohm, 5 ms: 100 Ohm, 5 ms: {:r} Ohm, 10 ms: 30 Ohm], period = 10 ms", 10.0, 300.0),
    "fuse": form("resistance = 50 mOhm, melting_i2t = {:r} A^2 s, rated_current = 0.5 A", -4.0, 0.0, True),
    "inrush_limiter": form("cold_resistance = {:r} Ohm, sensitivity = 3000 K, dissipation = 10 mW/K, heat_capacity = 20 mJ/K", 1.0, 30.0),
    "clamp": form("clamping = [{:r} V @ 1 mA, 25 V @ 5 A]", 5.0, 15.0),
}  # fmt: skip
SOURCES = {
    "source": "n0 -> g: source feed, sine = 20 V peak, frequency = 50 Hz, series_resistance = 0.2 Ohm\nreference g",
    "transformer": (
        "p -> q: source feed, sine = 100 V peak, frequency = 50 Hz, series_resistance = 0.2 Ohm\nreference g, q\n"
        "(p -> q) : (n0 -> g): transformer T1, turns = 5 : 1, magnetising = 1 H, leakage = 1 mH : 0.1 mH, resistance = 0.5 Ohm : 0.1 Ohm"
    ),
    "three_phase": (
        "(n0, m1, m2) -> g: three_phase feed, sine = 20 V phase peak, frequency = 50 Hz, series_resistance = 0.2 Ohm\n"
        "m1 -> m2: resistor R_m, 100 Ohm\nreference g"
    ),
}  # fmt: skip
POWER = "power = 0.3 W, cut_in = 8 V, cut_out = 4 V"


@st.composite
def circuits(draw: st.DrawFn) -> str:
    """A source, a transformer or a three-phase set, and a chain with cross links in which every node ends in a resistor; a
    load of constant power stands beside a capacitor, as behind a mere inductance it has no voltage to run at."""
    count = draw(st.integers(1, 4))
    nodes = [f"n{index}" for index in range(count + 1)]
    lines = [draw(st.sampled_from(list(SOURCES.values())))]
    for index in range(count):
        kind = draw(st.sampled_from([kind for kind in VALUES if kind not in ("capacitor", "load")]))
        ends = (nodes[index], nodes[index + 1])
        a, b = ends if draw(st.booleans()) else ends[::-1]
        lines.append(f"{a} -> {b}: {kind} X{index}, {draw(VALUES[kind])}")
        lines.append(f"{nodes[index + 1]} -> g: resistor R{index}, {draw(VALUES['resistor'])}")
        if draw(st.booleans()):
            kind = draw(st.sampled_from([*VALUES, "power"]))
            if kind == "power":
                lines.append(f"{nodes[index + 1]} -> g: load Y{index}, {POWER}")
                lines.append(f"{nodes[index + 1]} -> g: capacitor C{index}, 100 uF, series_resistance = 50 mOhm")
            else:
                lines.append(f"{nodes[index + 1]} -> g: {kind} Y{index}, {draw(VALUES[kind])}")
    return "\n".join(lines) + "\nstudy s: transient, duration = 20 ms, accuracy = 0.1 %\n"


@settings(max_examples=15, deadline=None, derandomize=True)
@given(circuits())
def test_kirchhoff_and_energy(text: str) -> None:
    """At a node that carries a nanoampere or less through 20 mOhm the sum is rounding of the voltages. What is told to a thousandth there
    is 64 roundings; extrapolation, whose weights have magnitudes of up to 14 together, makes some thirty of a few: hence 5e-4, not
    less. A fuse that melts cuts off what an inductance carries, and no arc takes its energy: then the books may stay open."""
    result = simcore.read_text(text, "random").run("s")
    assert result.solved.kirchhoff < 5e-4
    books = balance(result.solved.record)
    assert not books.share.defined or books.share.value < 1e-2 or any("melts" in note for note in result.solved.notes)


def test_random_circuits_hold_every_kind() -> None:
    assert {*VALUES, *SOURCES} == set(KINDS)


@settings(max_examples=15, deadline=None, derandomize=True)
@given(circuits(), st.permutations(range(6)))
def test_names_and_order_change_nothing(text: str, order: list[int]) -> None:
    """Nodes renamed and elements in another order: the same figure, to the accuracy asked for."""
    lines = text.strip().split("\n")
    body, study = lines[:-1], lines[-1]
    shuffled = [body[index] for index in order if index < len(body)] + [
        line for i, line in enumerate(body) if i not in order
    ]
    renamed = re.sub(r"\bn(\d)\b", r"knot\1", "\n".join([*shuffled, study]) + "\n")
    first = simcore.read_text(text, "a").run("s").figure("rms(voltage(R0))")
    second = simcore.read_text(renamed, "b").run("s").figure("rms(voltage(R0))")
    assert float(first) == pytest.approx(float(second), abs=first.bound + second.bound + 2e-3 * abs(float(first)))


@settings(max_examples=10, deadline=None, derandomize=True)
@given(st.floats(0.1, 100.0))
def test_linear_circuits_scale(factor: float) -> None:
    """Voltage by a factor, impedances by the same: the same current."""
    form = "a -> g: source e, sine = {v!r} V peak, frequency = 50 Hz\na -> b: inductor L, {l!r} H, series_resistance = {r!r} Ohm\nb -> g: capacitor C, {c!r} F\nreference g\nstudy s: settled\n"
    currents = [
        float(
            simcore.read_text(form.format(v=10.0 * k, l=0.1 * k, r=5.0 * k, c=1e-4 / k), "x")
            .run("s")
            .figure("rms(current(L))")
        )
        for k in (1.0, factor)
    ]
    impedance = np.hypot(5.0, 2 * np.pi * 50 * 0.1 - 1 / (2 * np.pi * 50 * 1e-4))
    assert currents == pytest.approx([10.0 / np.sqrt(2.0) / impedance] * 2, rel=2e-3)


@settings(max_examples=40, deadline=None)
@given(circuits())
def test_text_survives_being_read_and_written(text: str) -> None:
    description, mistakes = read_text(text, "a")
    assert not mistakes
    written = write(description)
    again, mistakes = read_text(written, "b")
    assert not mistakes and again == description and write(again) == written


@pytest.mark.parametrize("path", sorted(simcore.library_folder().rglob("*.rect")), ids=lambda path: path.stem)
def test_worked_circuits_survive_too(path) -> None:
    description, mistakes = read_text(path.read_text(), path.name)
    assert not mistakes
    again, mistakes = read_text(write(description), "b")
    assert not mistakes and again == description


@settings(max_examples=150, deadline=None)
@given(st.text(max_size=200) | st.binary(max_size=200).map(lambda raw: raw.decode("latin-1")))
def test_any_text_ends_in_statements_or_mistakes(text: str) -> None:
    description, mistakes = read_text(text, "noise")
    assert isinstance(mistakes, list) and description is not None
