"""Ratings: a design signed off by hand, each of its ratings just kept and just missed; and what can't be judged."""

import math

import pytest

import simcore
from simcore.components import KINDS
from simcore.figures.figure import Figure
from simcore.judge.bill import bill_of
from simcore.judge.cautions import cautions
from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict, spread
from tests.outside.checking import SHARP

# --- a design worked by hand -----------------------------------------------------------------------------------------
# V = 10 kV crest, f = 50 Hz, stiff. A half-wave rectifier with a nearly ideal diode feeds R = 1 kOhm; what else hangs at the
# source is linear. By definition of mean, rms and apparent power (textbook circuit theory):
V, R, W, C, L, RL = 10e3, 1e3, 2.0 * math.pi * 50.0, 1e-6, 2.0, 400.0
AMBIENT, RUNS = 40.0, 90.0
NTC = 2e3 * math.exp(3000.0 / (AMBIENT + 273.15) - 3000.0 / 298.15)
STRESS = {
    "D1 rated_reverse_voltage": V,
    "D1 rated_mean_current": V / (math.pi * R),
    "D1 rated_surge_current": V / R,
    "D1 rated_i2t": (V / R) ** 2 * 20e-3 / 4.0,
    "R1 rated_power": V * V / (4.0 * R),
    "C1 rated_voltage": V,
    # At the frequency of its rating twice 50 Hz would heat as much as 1 / 0.8 of the current of 50 Hz does.
    "C1 rated_ripple_current": W * C * V / math.sqrt(2.0) / 0.8,
    "L1 rated_current": V / math.sqrt(2.0) / math.hypot(RL, W * L),
    "F1 rated_current": V / math.sqrt(2.0) / math.hypot(RL, W * L),
    # Cooled so well that it stays at ambient: R = R_25 exp(B / T - B / T_25). An energy is that of a period.
    "N1 rated_current": V / math.sqrt(2.0) / NTC,
    "N1 rated_energy": V * V / 2.0 / NTC * 20e-3,
    # Its current is proportional to its voltage.
    "V1 rated_energy": V * V / 2.0 / 10e3 * 20e-3,
    "T1 rated_power": V * V / (2.0 * R) * 0.1 * 0.1,
}
MARGIN = 0.2
UNITS = {
    "rated_reverse_voltage": "V",
    "rated_voltage": "V",
    "rated_i2t": "A^2 s",
    "rated_power": "W",
    "rated_energy": "J",
}
BEHIND = {"rated_surge_current": " @ 10 ms", "rated_ripple_current": " @ 100 Hz"}


def hand_worked(factor: float) -> str:
    """The design, each rating `factor` times what leaves just the required margin."""

    def key(name: str) -> str:
        rating = name.split()[1]
        return f"{rating} = {STRESS[name] / (1.0 - MARGIN) * factor!r} {UNITS.get(rating, 'A')}{BEHIND.get(rating, '')}"

    hot = AMBIENT + (RUNS - AMBIENT) / (1.0 - MARGIN) * factor
    law = SHARP.replace("temperature = 300.15 K", f"data_temperature = {RUNS} degC, temperature = {RUNS} degC")
    diode = ", ".join([law, *(key(name) for name in STRESS if name.startswith("D1"))])
    return f"""
    ambient {AMBIENT} degC
    a -> g: source mains, sine = {V} V peak, frequency = 50 Hz
    a -> p: diode D1, {diode}, rated_junction_temperature = {hot!r} degC
    p -> g: resistor R1, {R} Ohm, {key("R1 rated_power")}
    a -> g: capacitor C1, {C} F, {key("C1 rated_voltage")}, {key("C1 rated_ripple_current")},
        frequency_factors = [50 Hz: 0.8, 100 Hz: 1], temperature = {RUNS} degC, rated_temperature = {hot!r} degC
    a -> g: inrush_limiter N1, cold_resistance = 2 kOhm, sensitivity = 3000 K, dissipation = 1 GW/K, heat_capacity = 1 J/K,
        {key("N1 rated_current")}, {key("N1 rated_energy")}
    a -> g: clamp V1, clamping = [10 kV @ 1 A, 20 kV @ 2 A], {key("V1 rated_energy")}
    a -> f: fuse F1, resistance = 1 uOhm, {key("F1 rated_current")}
    f -> l: inductor L1, {L} H, {key("L1 rated_current")}
    l -> g: resistor R2, {RL} Ohm
    (a -> g) : (s -> n): transformer T1, turns = 10 : 1, {key("T1 rated_power")}
    s -> n: resistor R3, {R} Ohm
    reference g, n
    study s: settled, accuracy = 0.01 %
    require s: ratings, margin = {MARGIN * 100.0} %
    """


