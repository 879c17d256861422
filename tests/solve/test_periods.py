"""Periods and settled states through text: what repeats, what does not, and what no steady state fixes."""

from __future__ import annotations

import math

import pytest

import simcore
from simcore.face import Result
from simcore.solve.failure import NoSolution, Reason

LAW = "saturation_current = 1 nA, ideality_factor = 1.8"
TWO_SOURCES = "a -> m: source V1, sine = 1 V peak, frequency = {first} Hz\nm -> g: source V2, sine = 1 V peak, frequency = {second} Hz\na -> g: resistor R, 1 Ohm\nreference g\nstudy s: settled"


def solved(text: str, study: str = "s") -> Result:
    return simcore.read_text(text + "\nobserve u = voltage(a)\n", "check").run(study)


def test_period_of_two_frequencies() -> None:
    result = solved(TWO_SOURCES.format(first=50, second=60))
    assert result.solved.record.solution.period == pytest.approx(0.1, rel=1e-12)
    assert float(result.figure("rms(u)")) == pytest.approx(1.0, rel=1e-4)


def test_no_common_period_is_said() -> None:
    with pytest.raises(NoSolution) as failure:
        solved(TWO_SOURCES.format(first=50, second="70.7106781186547"))
    assert failure.value.reason is Reason.NO_PERIOD and "cure" in str(failure.value)
    assert "none within 1000 periods of the slowest" in str(failure.value)


def test_a_circuit_on_direct_current_has_no_period() -> None:
    with pytest.raises(NoSolution, match="none of them repeats"):
        solved("a -> g: source V, constant = 1 V\na -> g: resistor R, 1 Ohm\nreference g\nstudy s: settled")


@pytest.mark.parametrize(("period", "right"), [("100 ms", True), ("200 ms", True), ("20 ms", False), ("150 ms", False)])
def test_a_period_asked_for_is_whole_periods_of_the_sources(period: str, right: bool) -> None:
    text = TWO_SOURCES.format(first=50, second=60) + f", period = {period}"
    if right:
        assert float(solved(text).figure("rms(u)")) == pytest.approx(1.0, rel=1e-4)
        return
    with pytest.raises(NoSolution, match="they repeat every 100 ms") as failure:
        solved(text)
    assert failure.value.reason is Reason.NOT_WHOLE


def test_a_blocked_capacitor_keeps_what_it_reached_from_rest() -> None:
    """Two equal capacitors in series across a rectified voltage, the node between tied to nothing: each has half of it."""
    text = f"""e -> g: source V, sine = 10 V peak, frequency = 50 Hz
e -> a: diode D, {LAW}
a -> g: capacitor C, 10 uF
a -> g: resistor R, 10 kOhm
a -> m: capacitor C1, 1 uF
m -> g: capacitor C2, 1 uF
reference g
study s: settled
study long: transient, duration = 2 s, last = 1"""
    result = solved(text)
    half = float(result.figure("mean(u)")) / 2.0
    assert float(result.figure("mean(voltage(m))")) == pytest.approx(half, rel=1e-4)
    assert float(solved(text, "long").figure("mean(voltage(m))")) == pytest.approx(half, rel=1e-3)
    assert any("a multiplier of 1" in note and "from rest" in note for note in result.solved.notes)


def test_the_trace_may_be_recorded_at_points_of_a_period_and_no_figure_changes() -> None:
    text = f"e -> g: source V, sine = 10 V peak, frequency = 50 Hz\ne -> a: diode D, {LAW}\na -> g: capacitor C, 10 uF\n"
    text += "a -> g: resistor R, 1 kOhm\nreference g\nstudy s: settled"
    steps, points = solved(text), solved(text + ", record_every = 20 ms / 400")
    assert points.solved.study.record_every == pytest.approx(5e-5, rel=1e-12)
    for figure in ("mean(u)", "ripple(u)", "peak(current(D))"):
        assert points.figure(figure).value == steps.figure(figure).value


def test_a_lossless_core_keeps_the_flux_it_was_given() -> None:
    """A multiplier of 1: the magnetising current is offset by its crest, as from rest at the voltage's zero, and a note says so."""
    text = "a -> g: source V, sine = 325 V peak, frequency = 50 Hz\n(a -> g) : (s -> t): transformer T, turns = 1 : 1, magnetising = 2 H\ns -> t: resistor R, 1 kOhm\nreference g, t\nstudy s: settled"
    result = solved(text)
    offset = 325.0 / (2.0 * math.pi * 50.0 * 2.0)
    assert float(result.figure("mean(current(T.w1))")) == pytest.approx(offset, rel=1e-2)
    assert any("multiplier of 1" in note for note in result.solved.notes)


def test_a_core_that_forgets_within_thousands_of_periods_is_settled_at_once() -> None:
    """50 H behind 20 mOhm and beside a half-wave rectifier: of a disturbance 1 - 8e-6 is left after a period. No direct voltage
    can stand across the core, so that it takes the direct current that the diode draws."""
    text = f"""a -> b: source V, sine = 325 V peak, frequency = 50 Hz, phase = 20 deg\nb -> g: resistor R, 20 mOhm\na -> g: inductor L, 50 H
    a -> p: diode D, {LAW}\np -> g: capacitor C, 10 uF\np -> g: resistor R_L, 5 kOhm\nreference g\nstudy s: settled, accuracy = 0.01 %"""
    result = solved(text)
    assert result.solved.statistics["periods"] <= 24
    note = result.solved.notes[0]
    assert "by Newton" in note and "to 1e-07" in note and "largest multiplier 1 - 8e-06" in note
    core, drawn = result.figure("mean(current(L))"), float(result.figure("mean(current(D))"))
    assert abs(core.value + drawn) <= core.bound
    assert core.value == pytest.approx(-drawn, rel=2e-2)


