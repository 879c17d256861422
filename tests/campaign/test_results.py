"""What a sweep finds: worst cases, pass rates, spreads and sensitivities, held to closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import stats

import simcore
from simcore.campaign.face import sweep_task
from simcore.campaign.plan import Plan, Points
from simcore.campaign.results import Results, interval
from simcore.campaign.rows import SOLVED, Claim, Found, Row, decode, encode
from simcore.campaign.sensitivity import sensitivities
from simcore.campaign.solver import Task
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import Here
from simcore.judge.outcome import Outcome
from simcore.report.sweeps import sweep_lines

DIVIDER = """
let U  = 9 V      tolerance 0.5 V
let R1 = 2 kOhm   tolerance 5 %
let R2 = 1 kOhm   tolerance 10 %  normal
let spare = 3 V
a -> b: source cell, constant = U
a -> mid: resistor R_top, R1
mid -> b: resistor R_bottom, R2
reference b
observe u = voltage(mid)
study rest: operating_point
require rest: mean(u) <= 3.1 V
require rest: mean(current(R_top)) >= 2.9 mA  as "standing current"
sweep all: extremes of each let
sweep spread: 100 samples of each let, seed = 1
sweep ohms: R2 from 0 Ohm to 2 kOhm in 3 steps
"""


@pytest.fixture(scope="module")
def divider() -> simcore.Design:
    return simcore.read_text(DIVIDER, "divider.rect")


def test_a_spread_is_that_of_the_closed_form(divider: simcore.Design) -> None:
    """u = U R2 / (R1 + R2), Ohm's law, over all draws at once."""
    table = divider.sweep("spread", workers=1).table
    supply, top, bottom = (table[name] for name in ("U [V]", "R1 [Ohm]", "R2 [Ohm]"))
    expected = supply * bottom / (top + bottom)
    error = np.abs(table["rest: mean(u) [V]"] - expected)
    assert len(table) == 100 and np.all(error <= table["rest: mean(u), bound [V]"]) and np.ptp(expected) > 0.3
    assert np.all(table["rest: mean(u), bound [V]"] < 1e-9)
    holds = table["rest: mean(u) <= 3.1 V"] == "holds"
    assert np.array_equal(holds, expected <= 3.1) and 0 < holds.sum() < 100


def test_extremes_hold_every_draw_of_a_monotone_figure(divider: simcore.Design) -> None:
    heading = "rest: mean(u) [V]"
    corners, spread = (divider.sweep(name, workers=1).table[heading] for name in ("all", "spread"))
    assert corners.min() < spread.min() and spread.max() < corners.max()
    assert corners.max() == pytest.approx(9.5 * 1100.0 / (1900.0 + 1100.0), rel=1e-9)


def test_the_worst_case_is_the_corner_that_the_signs_say(divider: simcore.Design) -> None:
    results = divider.sweep("all", workers=1)
    high, current = results.worst
    assert high.found.state == "fails" and high.found.margin == pytest.approx(3.1 - 9.5 * 1.1 / 3.0)
    assert results.pasted(high.row) == [
        "let U = 9.5 V tolerance 8.5 V .. 9.5 V",
        "let R1 = 1.9 kOhm tolerance 1.9 kOhm .. 2.1 kOhm",
        "let R2 = 1.1 kOhm tolerance 900 Ohm .. 1.1 kOhm normal",
    ]
    assert results.plan.variant(current.row.number - 1).values["U"].value == 8.5


def test_a_variant_that_is_no_sound_design_is_one_row(divider: simcore.Design) -> None:
    results = divider.sweep([{"R2": -5.0}, {"R2": "1 kOhm"}], workers=1)
    assert [row.solved for row in results.rows] == [False, True]
    assert results.rows[0].ended.startswith("not sound: ") and results.counts == (1, 0, 1)
    assert results.outcome is Outcome.NO_SOLUTION and not results.rows[0].passes
    assert math.isnan(results.columns["rest: mean(u) [V]"][0])
    assert "1 holds every requirement, 1 was not solved" in "\n".join(sweep_lines(results))


def test_a_variant_without_a_solution_is_one_row() -> None:
    text = """
a -> g: source e, sine = 1 V peak, frequency = 50 Hz
b -> g: source d, sine = 1 V peak, frequency = F
a -> g: resistor Ra, 1 Ohm
b -> g: resistor Rb, 1 Ohm
reference g
let F = 50 Hz
study s: settled
require s: mean(voltage(a)) <= 1 V
sweep f: F over [50 Hz, 70.7106781 Hz, 100 Hz]
"""
    results = simcore.read_text(text).sweep("f", workers=1)
    assert [row.solved for row in results.rows] == [True, False, True] and "no common period" in results.rows[1].ended
    assert results.outcome is Outcome.NO_SOLUTION and results.counts == (2, 0, 1)
    assert [worst.row.number for worst in results.worst] != [2]


@pytest.mark.parametrize(("passing", "drawn"), [(0, 20), (20, 20), (7, 20), (1, 1), (499, 500)])
def test_the_interval_is_that_of_clopper_and_pearson(passing: int, drawn: int) -> None:
    """Biometrika 26, 1934: at each end the binomial tail is half of what is left of the confidence."""
    low, high = interval(passing, drawn)
    if passing:
        assert stats.binom.sf(passing - 1, drawn, low) == pytest.approx(0.025)
    if passing < drawn:
        assert stats.binom.cdf(passing, drawn, high) == pytest.approx(0.025)
    assert (low == 0.0) == (passing == 0) and (high == 1.0) == (passing == drawn)