def verdicts(text: str) -> list[Verdict]:
    return simcore.read_text(text).prove().verdicts


@pytest.mark.parametrize(("factor", "state"), [(1.003, State.HOLDS), (0.997, State.FAILS)])
def test_each_rating_of_a_design_worked_by_hand(factor: float, state: State) -> None:
    found = verdicts(hand_worked(factor))
    assert len(found) == len(STRESS) + 2, "with both temperatures"
    assert [(verdict.requirement.wording, verdict.state) for verdict in found if verdict.state is not state] == []


def test_figures_limits_and_margins_of_the_design_worked_by_hand() -> None:
    proof = simcore.read_text(hand_worked(1.01)).prove()
    left = 1.0 - (1.0 - MARGIN) / 1.01
    lines = {(line.name, line.stress): line for line in bill_of(proof)}
    worked = {
        ("D1", "reverse peak"): "D1 rated_reverse_voltage",
        ("D1", "mean current"): "D1 rated_mean_current",
        ("D1", "surge current"): "D1 rated_surge_current",
        ("D1", "i2t of 10 ms"): "D1 rated_i2t",
        ("R1", "dissipation"): "R1 rated_power",
        ("C1", "peak voltage"): "C1 rated_voltage",
        ("C1", "ripple current"): "C1 rated_ripple_current",
        ("L1", "rms current"): "L1 rated_current",
        ("F1", "rms current"): "F1 rated_current",
        ("N1", "rms current"): "N1 rated_current",
        ("N1", "energy"): "N1 rated_energy",
        ("V1", "energy"): "V1 rated_energy",
        ("T1", "apparent power"): "T1 rated_power",
    }
    for line, name in worked.items():
        # 2e-4: the diode drops some 0.8 V of 10 kV.
        assert lines[line].figure.value == pytest.approx(STRESS[name], rel=2e-4), name
        assert lines[line].unused == pytest.approx(left, abs=2e-4), name
    assert lines["D1", "junction temperature"].unused == pytest.approx(left, abs=1e-9)
    assert lines["D1", "junction temperature"].suggested is None
    assert lines["C1", "core temperature"].unused == pytest.approx(left, abs=1e-9)
    # R2 has no rating: V^2 / 2 / |Z|^2 * RL = 3.6 kW, and 20 % more room asks for 45 kW: 50 kW in R10.
    own = lines["R2", "dissipation"]
    power = STRESS["L1 rated_current"] ** 2 * RL
    assert own.figure.value == pytest.approx(power, rel=1e-4) and own.rating is None and own.unused is None
    assert (own.margin, own.suggested) == (MARGIN, pytest.approx(50e3)) and 40e3 < power / 0.8 < 50e3
    assert lines["T1.w2", "rms current"].figure.value == pytest.approx(0.1 * V / R / math.sqrt(2.0), rel=1e-4)
    assert proof.unrated == ["R2", "R3"]


def test_every_rating_that_there_is_was_worked_by_hand() -> None:
    worked = {name.split()[1] for name in STRESS} | {"rated_junction_temperature", "rated_temperature"}
    declared = {key.name for kind in KINDS.values() for key in kind.keys if key.rating}
    assert len(declared) > 8 and declared - worked == set()


def test_a_run_of_half_cycles_is_held_against_what_so_many_may_have() -> None:
    """Four half sines of V/R from rest, of which one may have 1.1 V/R and four half of that: 2 V/R as one."""
    crest = 1.1 * V / R
    text = f"""
    a -> g: source mains, sine = {V} V peak, frequency = 50 Hz
    a -> p: diode D1, {SHARP}, rated_surge_current = {crest!r} A @ 10 ms, surge_half_cycles = [4: {0.5 * crest!r} A]
    p -> g: resistor R1, {R} Ohm
    reference g
    study s: transient, duration = 80 ms
    require s: ratings of D1
    """
    (found,) = [each for each in verdicts(text) if "surge current" in each.requirement.wording]
    assert found.state is State.FAILS and found.figure is not None
    assert found.figure.value == pytest.approx(2.0 * V / R, rel=2e-3)


