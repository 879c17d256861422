"""The variants that a sweep stands for: values, order, draws, designs, and what is wrong with one."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy import stats
from small_design import DESIGN

import simcore
from grammar.quantities import ANGLE, FARAD, NONE, OHM, VOLT, Quantity, quantity
from grammar.reader import read_expression
from simcore.campaign.draws import drawn, fractional_corners
from simcore.campaign.exact import exact, writable
from simcore.campaign.plan import Plan, plan_of
from simcore.campaign.results import faults_text
from simcore.design.circuit import LetValue
from simcore.design.depends import asked_names, structure


def plan(design: simcore.Design, name: str) -> Plan:
    return plan_of(next(each for each in design.circuit.sweeps if each.name == name), design.circuit.lets)


def read(*lines: str) -> simcore.Design:
    return simcore.read_text(DESIGN + "\n".join(lines), "small.rect")


def numbers(plan: Plan, let: str) -> list[float]:
    return [plan.variant(index).values[let].value for index in range(len(plan))]


def test_ranges_have_both_ends_and_even_steps() -> None:
    design = read("sweep a: R_load from 10 Ohm to 160 Ohm in 5 log steps", "sweep b: V from 3 V to 1 V in 3 steps")
    assert numbers(plan(design, "a"), "R_load") == pytest.approx([10, 20, 40, 80, 160], rel=1e-14)
    assert numbers(plan(design, "a"), "R_load")[::4] == [10.0, 160.0]
    assert numbers(plan(design, "b"), "V") == [3.0, 2.0, 1.0]


def test_axes_make_every_combination_the_last_changing_fastest(design: simcore.Design) -> None:
    loads = plan(design, "loads")
    sheets = [loads.variant(index).values["valve"] for index in range(6)]
    assert sheets == ["weak", "strong"] * 3 and numbers(loads, "R_load")[::2] == [50.0, 100.0, 200.0]
    assert [loads.place(index) for index in range(6)] == list(itertools.product(range(3), range(2)))


def test_extremes_are_the_nominal_and_every_corner(design: simcore.Design) -> None:
    found = list(zip(numbers(plan(design, "corners"), "V"), numbers(plan(design, "corners"), "C"), strict=True))
    assert found[0] == (10.0, 1e-3)
    assert found[1:] == list(itertools.product((9.0, 11.0), (1e-3 - 0.2e-3, 1e-3 + 0.5e-3)))


def test_faults_follow_the_sound_circuit_one_at_a_time(design: simcore.Design) -> None:
    broken = plan(design, "broken")
    texts = [faults_text(broken.variant(index).faults) for index in range(len(broken))]
    assert texts[:4] == ["none", "open e", "short e", "open D1"] and len(texts) == 9


def test_each_let_leaves_out_what_another_axis_holds() -> None:
    design = read("sweep a: extremes of each let by V over [9 V, 10 V]")
    assert plan(design, "a").lets.keys() == {"C", "R_load", "V"} and len(plan(design, "a")) == (1 + 4) * 2


def test_a_let_of_a_repeat_has_a_draw_in_each_copy() -> None:
    extra = "repeat k from 1 to 3 {\n  let I[k] = 1 mA tolerance 50 %\n  p -> g: source s[k], constant = I[k]\n}"
    both = plan(read(extra, "sweep a: 5 samples of I[1..3], seed = 1"), "a")
    assert list(both.lets) == ["I[1]", "I[2]", "I[3]"]
    assert len({numbers(both, f"I[{k}]")[0] for k in (1, 2, 3)}) == 3


@pytest.mark.parametrize("distribution", ["uniform", "triangular", "normal"])
def test_draws_follow_their_distribution_one_in_each_slice(distribution: str) -> None:
    """Kolmogorov's distance of a Latin hypercube is below one slice: each has one draw."""
    let = LetValue("x", Quantity(2.0, VOLT), 1.0, 5.0, distribution)
    count = 500
    values = np.array([row[0] for row in drawn([let, let], count, [7])])
    shape = {
        "uniform": stats.uniform(1.0, 4.0),
        "triangular": stats.triang(0.25, 1.0, 4.0),
        "normal": stats.truncnorm(-3.0, 3.0, 3.0, 4.0 / 6.0),
    }[distribution]
    slices = np.floor(np.clip(shape.cdf(values), 0.0, 1.0 - 1e-12) * count).astype(int)
    assert sorted(slices) == list(range(count))
    assert values.min() >= 1.0 and values.max() <= 5.0
    assert drawn([let, let], count, [7]) != drawn([let, let], count, [8])


