"""What elements have to stand: each rating has its figure, and the figures that only ratings need are right."""

import math
import re
from pathlib import Path

import numpy as np
import pytest

from grammar.quantities import AMPERE, I2T
from simcore.components import KINDS
from simcore.design.circuit import Element, PlannedStudy, Port
from simcore.figures import measure
from simcore.figures.record import Record
from simcore.figures.signal import Signal
from simcore.figures.stresses import rated_stresses, stress_names, stresses_of
from tests.figures.fake_solution import FakeSolution, branch, circuit_of, steady, zero

README = Path(__file__).parent.parent.parent / "README.md"
RATINGS = [(kind.name, key.name) for kind in KINDS.values() for key in kind.keys if key.rating]


def test_every_kind_says_what_it_has_to_stand() -> None:
    assert all(stresses_of(kind) for kind in KINDS)
    assert len(RATINGS) >= 10


@pytest.mark.parametrize(("kind", "key"), RATINGS)
def test_every_rating_is_held_against_one_figure(kind: str, key: str) -> None:
    assert sum(stress.rating == key for stress in stresses_of(kind)) == 1


def test_the_readme_says_what_each_rating_is_held_against() -> None:
    table = README.read_text("utf-8").partition("| rating | held against |")[2].partition("\n\n")[0]
    rows = re.findall(r"^\| `(rated_\w+)` \|", table, re.MULTILINE)
    assert sorted(rows) == sorted({key for _, key in RATINGS})


def test_nothing_is_held_against_what_is_no_rating() -> None:
    held = [(kind, stress.rating) for kind in KINDS for stress in stresses_of(kind) if stress.rating]
    assert sorted(held) == sorted(RATINGS)
    for kind in KINDS:
        stresses = stresses_of(kind)
        titles = [stress.title for stress in stresses]
        assert len(titles) == len(set(titles)), kind


def fine(function, start: float, end: float, pieces: int = 400) -> Signal:
    times = np.linspace(start, end, pieces + 1)
    middle = 0.5 * (times[1:] + times[:-1])
    return Signal.through(
        times, np.stack([function(times[:-1]), function(middle), function(times[1:])], axis=1), AMPERE
    )


def test_running_integral_is_the_antiderivative() -> None:
    signal = fine(lambda t: 3.0 * t * t, 1.0, 3.0, 7)
    running = signal.running()
    times = np.linspace(1.0, 3.0, 23)
    assert running.value(times) == pytest.approx(times**3 - 1.0, abs=1e-12)
    assert running.value(3.0) == pytest.approx(signal.integral(), rel=1e-13)


def test_the_largest_surge_is_that_of_any_stretch() -> None:
    # Half a sine of crest I over T/2 has i2t = I^2 T/4 (definition); the best stretch of half its length is its middle:
    # I^2 (T/8 + T/(4 pi)) for the middle quarter period, from the integral of sin^2.
    crest, period = 30.0, 20e-3
    pulse = fine(lambda t: crest * np.clip(np.sin(2.0 * math.pi * t / period), 0.0, None), 0.0, period)
    assert measure.largest_i2t(pulse, 10e-3, False) == pytest.approx(crest**2 * period / 4.0, rel=1e-6)
    middle = crest**2 * (period / 8.0 + period / (4.0 * math.pi))
    assert measure.largest_i2t(pulse, 5e-3, False) == pytest.approx(middle, rel=1e-6)


def test_a_stretch_longer_than_the_window_takes_it_whole() -> None:
    pulse = fine(lambda t: 2.0 + 0.0 * t, 0.0, 1e-3)
    assert measure.largest_i2t(pulse, 10e-3, False) == pytest.approx(4.0 * 1e-3)
    assert measure.largest_i2t(pulse, 10e-3, True) == pytest.approx(4.0 * 10e-3)


@pytest.mark.parametrize("period", [1e-3, 3e-3, 4e-3, 16e-3])
def test_what_repeats_is_looked_at_across_its_seam(period: float) -> None:
    # A block of current at the seam of the window, half before and half after it: on for a quarter of the period.
    on, length = period / 4.0, 10e-3
    times = np.array([0.0, on / 2.0, period - on / 2.0, period])
    blocks = Signal(times, np.array([[5.0], [0.0], [5.0]]), AMPERE)
    whole, rest = divmod(length, period)
    assert measure.largest_i2t(blocks, length, True) == pytest.approx(25.0 * (whole * on + min(rest, on)), rel=1e-9)