def test_the_rule_of_three() -> None:
    """None of n fails: the upper limit of the share that does is about 3.7 / n at 95 % (two-sided)."""
    assert 1.0 - interval(1000, 1000)[0] == pytest.approx(-math.log(0.025) / 1000.0, rel=2e-3)


def test_pass_rates_at_each_point_of_the_other_axes() -> None:
    text = DIVIDER.replace("sweep spread:", "sweep spread: R1 over [1 kOhm, 4 kOhm] by").replace(
        "100 samples", "20 samples"
    )
    rates = simcore.read_text(text).sweep("spread", workers=1).pass_rates
    assert [(rate.at, rate.drawn) for rate in rates] == [("R1 = 1 kOhm", 20), ("R1 = 4 kOhm", 20)]
    assert rates[0].passing == 0 and rates[1].passing < 20


def test_worst_is_by_verdict_then_by_margin() -> None:
    claim = Claim("s", "mean(u)", "V", "mean(u) <= 1 V")
    states = [
        ("holds", 0.5),
        ("undecided", math.nan),
        ("undecided", 0.1),
        ("fails", -0.1),
        ("fails", -0.3),
        ("holds", -9),
    ]
    rows = [Row(k + 1, SOLVED, (Found(claim, 1.0, 0.0, m, s),)) for k, (s, m) in enumerate(states)]
    plan = Plan("x", (Points((), (), [()] * 6),))
    order = []
    while rows:
        (worst,) = Results(plan, rows, [claim]).worst
        order.append(worst.row.number)
        rows = [row for row in rows if row.number != worst.row.number]
    assert order == [5, 4, 2, 3, 6, 1]


def test_rows_are_read_back_as_written() -> None:
    known = [Claim("s", "mean(u)", "V", "mean(u) <= 1 V")]
    found = Found(known[0], 0.1 + 0.2, math.inf, -0.0, "holds", 'a "note",\n')
    rows = [Row(1, SOLVED, (found, Found(Claim("", "x", "A"), -math.inf))), Row(2, "no solution")]
    line = encode(rows, known)
    assert "\n" not in line and encode(decode(line, known), known) == line
    assert decode(line, known)[0].found[0] == found
    for wrong in ("", "[[1]]", "3", line.replace("[0,", "[7,"), line[:-1]):
        with pytest.raises(ValueError):
            decode(wrong, known)


def test_sensitivities_are_those_of_the_closed_form(divider: simcore.Design) -> None:
    """u = U R2 / (R1 + R2): S = 1 for U, R1 / (R1 + R2) for R2 and less that for R1; i = U / (R1 + R2)."""
    studies = ("rest",)

    def solve(plan: Plan) -> list[Row]:
        return list(solved_rows(Task(divider._opened, plan, studies), Here()))

    _, found = sensitivities(divider.circuit.lets, solve)
    values = {(each.claim.figure, each.let): each.value for each in found}
    expected = {"U": 1.0, "R1": -2.0 / 3.0, "R2": 2.0 / 3.0, "spare": 0.0}
    for let, value in expected.items():
        assert values["mean(u)", let] == pytest.approx(value, abs=1e-4)
    assert values["mean(current(R_top))", "R1"] == pytest.approx(-2.0 / 3.0, abs=1e-4)
    assert found[0].let == "U" and found[3].let == "spare" and all(each.clear for each in found[:3])


def test_variants_of_their_own_keep_what_they_do_not_name(divider: simcore.Design) -> None:
    results = divider.sweep(({"U": f"{volts} V"} if volts else {"R2": 500.0} for volts in (6, 0)), workers=1)
    columns = results.columns
    assert columns["rest: mean(u) [V]"] == pytest.approx([2.0, 1.8]) and math.isnan(columns["R2 [Ohm]"][0])


def test_what_is_wrong_with_a_call_is_said(divider: simcore.Design) -> None:
    for what, words in (
        ("al", "Did you mean all?"),
        ({"R3": [1.0]}, "no let is called R3"),
        ({"R2": []}, "there is no value for R2"),
        ({"R2": ["3 V"]}, "resistance is given in V"),
        ({"spare": ["3 A"]}, "what it is set to is in A"),
        ({"R2": [math.nan]}, "R2 = nan is no number"),
        ([{"R2": "3 Ohms"}], "Ohms is no unit"),
    ):
        with pytest.raises(simcore.DescriptionError, match=words.replace("?", r"\?")):
            divider.sweep(what, workers=1)
    with pytest.raises(simcore.DescriptionError, match="no study is called work"):
        divider.sweep("all", studies=["work"])


def test_figures_asked_for_besides(divider: simcore.Design) -> None:
    task = sweep_task(divider._opened, "ohms", (), ("mean(power(R_top))", "mean(nothing)"))
    results = Results(task.plan, list(solved_rows(task, Here())), task.claims)
    assert results.columns["mean(power(R_top)) [W]"][1:] == pytest.approx([0.018, 9.0**2 / 16e6 * 2e3])
    assert all(math.isnan(value) for value in results.columns["mean(nothing)"])
