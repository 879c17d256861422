"""Verdicts: a figure holds or fails only where its error bound is on one side of the limit."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from grammar.description import Binary, Call, Expression, Name, Negative, Number, Part
from simcore.design.circuit import Observed, Requirement
from simcore.figures.record import Record
from simcore.judge.outcome import Outcome, State, outcome_of, worst
from simcore.judge.verdict import Verdict, judge_one
from tests.figures.fake_solution import FakeSolution, branch, circuit_of, zero


def name(text: str) -> Name:
    return Name((Part(text),))


def flat(level: float, duration: float = 0.01) -> Record:
    """A study in which node u stands at a level in V."""
    circuit = circuit_of(
        [branch("R_L", "resistor", "u", "0", resistance=1.0)],
        observes={"u": Observed("u", Call("voltage", (name("u"),)), "V")},
    )
    times = np.linspace(0.0, duration, 11)
    potentials = {"u": lambda t: level + zero(t), "0": zero}
    return Record(FakeSolution(circuit, times, potentials, {("R_L", ""): lambda t: level + zero(t)}))


def volts(number: float) -> Number:
    return Number(number, "V")


MEAN = Call("mean", (name("u"),))


def requirement(
    relation: str, bound: Expression | None, upper: Expression | None = None, figure: Expression | None = MEAN
) -> Requirement:
    return Requirement("run", relation, figure, bound, upper, "mean(u) ...")


def verdict(wanted: Requirement, coarse: float, fine: float) -> Verdict:
    return judge_one(wanted, {"run": flat(coarse)}, {"run": flat(fine)})


@pytest.mark.parametrize(
    ("relation", "bound", "upper", "coarse", "fine", "state"),
    [
        ("<=", 5.0, None, 4.0, 4.0, State.HOLDS),
        ("<=", 5.0, None, 6.0, 6.0, State.FAILS),
        (">=", 5.0, None, 6.0, 6.0, State.HOLDS),
        (">=", 5.0, None, 4.0, 4.0, State.FAILS),
        ("<", 5.0, None, 4.9, 4.95, State.UNDECIDED),
        (">", 5.0, None, 5.1, 5.05, State.UNDECIDED),
        ("<=", 5.0, None, 5.0, 4.99, State.UNDECIDED),
        ("<=", 5.0, None, 5.02, 5.01, State.UNDECIDED),
        ("<=", 5.0, None, 4.93, 4.94, State.HOLDS),
        ("between", 4.0, 6.0, 5.0, 5.0, State.HOLDS),
        ("between", 4.0, 6.0, 3.0, 3.0, State.FAILS),
        ("between", 4.0, 6.0, 7.0, 7.0, State.FAILS),
        ("between", 4.0, 6.0, 5.99, 5.995, State.UNDECIDED),
    ],
)
def test_a_bound_across_the_limit_is_undecided(
    relation: str, bound: float, upper: float | None, coarse: float, fine: float, state: State
) -> None:
    found = verdict(requirement(relation, volts(bound), None if upper is None else volts(upper)), coarse, fine)
    assert found.state is state
    assert found.figure is not None and found.figure.value == pytest.approx(fine)
    assert found.margin is not None and found.margin.bound is not None
    assert found.margin.bound >= abs(coarse - fine)
    assert ("error bound" in found.reason) == (state is State.UNDECIDED)


def test_the_margin_is_the_distance_to_the_nearer_limit() -> None:
    found = verdict(requirement("between", volts(4.0), volts(9.0)), 5.0, 5.0)
    assert found.margin is not None and found.margin.value == pytest.approx(1.0)
    failed = verdict(requirement("between", volts(4.0), volts(9.0)), 9.5, 9.5)
    assert failed.margin is not None and failed.margin.value == pytest.approx(-0.5)


@settings(max_examples=50, deadline=None)
@given(st.floats(-10.0, 10.0), st.floats(-10.0, 10.0), st.floats(-1.0, 1.0))
def test_no_verdict_contradicts_the_figure_and_opposites_never_both_hold(
    limit: float, fine: float, difference: float
) -> None:
    below = verdict(requirement("<=", volts(limit)), fine + difference, fine).state
    above = verdict(requirement(">", volts(limit)), fine + difference, fine).state
    assert {State.HOLDS: State.FAILS, State.FAILS: State.HOLDS, State.UNDECIDED: State.UNDECIDED}[below] is above
    if below is State.HOLDS:
        assert fine <= limit and fine + difference <= limit


def test_errors_shared_by_figure_and_limit_cancel() -> None:
    studies = ({"run": flat(5.0), "light": flat(6.0)}, {"run": flat(5.5), "light": flat(6.5)})
    light = Call("mean", (name("u"),), "light")
    found = judge_one(requirement("<=", light), *studies)
    assert found.state is State.HOLDS
    over = requirement("<=", volts(1.2), figure=Binary("-", light, MEAN))
    assert judge_one(over, *studies).state is State.HOLDS


def test_an_instant_that_does_not_come_is_judged_by_what_the_study_saw() -> None:
    until = Call("time_until_below", (name("u"), volts(1.0)))
    records = ({"run": flat(5.0, 0.06)}, {"run": flat(5.0, 0.06)})
    cases = [
        (">=", 0.02, State.HOLDS),
        (">=", 0.10, State.UNDECIDED),
        ("<=", 0.02, State.FAILS),
        ("<=", 0.10, State.UNDECIDED),
    ]
    for relation, limit, state in cases:
        found = judge_one(requirement(relation, Number(limit, "s"), figure=until), *records)
        assert found.state is state, (relation, limit)
        assert found.figure is not None and math.isinf(found.figure.value)
        assert found.figure.beyond == pytest.approx(0.06)
    found = judge_one(requirement("between", Number(0.02, "s"), Number(0.03, "s"), figure=until), *records)
    assert found.state is State.FAILS


def test_an_instant_that_comes_in_one_solution_only_is_undecided() -> None:
    until = Call("time_until_below", (name("u"), volts(1.0)))
    found = judge_one(requirement(">=", Number(0.001, "s"), figure=until), {"run": flat(0.9)}, {"run": flat(1.1)})
    assert found.state is State.UNDECIDED and "one of two" in found.reason


def test_nothing_made_of_an_instant_that_does_not_come_is_decided() -> None:
    until = Call("time_until_below", (name("u"), volts(1.0)))
    records = ({"run": flat(5.0)}, {"run": flat(5.0)})
    for figure, limit in [
        (Binary("*", until, Number(2.0)), Number(1.0, "s")),
        (Binary("/", Number(1.0), until), Number(1.0, "Hz")),
        (Binary("^", until, Number(-1.0)), Number(1.0, "Hz")),
        (Call("min", (until, Number(1.0, "s"))), Number(1.0, "s")),
        (Negative(until), Number(1.0, "s")),
        (Binary("-", until, until), Number(1.0, "s")),
    ]:
        for relation in ("<=", ">="):
            found = judge_one(requirement(relation, limit, figure=figure), *records)
            assert found.state is State.UNDECIDED and "made of an instant" in found.reason, figure


def test_undefined_figures_and_unsolved_studies_are_undecided_with_their_reason() -> None:
    nothing = verdict(requirement("<=", Number(1.0), figure=Call("ripple_factor", (name("u"),))), 0.0, 0.0)
    assert nothing.state is State.UNDECIDED and "mean is zero" in nothing.reason
    unsolved = judge_one(requirement("<=", volts(1.0)), {}, {})
    assert unsolved.state is State.UNDECIDED and "was not solved" in unsolved.reason
    units = verdict(requirement("<=", Number(1.0, "A")), 0.5, 0.5)
    assert units.state is State.UNDECIDED and "different units" in units.reason


def test_outcomes_have_each_status_once_a_sentence_and_where_something_is_wrong_a_cure() -> None:
    assert [outcome.status for outcome in Outcome] == [0, 1, 2, 3, 130]
    assert all(outcome.sentence.endswith(".") for outcome in Outcome)
    assert all(outcome.cure for outcome in Outcome if outcome.status)
    assert outcome_of([]) is Outcome.ALL_HOLD
    assert outcome_of([State.HOLDS, State.HOLDS]) is Outcome.ALL_HOLD
    for state in (State.FAILS, State.UNDECIDED, State.NOT_JUDGED):
        assert outcome_of([State.HOLDS, state]) is Outcome.NOT_ALL_HOLD
    assert worst([Outcome.ALL_HOLD, Outcome.NO_SOLUTION, Outcome.NOT_ALL_HOLD]) is Outcome.NO_SOLUTION
    assert worst([]) is Outcome.ALL_HOLD