def transformer(record_power: dict[str, float]) -> tuple[Record, Element]:
    ports = (Port("w1", "p", "0"), Port("w2", "s", "0"), Port("w3", "t", "0"))
    element = Element("T1", "transformer", ports, {"turns": (10.0, 1.0, 1.0), "rated_power": 30.0})
    times = np.linspace(0.0, 0.02, 11)
    potentials = {"p": steady(10.0), "s": steady(2.0), "t": steady(2.0), "0": zero}
    currents = {("T1", name): steady(value) for name, value in record_power.items()}
    return Record(FakeSolution(circuit_of([element]), times, potentials, currents)), element


@pytest.mark.parametrize(("first", "power"), [(1.0, 12.0), (2.0, 20.0)])
def test_a_transformer_stands_the_larger_of_its_two_sides(first: float, power: float) -> None:
    record, element = transformer({"w1": first, "w2": -3.0, "w3": -3.0})
    (stress, rating, at), *others = rated_stresses(element)
    assert (rating, at, others) == (30.0, None, [])
    assert stress.compute(record, element, "T1").value == pytest.approx(power)
    currents = next(each for each in stresses_of("transformer") if each.ports)
    assert stress_names(element, currents) == ["T1.w1", "T1.w2", "T1.w3"]
    assert currents.compute(record, element, "T1.w2").value == pytest.approx(3.0)


def test_an_array_shares_voltage_and_current() -> None:
    element = branch(
        "D1",
        "diode",
        "a",
        "0",
        in_series=4.0,
        in_parallel=2.0,
        rated_reverse_voltage=1.0,
        rated_mean_current=1.0,
        rated_surge_current=(1.0, None),
        rated_i2t=1.0,
    )
    times = np.linspace(0.0, 0.02, 3)
    potentials = {"a": lambda t: np.where(t < 0.01, 1.0, -400.0) + zero(t), "0": zero}
    currents = {("D1", ""): steady(6.0)}
    solution = FakeSolution(circuit_of([element]), times, potentials, currents, study=PlannedStudy("run", "transient"))
    record = Record(solution)
    found = {stress.rating: stress.compute(record, element, "D1") for stress, _, _ in rated_stresses(element)}
    assert found["rated_reverse_voltage"].value == pytest.approx(100.0)
    assert found["rated_mean_current"].value == pytest.approx(3.0)
    assert found["rated_surge_current"].value == pytest.approx(3.0)
    assert found["rated_i2t"].value == pytest.approx(9.0 * 10e-3)
    assert found["rated_i2t"].dimension == I2T


def test_what_is_never_reversed_has_no_reverse_stress() -> None:
    element = branch("D1", "diode", "a", "0", rated_reverse_voltage=1.0)
    times = np.linspace(0.0, 0.02, 3)
    record = Record(
        FakeSolution(circuit_of([element]), times, {"a": steady(0.7), "0": zero}, {("D1", ""): steady(1.0)})
    )
    ((stress, _, _),) = rated_stresses(element)
    assert stress.compute(record, element, "D1").value == 0.0


def test_a_ripple_current_counts_about_its_mean() -> None:
    element = branch("C1", "capacitor", "a", "0", rated_ripple_current=(2.0, 100.0))
    times = np.linspace(0.0, 0.02, 401)
    currents = {("C1", ""): lambda t: 5.0 + 3.0 * np.sin(100.0 * math.pi * t)}
    record = Record(FakeSolution(circuit_of([element]), times, {"a": steady(1.0), "0": zero}, currents))
    ((stress, rating, at),) = rated_stresses(element)
    assert (rating, at) == (2.0, 100.0)
    assert stress.compute(record, element, "C1").value == pytest.approx(3.0 / math.sqrt(2.0), rel=1e-6)


@pytest.mark.parametrize(("kind", "flow"), [("settled", 10e-3), ("transient", 2e-3)])
def test_what_a_settled_study_shows_goes_on(kind: str, flow: float) -> None:
    element = branch("D1", "diode", "a", "0", rated_i2t=1.0)
    times = np.linspace(0.0, 2e-3, 11)
    currents, study = {("D1", ""): steady(3.0)}, PlannedStudy("run", kind)
    record = Record(FakeSolution(circuit_of([element]), times, {"a": steady(1.0), "0": zero}, currents, study=study))
    ((stress, _, _),) = rated_stresses(element)
    assert stress.compute(record, element, "D1").value == pytest.approx(9.0 * flow)
