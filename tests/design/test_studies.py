"""Studies, requirements, signals and sweeps as understood, and what is wrong with them."""

from __future__ import annotations

import math

import pytest
from understood import BASE, circuit_of, whats

from grammar.quantities import OHM, Quantity
from grammar.writer import write_expression
from simcore.design.circuit import Change, PlannedStudy

LETS = BASE + "let R_x = 10 Ohm tolerance 10 %\np -> b: resistor R2, R_x\n"


def study(text: str) -> PlannedStudy:
    return circuit_of(LETS + f"study t: {text}\n").studies["t"]


def test_every_key_of_a_study() -> None:
    found = study(
        "transient, after = s, duration = 100 ms, period = 20 ms, angle = 90 deg, last = 2, accuracy = 1 %, record_every = 1 ms"
    )
    assert found == PlannedStudy("t", "transient", 0.1, 0.02, math.pi / 2, None, "s", 2.0, 0.01, 1e-3)
    assert study("settled") == PlannedStudy("t", "settled") and study("settled").accuracy == 1e-3
    assert study("operating_point, accuracy = 0.01 %").accuracy == pytest.approx(1e-4)


def test_changes_and_events_in_order_of_time() -> None:
    found = study(
        "transient, duration = 50 ms, open D1, set R_x = 2 * R_x, short R1 {\n at 5 ms: close D1\n at 2 ms: set R_x = 1 Ohm\n at 2 ms: open C1\n}"
    )
    assert found.changes == (Change("open", "D1"), Change("set", "R_x", Quantity(20.0, OHM)), Change("short", "R1"))
    assert found.events == (
        (0.002, Change("set", "R_x", Quantity(1.0, OHM))),
        (0.002, Change("open", "C1")),
        (0.005, Change("close", "D1")),
    )