# --- what does not settle --------------------------------------------------------------------------------------------------------

ASIDE = "a -> g: source V, sine = 10 V peak, frequency = 50 Hz\na -> b: resistor R, 1 kOhm\nb -> g: capacitor C, 1 uF\nreference g\nstudy s: settled"
FED = "x -> g: source I, constant = -1 mA\nx -> g: capacitor C2, 1 mF"


@pytest.mark.parametrize(
    ("drifting", "said"),
    [
        (FED, "the voltage of C2 drifts by 20 mV a period, and nothing takes it back"),
        (FED + ", initial_voltage = 10 V", "the voltage of C2 drifts by 20 mV a period, and nothing takes it back"),
        ("a -> m: source E, constant = 1 V\nm -> g: inductor L, 1 H", "the current of L drifts by -20 mA a period, and nothing takes it back"),
    ],
)
def test_what_drifts_is_told(drifting: str, said: str) -> None:
    """1 mA into 1 mF adds 20 mV in 20 ms, and so does 1 V across 1 H in mA; no steady state is made up of it."""
    with pytest.raises(NoSolution) as failure:
        solved(f"{drifting}\n{ASIDE}")
    assert failure.value.reason is Reason.NOT_SETTLED and said in str(failure.value)


def test_what_a_clamp_ends_does_not_drift() -> None:
    """The same capacitor, which takes a thousand periods to charge to a clamp of 20 V at 0.5 mA and 25 V at 2 mA: 1 mA by its power law."""
    result = solved(f"{FED}\nx -> g: clamp Z, clamping = [20 V @ 0.5 mA, 25 V @ 2 mA]\n{ASIDE}")
    volts = 20.0 * 2.0 ** (math.log(25.0 / 20.0) / math.log(4.0))
    assert float(result.figure("mean(voltage(x))")) == pytest.approx(volts, rel=1e-4)


def test_what_repeats_only_every_few_periods_is_told_and_settles_at_that_period() -> None:
    """A relay that empties the reservoir whenever it has filled comes back to the same phase every fifth period."""
    text = f"""a -> g: source V, sine = 10 V peak, frequency = 50 Hz, series_resistance = 1 kOhm
    a -> p: diode D, {LAW}\np -> g: capacitor C, 4 uF\np -> x: resistor R_x, 10 Ohm
    x -> g: switch K, closed_resistance = 1 Ohm, open_resistance = 1 GOhm, control = voltage(p), closes_above = 5 V, opens_below = 0.1 V
    reference g\nstudy s: settled"""
    with pytest.raises(NoSolution, match=r"repeats only every 5 periods of the sources; give it `period = 0.1 s`"):
        solved(text)
    result = solved(text + ", period = 0.1 s")
    cycled = solved(text.replace("settled", "transient, duration = 1 s, period = 0.1 s, last = 1"))
    assert float(result.figure("mean(voltage(p))")) == pytest.approx(float(cycled.figure("mean(voltage(p))")), rel=2e-3)


# --- what finding it costs, on any machine ------------------------------------------------------------------------------------------

BRIDGE = f"""a -> b: source V, sine = 17 V peak, frequency = 50 Hz\na -> x: resistor R_s, SERIES\nx -> p: diode D1, {LAW}\nb -> p: diode D2, {LAW}
m -> x: diode D3, {LAW}\nm -> b: diode D4, {LAW}\np -> q: inductor L, CHOKE\nq -> m: capacitor C, RESERVOIR\nq -> m: resistor R, LOAD\nreference m
observe u = voltage(q)\nstudy s: settled, accuracy = 1 %"""
LADDER = f"""let N = 10\nhigh[0] -> low[0]: source V, sine = 1 kV peak, frequency = 10 kHz, series_resistance = 100 Ohm
repeat k from 1 to N {{
    high[k-1] -> high[k]: capacitor A[k], 10 nF\n    low[k] -> low[k-1]: capacitor B[k], 10 nF
    low[k-1] -> high[k]: diode D[k], {LAW}\n    high[k] -> low[k]: diode E[k], {LAW}
}}
low[N] -> low[0]: resistor R, 100 MOhm\nreference low[0]\nobserve u = voltage(low[N])\nstudy s: settled, accuracy = 1 %"""


@pytest.mark.parametrize(
    ("text", "most"),
    [
        (BRIDGE.replace("SERIES", "0.5 Ohm").replace("inductor L, CHOKE", "resistor L, 1 mOhm").replace("RESERVOIR", "1 mF").replace("LOAD", "500 Ohm"), 15),
        (BRIDGE.replace("SERIES", "0.2 Ohm").replace("CHOKE", "50 mH").replace("RESERVOIR", "2.2 mF").replace("LOAD", "12 Ohm"), 15),
        (LADDER, 50),
    ],
    ids=["bridge of 0.5 s", "choke input", "ladder of 10 stages"],
)
def test_a_settled_state_costs_few_periods_whatever_its_time_constant(text: str, most: int) -> None:
    """Both solutions of each together, periods with derivatives counted as such; following alone takes 1266 for the ladder."""
    result = simcore.read_text(text, "check").run("s")
    counts = result.solved.statistics
    assert counts["solutions"] >= 2 and "by Newton" in result.solved.notes[0]
    assert counts["periods"] + counts["periods with derivatives"] <= most * counts["solutions"] / 2.0, counts