def test_many_lets_get_a_design_of_resolution_four() -> None:
    """Main effects are orthogonal to one another and to all pairs: Box and Hunter, Technometrics 3, 1961."""
    lets = [LetValue(f"x{k}", Quantity(0.0, NONE), -1.0, 1.0) for k in range(13)]
    signs = np.array(fractional_corners(lets))
    assert signs.shape == (32, 13) and len({tuple(row) for row in signs.tolist()}) == 32
    assert (signs.T @ signs == 32 * np.eye(13)).all()
    pairs = np.array([signs[:, i] * signs[:, j] for i, j in itertools.combinations(range(13), 2)])
    assert (pairs @ signs == 0).all()


def test_a_fraction_says_so() -> None:
    extra = "\n".join(f"let r{k} = 1 kOhm tolerance 5 %\np -> g: resistor Q{k}, r{k}" for k in range(13))
    points = plan(read(extra, "sweep a: extremes of each let"), "a")
    assert len(points) == 65 and "64 of the 2^16 corners" in points.axes[0].note
    assert "of resolution IV" in points.axes[0].note


@pytest.mark.parametrize(
    ("line", "what"),
    [
        ("sweep x: V from 1 V to 2 V in 3 steps by V over [1 V]", "V stands on two axes"),
        ("sweep x: extremes of V, V", "V is named twice"),
        ("sweep x: V from 1 V to 2 V in 1000 steps by C from 1 uF to 2 uF in 2000 steps", "2000000 variants"),
    ],
)
def test_what_is_wrong_with_a_sweep_is_said(line: str, what: str) -> None:
    with pytest.raises(simcore.DescriptionError, match=what):
        plan(read(line), "x")


@pytest.mark.parametrize("number", [0.00376, 4700e-6 * 0.8, 1.0 / 3.0, 12.0, 1e-12, 123456.789])
@pytest.mark.parametrize("dimension", [FARAD, VOLT, OHM, NONE])
def test_a_value_as_text_is_the_same_number(number: float, dimension) -> None:
    text = exact(number, dimension)
    value, _, unit = text.partition(" ")
    assert quantity(float(value), unit) == Quantity(number, dimension)
    assert read_expression(text, text)[1] == []


def test_an_angle_as_text_is_in_degrees() -> None:
    """Some angles lie between the doubles that are numbers of degrees: the next of these stands for them."""
    assert exact(np.pi / 2.0, ANGLE) == "90 deg" and writable(np.pi / 3.0, ANGLE) == np.pi / 3.0
    angles, moved = np.random.default_rng(3).uniform(0.5, 3.0, 400).tolist(), 0
    for angle in angles:
        held = writable(angle, ANGLE)
        number, _, unit = exact(held, ANGLE).partition(" ")
        assert quantity(float(number), unit) == Quantity(held, ANGLE) and writable(held, ANGLE) == held
        assert abs(held - angle) <= 4e-16 * angle
        moved += held != angle
    assert 0 < moved < 200


def test_names_on_which_what_is_asked_depends() -> None:
    """Whatever a requirement, study or observe needs, over any number of lets; not what is only set."""
    extra = ("let low = 2 * base", "let base = 1 V", "let other = 3 V", "require work: mean(u_out) >= low")
    asked = asked_names(read(*extra).project)
    assert {"low", "base"} <= asked and not {"other", "R_load", "V", "C"} & asked


def test_structure_tells_zero_from_a_value_and_nothing_else(design: simcore.Design) -> None:
    shape = structure(design.circuit)
    assert structure(design.variant(V="7 V", R_load="1 Ohm").circuit) == shape
    assert structure(design.variant(valve="strong").circuit) != shape
    text = DESIGN.replace("series_resistance = 0.5 Ohm", "series_resistance = 0 Ohm")
    assert structure(simcore.read_text(text).circuit) != shape