# --- a bridge with reservoir, settled figures of an outside integration ------------------------------------------------

BRIDGE = """
a -> b: source e, sine = 12 V rms, frequency = 50 Hz, series_resistance = 0.6 Ohm
{diodes}
plus -> minus: capacitor C1, 4700 uF, series_resistance = 45 mOhm, rated_voltage = 25 V, rated_ripple_current = 2 A
plus -> minus: resistor R1, 15 Ohm
reference minus
study s: settled, accuracy = 0.01 %
study on: transient, duration = 40 ms, after = s
require {studies}: ratings{margin}
"""
LAW = "saturation_current = 1 nA, ideality_factor = 1.8, temperature = 300.15 K, data_temperature = 300.15 K"
RATED = "rated_reverse_voltage = 100 V, rated_mean_current = 1 A, rated_surge_current = 30 A, rated_junction_temperature = 150 degC"


def bridge(rated: str = RATED, law: str = LAW, studies: str = "s", margin: str = "") -> str:
    ends = {"D1": "a -> plus", "D2": "b -> plus", "D3": "minus -> a", "D4": "minus -> b"}
    diodes = "\n".join(f"{end}: diode {name}, {law}, {rated}" for name, end in ends.items())
    return BRIDGE.format(diodes=diodes, studies=studies, margin=margin)


# Settled figures of a bridge with reservoir from an integration outside (Runge-Kutta of order 8, rtol 1e-13, on the periodic
# orbit): output maximum 13.169472 V, diode mean 0.41898350 A and peak 3.5891085 A, capacitor rms 1.2906132 A.
def test_stresses_of_a_bridge_are_those_of_an_outside_integration() -> None:
    found = {verdict.requirement.wording.partition(" (")[0]: verdict for verdict in verdicts(bridge())}
    for name, expected in {
        "C1: peak voltage": 13.169472,
        "C1: ripple current": 1.2906132,
        "D1: mean current": 0.41898350,
        "D4: surge current": 3.5891085,
    }.items():
        figure = found[name].figure
        assert isinstance(figure, Figure) and figure.bound is not None
        assert abs(figure.value - expected) <= 3.0 * figure.bound + 1e-7 * expected, name
        assert figure.bound < 2e-4 * expected
    limit = found["C1: peak voltage"].limit
    assert limit is not None and limit.value == 25.0


# --- what can't be judged, and what is left out ------------------------------------------------------------------------


def test_a_temperature_nobody_spoke_of_is_not_judged() -> None:
    cold = bridge(law=LAW.replace("temperature = 300.15 K, ", "", 1))
    open_ones = [verdict for verdict in verdicts(cold) if verdict.state is not State.HOLDS]
    assert [verdict.state for verdict in open_ones] == [State.NOT_JUDGED] * 4
    assert all("thermal_resistance" in verdict.reason for verdict in open_ones)
    lines = bill_of(simcore.read_text(cold).prove())
    assert not [line for line in lines if line.stress == "junction temperature"]


def test_only_what_is_named_is_held_and_what_has_no_rating_is_said() -> None:
    text = bridge().replace("ratings", "ratings of R1, C1")
    found = verdicts(text)
    assert [verdict.state for verdict in found] == [State.NOT_JUDGED, State.HOLDS, State.HOLDS]
    assert found[0].reason == "no rating is given for it"
    kinds = verdicts(bridge().replace("ratings", "ratings of each diode"))
    assert len(kinds) == 16 and all(verdict.state is State.HOLDS for verdict in kinds)


def test_a_design_without_any_rating_is_not_judged() -> None:
    text = "a -> g: source e, constant = 9 V\na -> g: resistor R1, 1 kOhm\nreference g\nstudy s: operating_point\n"
    (only,) = verdicts(text + "require s: ratings\n")
    assert (only.state, only.reason) == (State.NOT_JUDGED, "no element has a rating")