def test_the_worst_phase_names_a_figure() -> None:
    worst = study("transient, duration = 1 ms, angle = worst for -peak(current(D1))").worst
    assert worst is not None and write_expression(worst) == "-peak(current(D1))"


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("setled", "there is no kind of study setled"),
        ("transient", "transient t has no duration"),
        ("settled, duration = 1 ms", "a study of kind settled has no key duration"),
        ("settled, acuracy = 1 %", "a study of kind settled has no key acuracy"),
        ("settled, accuracy = 1 %, accuracy = 1 %", "accuracy is given twice"),
        ("settled, accuracy = 0", "accuracy is 0, which it can't be"),
        ("settled, accuracy = 1 V", "accuracy is given in V"),
        ("settled, angle = 90", "angle has no unit"),
        ("settled, period = 1 : 2", "period takes one value"),
        ("settled, period = worst for peak(voltage(p))", "`worst for` is for an angle"),
        ("settled, angle = worst for voltage(p)", "`worst for` needs a figure"),
        ("transient, duration = 1e10 s", "duration is 2.7778e+06 h, which it can't be"),
        ("transient, duration = 1 h", "the study spans 1.8e+05 periods of e"),
        ("transient, duration = 1 s, record_every = 1 ns", "the study would record too many rows"),
        ("settled, record_every = 1 fs", "the study would record too many rows"),
        ("transient, duration = 0 s", "duration is 0 s, which it can't be"),
        ("transient, duration = 1 s, last = 1.5", "last is 1.5, which it can't be"),
        ("transient, duration = 1 s, after = q", "no study is named q"),
        ("transient, duration = 1 s, after = t", "study t comes after itself"),
        ("settled, open Q", "no element is named Q"),
        ("settled, set Q = 1", "no let is named Q"),
        ("settled, set R1 = 1 Ohm", "R1 is no let"),
        ("settled, set R_x = 1 V", "the new value of R_x is given in V"),
        ("settled, set R_x = dd\ndatasheet dd: diode { saturation_current = 1 nA, ideality_factor = 2 }", "R_x is a value, and this is something else"),
        ("settled {\n at 1 ms: open D1\n}", "a study of kind settled has no instants"),
        ("transient, duration = 1 ms {\n at 2 ms: open D1\n}", "the action does not lie within the study"),
        ("transient, duration = 1 ms {\n at 1 V: open D1\n}", "the time of an action is given in V"),
        ("settled\nstudy t: settled", "study t is declared twice"),
        ("transient, duration = 1 s, after = o\nstudy o: operating_point", "o is an operating point, which has no end to go on from"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_a_study(text: str, what: str) -> None:
    assert whats(LETS + f"study t: {text}\n") == [what]


@pytest.mark.parametrize("order", [1, -1])
def test_studies_that_start_from_one_another(order: int) -> None:
    def chain(count: int) -> str:
        lines = [f"study t{n}: transient, duration = 1 ms, after = {f't{n - 1}' if n else 's'}" for n in range(count)]
        return LETS + "\n".join(lines[::order]) + "\n"

    assert whats(chain(99)) == [] and whats(chain(130)) == ["too many studies start from one another"]


@pytest.mark.parametrize("circle", [["t", "v"], ["t", "v", "w"]])
def test_circles_of_studies(circle: list[str]) -> None:
    lines = [
        f"study {name}: transient, duration = 1 ms, after = {other}"
        for name, other in zip(circle, [*circle[1:], circle[0]], strict=True)
    ]
    assert whats(LETS + "\n".join(lines) + "\nstudy x: transient, duration = 1 ms, after = t\n") == [
        "study t comes after itself"
    ]


# --- requirements --------------------------------------------------------------------------------------------------

MORE = (
    LETS
    + "a -> p: diode D[2], saturation_current = 1 nA, ideality_factor = 1.8\nobserve u = voltage(p)\nobserve i = current(D1) + current(D[2])\nstudy r: settled\n"
)


@pytest.mark.parametrize(
    ("text", "wordings"),
    [
        ("require s: mean(u) <= 20 V", [("s", "mean(u) <= 20 V")]),
        ("require s, r: mean(u) between 1 V and 20 V", [("s", "mean(u) between 1 V and 20 V"), ("r", "mean(u) between 1 V and 20 V")]),
        ("require each study: peak(i) < 2 * 3 A", [("s", "peak(i) < 2 * 3 A"), ("r", "peak(i) < 2 * 3 A")]),
        ("require s: peak(current(each diode)) <= 3 A", [("s", "peak(current(D1)) <= 3 A"), ("s", "peak(current(D[2])) <= 3 A")]),
        ("require s: mean(u) at r - mean(u) <= 3 V", [("s", "mean(u) at r - mean(u) <= 3 V")]),
        ("require s: mean(u) >= mean(u) at r", [("s", "mean(u) >= mean(u) at r")]),
        ("require s: ratings, margin = 20 %", [("s", "ratings, margin = 20 %")]),
        ("require s: ratings of each diode", [("s", "ratings of D1, D[2]")]),
        ("require s: ratings of R1, D[2]", [("s", "ratings of R1, D[2]")]),
        ('require s: harmonics(e) within "IEC 61000-3-2 class A"', [("s", 'harmonics(e) within "IEC 61000-3-2 class A"')]),
        ("require s: i2t(R1) <= 5 A^2 s", [("s", "i2t(R1) <= 5 A^2 s")]),
        ("require s: time_until_below(u, 9 V) >= 20 ms", [("s", "time_until_below(u, 9 V) >= 20 ms")]),
        ("require s: stored_energy() <= 1 J", [("s", "stored_energy() <= 1 J")]),
        ("require s: sqrt(mean_power(R1) * 50 Ohm) <= 20 V", [("s", "sqrt(mean_power(R1) * 50 Ohm) <= 20 V")]),
    ],
)  # fmt: skip
def test_requirements(text: str, wordings: list[tuple[str, str]]) -> None:
    found = circuit_of(MORE + text + ' as "label"\n').requirements
    assert [(each.study, each.wording) for each in found] == wordings
    assert all(each.label == "label" for each in found)


def test_requirements_carry_full_names_and_values() -> None:
    (found,) = circuit_of(MORE + "require s: time_until_below(abs(voltage(R2)), R_x * 1 A) <= 2 * 5 ms\n").requirements
    assert found.figure is not None and write_expression(found.figure) == "time_until_below(abs(voltage(R2)), 10 V)"
    assert found.bound is not None and write_expression(found.bound) == "0.01 s"
    (rated,) = circuit_of(MORE + "require s: ratings of each diode, margin = 20 %\n").requirements
    assert rated.elements == ("D1", "D[2]") and rated.margin == pytest.approx(0.2)


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("require q: mean(u) <= 1 V", "no study is named q"),
        ("require s: mean(u) at q <= 1 V", "no study is named q"),
        ("require s: voltage(p) at s <= 1 V", "`at` stands behind a figure only"),
        ("require s: u <= 1 V", "this is a signal, and a requirement needs a figure"),
        ("require s: 1 V <= 2 V", "this is a value, and a requirement needs a figure"),
        ("require s: mean(u) <= 1 A", "figure and limit have different units"),
        ("require s: mean(u) <= 1", "figure and limit have different units"),
        ("require s: mean(u) <= u", "a signal is no limit"),
        ("require s: mean(u) between 2 V and 1 V", "the lower limit lies above the upper one"),
        ("require s: mean(u) + u <= 1 V", "a signal and a figure can't be combined"),
        ("require s: mean(u) + mean(i) <= 1 V", "the two sides of + have different units"),
        ("require s: mean(mean(u)) <= 1 V", "mean takes a signal, and this is a figure already"),
        ("require s: mean(1 V) <= 1 V", "mean takes a signal, and this is a value"),
        ("require s: maen(u) <= 1 V", "there is no figure, signal or function maen"),
        ("require s: mean(u, u) <= 1 V", "mean takes a signal"),
        ("require s: harmonic(u, 1.5) <= 1 V", "the second argument of harmonic must be a whole number without a unit"),
        ("require s: harmonic(u, 0) <= 1 V", "the second argument of harmonic is 0, which is out of range"),
        ("require s: time_until_above(u, 1 A) <= 1 s", "the level of time_until_above is not in the signal's unit"),
        ("require s: i2t(u) <= 1 A^2 s", "i2t takes a signal in A"),
        ("require s: conduction_angle(R1) <= 1 deg", "conduction_angle is of a diode, and R1 is a resistor"),
        ("require s: mean_power(Q) <= 1 W", "no element is named Q"),
        ("require s: mean_power(p) <= 1 W", "no element is named p"),
        ("require s: peak(voltage(q)) <= 1 V", "no node or element is named q"),
        ("require s: peak(voltage(a -> q)) <= 1 V", "no node is named q"),
        ("require s: peak(voltage(each thyristor)) <= 1 V", "the circuit has no thyristor"),
        ("require s: peak(voltage(each diod)) <= 1 V", "there is no kind diod"),
        ("require s: peak(voltage(each diode)) - peak(current(each resistor)) * 1 Ohm <= 1 V", "one requirement has several `each`"),
        ("require s: ratings of Q", "no element is named Q"),
        ("require s: ratings, margin = 2", "the margin is no share"),
        ("require s: ratings, margn = 2 %", "ratings has no key margn"),
        ('require s: mean(u) within "IEC"', "only the harmonics or the discharge of an element are compared with a table"),
        ("require s: harmonics(e) <= 1", "harmonics stands before `within` only"),
        ("observe v = mean(u)", "v is a figure, not a signal"),
        ("observe v = R1", "R1 is an element, not a signal"),
        ("observe v = p", "p is a node, not a signal"),
        ("observe v = w\nobserve w = v", "v depends on itself"),
        ("observe v = u ^ u", "an exponent must be a plain number"),
        ("observe v = exp(u)", "exp takes a number without a unit, this is in V"),
        ("observe v = max(u, i)", "the two sides of max have different units"),
        ("observe v = abs(u, u)", "abs takes one argument"),
        ("observe u = voltage(p)", "u is declared twice"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_a_requirement_or_signal(text: str, what: str) -> None:
    assert whats(MORE + text + "\n") == [what]


def test_requirements_are_bounded() -> None:
    added = "".join(f"study t{n}: settled\n" for n in range(300)) + "require each study: mean(u) <= 1 V\n" * 80
    assert whats(MORE + added) == ["the design has too many requirements"]


def test_observes_of_observes_in_any_order_are_bounded() -> None:
    def chain(count: int) -> str:
        return (
            MORE
            + "".join(f"observe v{n} = v{n + 1} + v{n + 1}\n" for n in range(count))
            + f"observe v{count} = voltage(p)\n"
        )

    assert list(circuit_of(chain(30)).observes)[-1] == "v30" and whats(chain(3000)) == [
        "more than 32 observes stand in one another"
    ]


# --- sweeps --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "axes",
    [
        "R_x from 1 Ohm to 9 Ohm in 5 steps",
        "R_x from 1 Ohm to 9 Ohm in 5 log steps",
        "R_x over [1 Ohm, 2 Ohm * 3]",
        "extremes of R_x",
        "extremes of each let",
        "20 samples of R_x, seed = 3",
        "20 samples of each let, seed = 3, studies = [s]",
        "open each diode",
        "open or short each element",
        "short each of D[2..2], R1",
        "open each diode by extremes of each let, studies = [s, r]",
    ],
)
def test_sweeps(axes: str) -> None:
    (sweep,) = circuit_of(MORE + f"sweep w: {axes}\n").sweeps
    assert sweep.name == "w" and len(sweep.axes) == axes.count(" by ") + 1


@pytest.mark.parametrize(
    ("axes", "what"),
    [
        ("R_y over [1 Ohm]", "no let is named R_y"),
        ("R_x over [1 V]", "the new value of R_x is given in V"),
        ("R_x over []", "the list of values is empty"),
        ("R_x over [1: 2 Ohm]", "the list takes plain values"),
        ("R_x from 1 V to 2 Ohm in 5 steps", "the new value of R_x is given in V"),
        ("R_x from 1 Ohm to 2 Ohm in 1 steps", "the number of steps is 1, which is out of range"),
        ("R_x from 1 Ohm to 2 Ohm in 2.5 steps", "the number of steps must be a whole number without a unit"),
        ("R_x from 0 Ohm to 2 Ohm in 5 log steps", "a logarithmic range starts or ends at zero or below"),
        ("extremes of k", "k has no tolerance"),
        ("20 samples of R_x", "samples are drawn without a seed"),
        ("0 samples of R_x, seed = 1", "the number of samples is 0, which is out of range"),
        ("20 samples of R_x, seed = 1.5", "the seed must be a whole number without a unit"),
        ("extremes of R_x, seed = 1", "this sweep has no key seed"),
        ("extremes of R_x, studies = [q]", "no study is named q"),
        ("extremes of R_x, studies = s", "studies takes a list of names"),
        ("extremes of R_x, studies = [s], studies = [s]", "studies is given twice"),
        ("open each thyristor", "the circuit has no thyristor"),
        ("open each diod", "there is no kind diod"),
        ("open each of Q", "no element is named Q"),
        ("open each of D[1..2]", "no element is named D[1]"),
        ("open each of D[2..1]", "the range of indices is empty or too long"),
        ("open each of D[1..99999]", "the range of indices is empty or too long"),
        ("open each of D[1..9999][1..9999]", "the list of names is too long"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_a_sweep(axes: str, what: str) -> None:
    assert whats(MORE + f"let k = 2\nsweep w: {axes}\n") == [what]


def test_sweeps_of_one_name_and_lets_without_tolerance() -> None:
    assert whats(MORE + "sweep w: extremes of R_x\nsweep w: extremes of R_x\n") == ["sweep w is declared twice"]
    assert whats(BASE + "let q = 1\nsweep w: extremes of each let\n") == ["no let has a tolerance"]
