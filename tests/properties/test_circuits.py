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
from simcore.figures.overview import balance

VALUES = {
    "resistor": st.floats(0.0, 4.0).map(lambda p: f"{10.0**p!r} Ohm"),
    "capacitor": st.floats(-7.0, -3.0).map(lambda p: f"{10.0**p!r} F, series_resistance = 10 mOhm"),
    "inductor": st.floats(-4.0, -1.0).map(lambda p: f"{10.0**p!r} H, series_resistance = 0.1 Ohm"),
    "diode": st.floats(1.0, 2.0).map(
        lambda n: f"saturation_current = 1 nA, ideality_factor = {n!r}, series_resistance = 20 mOhm"
    ),
    "switch": st.just("closes_at = 3 ms, closed_resistance = 10 mOhm"),
}
FED = "n0 -> g: source feed, sine = 20 V peak, frequency = 50 Hz, series_resistance = 0.2 Ohm"
TRANSFORMED = (
    "p -> q: source feed, sine = 100 V peak, frequency = 50 Hz, series_resistance = 0.2 Ohm\n"
    "(p -> q) : (n0 -> g): transformer T1, turns = 5 : 1, magnetising = 1 H, leakage = 1 mH : 0.1 mH, resistance = 0.5 Ohm : 0.1 Ohm"
)


@st.composite
def circuits(draw: st.DrawFn) -> str:
    """A source, perhaps behind a transformer, and a chain with cross links in which every node ends in a resistor."""
    count = draw(st.integers(1, 4))
    nodes = [f"n{index}" for index in range(count + 1)]
    behind = draw(st.booleans())
    lines = [TRANSFORMED if behind else FED, "reference g" + (", q" if behind else "")]
    for index in range(count):
        kind = draw(st.sampled_from(["resistor", "diode", "inductor", "switch"]))
        ends = (nodes[index], nodes[index + 1])
        a, b = ends if draw(st.booleans()) else ends[::-1]
        lines.append(f"{a} -> {b}: {kind} X{index}, {draw(VALUES[kind])}")
        lines.append(f"{nodes[index + 1]} -> g: resistor R{index}, {draw(VALUES['resistor'])}")
        if draw(st.booleans()):
            lines.append(
                f"{nodes[index + 1]} -> g: {draw(st.sampled_from(['capacitor', 'diode']))} Y{index}, VALUE{index}"
            )
            kind = lines[-1].split(": ")[1].split()[0]
            lines[-1] = lines[-1].replace(f"VALUE{index}", draw(VALUES[kind]))
    return "\n".join(lines) + "\nstudy s: transient, duration = 20 ms, accuracy = 0.1 %\n"


@settings(max_examples=15, deadline=None, derandomize=True)
@given(circuits())
def test_kirchhoff_and_energy(text: str) -> None:
    """At a node that carries a nanoampere through 20 mOhm the sum is rounding of the voltages: hence 1e-4, not less."""
    result = simcore.read_text(text, "random").run("s")
    assert result.solved.kirchhoff < 1e-4
    books = balance(result.solved.record)
    assert not books.share.defined or books.share.value < 1e-2


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
    first = simcore.read_text(text, "a").run("s").figure("rms(current(feed))")
    second = simcore.read_text(renamed, "b").run("s").figure("rms(current(feed))")
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