@pytest.mark.parametrize("of", ["", " of R1, C1, D2", " of each diode"])
def test_what_will_be_judged_is_known_before_anything_is_solved(of: str) -> None:
    design = simcore.read_text(bridge(studies="s", margin=", margin = 5 %").replace("ratings", f"ratings{of}"))
    planned = spread(design.circuit, design.circuit.requirements)
    assert planned == [verdict.requirement for verdict in design.prove().verdicts] and len(planned) > 5


def test_a_label_stands_before_each_rating() -> None:
    found = verdicts(bridge(margin=', margin = 10 % as "sign-off"'))
    assert all(verdict.requirement.label and verdict.requirement.label.startswith("sign-off: ") for verdict in found)


def test_each_study_is_judged_and_the_bill_names_the_worst() -> None:
    found = verdicts(bridge(studies="each study"))
    assert {verdict.requirement.study for verdict in found} == {"s", "on"} and len(found) == 36
    text = bridge().replace("study on: transient, duration = 40 ms, after = s", "study on: transient, duration = 40 ms")
    lines = {(line.name, line.stress): line for line in bill_of(simcore.read_text(text).prove())}
    assert lines["D1", "surge current"].study == "on" and lines["C1", "peak voltage"].study == "s"
    # What heats over minutes is not taken from a switch-on, though the rms current is larger there.
    assert lines["C1", "ripple current"].study == "s" and lines["D1", "mean current"].study == "s"
    alone = text.replace("study s: settled", "study s: transient, duration = 40 ms")
    only = {(line.name, line.stress): line for line in bill_of(simcore.read_text(alone).prove())}
    assert only["C1", "ripple current"].figure.value > 1.2 * lines["C1", "ripple current"].figure.value


# --- cautions ----------------------------------------------------------------------------------------------------------


def test_cautions_speak_of_this_design() -> None:
    # A capacitor C at V = 325 V holds C V^2 / 2 = 5.28 J; through R it falls to 60 V in R C ln(V / 60 V) = 7.94 s.
    text = """
    a -> g: source mains, sine = 325 V peak, frequency = 50 Hz
    a -> p: diode D1, saturation_current = 1 pA, ideality_factor = 0.01
    p -> g: capacitor C1, 100 uF
    p -> g: resistor R_bleed, 47 kOhm
    a -> x: diode D2, saturation_current = 1 pA, ideality_factor = 0.01
    x -> g: capacitor C2, 1 nF
    x -> y: resistor R_far, 1 MOhm
    y -> g: resistor R_near, 1 MOhm
    reference g
    study s: settled
    """
    said = cautions(simcore.read_text(text).prove())
    # D1 stands the crest of the source and what C1 holds, 325 V less the 0.7 V that it loses in half a period.
    assert "Up to 649 V stand across D1: not safe to touch." in said
    assert any(line.startswith("Capacitors and inductors hold up to 5.28 J") for line in said)
    assert (
        "C1 charged to 325 V: 60 V are reached after 7.94 s through R_bleed alone, while that stays connected." in said
    )
    assert any(
        line.startswith("C2 charged to") and "nothing across it is known to discharge it" in line for line in said
    )
    assert any("licensed practice" in line for line in said)


def test_a_small_design_is_not_called_deadly() -> None:
    said = cautions(simcore.read_text(bridge()).prove())
    assert not any("not safe" in line or "charged to" in line for line in said)
    assert any("hold up to" in line for line in said)


def test_a_thyristor_that_is_never_fired_is_told() -> None:
    """A winding of 0.6 % of the mains does not fire it, one of 6 % does."""
    text = """
    a -> g: source mains, sine = 400 V rms, frequency = 50 Hz, series_resistance = 0.2 Ohm
    (a -> g) : (x -> g): transformer T1, turns = 400 : {turns}, magnetising = 20 H
    x -> g: resistor R_x, 1 kOhm
    a -> p: thyristor V1, saturation_current = 1 nA, ideality_factor = 1.8, firing_angle = 60 deg, firing_reference = voltage(x -> g)
    p -> g: resistor R, 20 Ohm
    reference g
    study s: settled
    """
    silent, fired = (cautions(simcore.read_text(text.format(turns=turns)).prove()) for turns in ("2.5", "25"))
    assert any(line.startswith("V1 carries nothing in s: if it should") for line in silent)
    assert not any("carries nothing" in line for line in fired)
