"""Junctions beyond the bare exponential: temperature, capacitance, stored charge and breakdown, through text and engine.

Each value was worked out outside the project on two independent routes; tolerance classes as in the other modules of the folder:
T0 a law evaluated by itself, T1 an operating point, T2 a figure of a course in time.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from checking import DIODE, close, course, solved

from simcore.components.forward_fit import fit
from simcore.components.physics import BOLTZMANN_OVER_CHARGE, depletion_charge
from simcore.equations.plain import evaluate
from simcore.equations.values import Graph, Level

QUIET = "saturation_current = 1e-15 A, ideality_factor = 1, temperature = 300.15 K"
"""A junction whose reverse current of 1 fA is nothing beside what is looked at."""

# --- temperature: I_S(T) = I_S0 (T/T0)^(3/n) exp[(E_g/(n k)) (1/T0 - 1/T)] -----------------------------------------------
# Sze, Ng, Physics of Semiconductor Devices, 2007; Gray et al., Analysis and Design of Analog Integrated Circuits, 2009 (from memory).

SMALL = ("saturation_current = 1e-14 A, ideality_factor = 1", 1e-3)
LARGE = ("saturation_current = 1 nA, ideality_factor = 1.8", 1.0)
HEAT = [
    # law and current, temperature in K, saturation current in A, voltage in V, slope in mV/K
    (SMALL, 233.15, 1.84800365e-20, 0.774115069, -1.742050),
    (SMALL, 273.15, 1.04303461e-16, 0.703592812, -1.782983),
    (SMALL, 300.15, 1.00000000e-14, 0.655118118, -1.807352),
    (SMALL, 323.15, 2.72073557e-13, 0.613326817, -1.826439),
    (SMALL, 348.15, 6.11034526e-12, 0.567422038, -1.845704),
    (SMALL, 398.15, 9.92994457e-10, 0.474250196, -1.880393),
    (LARGE, 233.15, 6.52882312e-13, 1.01467724, -0.7102582),
    (LARGE, 273.15, 7.92601416e-11, 0.985426644, -0.7511920),
    (LARGE, 300.15, 1.00000000e-9, 0.964810319, -0.7755604),
    (LARGE, 323.15, 6.26683072e-9, 0.946750221, -0.7946480),
    (LARGE, 348.15, 3.53032189e-8, 0.926640230, -0.8139120),
    (LARGE, 398.15, 5.97147432e-7, 0.885057962, -0.8486024),
]


@pytest.mark.parametrize(("sort", "kelvin", "saturation", "volts", "slope"), HEAT)
def test_temperature_of_the_law(
    sort: tuple[str, float], kelvin: float, saturation: float, volts: float, slope: float
) -> None:
    """Voltage at constant current, T1. Its slope over 0.2 K to 1e-5: the curvature falls out, the law's "+1" is neglected in the
    closed form. The saturation current from the voltage: nine printed digits of it lose a factor v / (n V_T) < 40."""
    law, amperes = sort
    text = f"""
    let T = {kelvin!r} K
    g -> a: source e, constant = {amperes!r} A
    a -> g: diode D, {law}, data_temperature = 300.15 K, temperature = T
    reference g
    study s: operating_point
    study cooler: operating_point, set T = {kelvin - 0.1!r} K
    study warmer: operating_point, set T = {kelvin + 0.1!r} K
    """
    result = solved(text)
    close(result, "mean(voltage(a))", volts, 1e-7)
    cool, warm = (float(solved(text, study).figure("mean(voltage(a))")) for study in ("cooler", "warmer"))
    assert (warm - cool) / 0.2 == pytest.approx(1e-3 * slope, rel=1e-5)
    width = (1.8 if sort is LARGE else 1.0) * BOLTZMANN_OVER_CHARGE * kelvin
    found = float(result.figure("mean(voltage(a))"))
    assert amperes / math.expm1(found / width) == pytest.approx(saturation, rel=1e-7)


def test_reverse_leakage_doubles_where_the_saturation_current_does() -> None:
    """d ln I_S / dT = (3 / n + E_g / (n k T)) / T at n = 1: 0.1542625 1/K, so 4.4933 K double it. The leak across a junction (1e-12 S)
    would hide 10 fA, hence a diode of 1 uA. T1 on the currents; the slope's own change over 0.1 K falls out to 1e-6."""
    text = """
    let T = 300.15 K
    g -> a: source e, constant = 1 V
    a -> g: diode D, saturation_current = 1 uA, ideality_factor = 1, data_temperature = 300.15 K, temperature = T
    reference g
    study s: operating_point
    study cooler: operating_point, set T = 300.1 K
    study warmer: operating_point, set T = 300.2 K
    """
    cool, warm = (-float(solved(text, study).figure("mean(current(D))")) for study in ("cooler", "warmer"))
    assert 10.0 * math.log(warm / cool) == pytest.approx(0.1542625, rel=1e-5)


# --- junction capacitance: C = C_0 / (1 - V/phi)^m, 50 pF, 0.75 V (Sze, Ng, 2007, from memory) ------------------------------

DEPLETION = [
    (0.5, 0.3, 6.45497224e-11, 1.69052498e-11),
    (0.5, -1.0, 3.27326835e-11, -3.95643924e-11),
    (0.5, -10.0, 1.32067636e-11, -2.08945417e-10),
    (0.5, -100.0, 4.31397981e-12, -7.94266932e-10),
    (0.5, -400.0, 2.16303661e-12, -1.65867384e-9),
    (0.33, 0.3, 5.91806992e-11, 1.62219185e-11),
    (0.33, -1.0, 3.78039922e-11, -4.27716215e-11),
    (0.33, -10.0, 2.07670796e-11, -2.77232994e-10),
    (0.33, -100.0, 9.92360235e-12, -1.43627304e-9),
    (0.33, -400.0, 6.29204697e-12, -3.70751914e-9),
]


@pytest.mark.parametrize(("exponent", "volts", "capacitance", "charge"), DEPLETION)
def test_depletion_charge(exponent: float, volts: float, capacitance: float, charge: float) -> None:
    """The law by itself: the charge to the digits printed (T0), the capacitance as its slope over 2 mV at most (1e-6)."""
    graph = Graph()
    voltage = graph.input("v", Level.ITERATION)
    law = depletion_charge(voltage, *(graph.constant(number) for number in (50e-12, 0.75, exponent)))

    def plain(at: float) -> float:
        return float(evaluate([law], {"v": at})[0])

    assert plain(volts) == pytest.approx(charge, rel=5e-9)
    step = 1e-4 * (0.75 - volts)
    slope = (8.0 * (plain(volts + step) - plain(volts - step)) - plain(volts + 2 * step) + plain(volts - 2 * step)) / (12.0 * step)
    assert slope == pytest.approx(capacitance, rel=1e-6)


def test_depletion_charge_goes_on_along_its_tangent() -> None:
    """At half the built-in voltage value and slope are those of the law; beyond, the capacitance is a straight line (common practice)."""
    graph = Graph()
    voltage = graph.input("v", Level.ITERATION)
    law = depletion_charge(voltage, *(graph.constant(number) for number in (50e-12, 0.75, 0.5)))
    at = np.array([0.374, 0.375, 0.376, 0.5, 0.7, 0.9])
    charge = np.array([float(evaluate([law], {"v": volts})[0]) for volts in at])
    exact = 50e-12 * 0.75 / 0.5 * (1.0 - np.sqrt(1.0 - at[:3] / 0.75))
    assert charge[:3] == pytest.approx(exact, rel=1e-7)
    beyond = at[2:] - 0.375
    tangent = exact[1] + 50e-12 / math.sqrt(0.5) * (beyond + 0.5 / (2.0 * 0.5 * 0.75) * beyond**2)
    assert charge[2:] == pytest.approx(tangent, rel=1e-12)


def charged(exponent: float, rest: str) -> str:
    return f"""
    {rest}
    a -> g: diode D, {QUIET}, junction_capacitance = 50 pF @ 0 V, built_in_voltage = 0.75 V, capacitance_exponent = {exponent!r}
    reference g
    study s: transient, duration = 5 us, accuracy = 0.01 %
    """


@pytest.mark.parametrize(("exponent", "seconds"), [(0.5, 7.9426693e-7), (0.33, 1.4362730e-6)])
def test_junction_charged_by_a_constant_current(exponent: float, seconds: float) -> None:
    """1 mA from 0 V to -100 V takes Q(-100 V) / 1 mA. T2."""
    result = solved(charged(exponent, "a -> g: source e, constant = 1 mA"))
    close(result, "time_until_below(voltage(a), -100 V)", seconds, 1e-4)


@pytest.mark.parametrize(
    ("exponent", "times"),
    [(0.5, (2.1792331e-7, 6.9036847e-7, 1.4977181e-6)), (0.33, (2.9018493e-7, 1.1652666e-6, 2.9283162e-6))],
)
def test_junction_charged_through_a_resistance(exponent: float, times: tuple[float, ...]) -> None:
    """-100 V through 100 kOhm: times to -10 V, -50 V and -90 V, integrated outside. T2."""
    result = solved(charged(exponent, "v -> g: source e, constant = -100 V\nv -> a: resistor R, 100 kOhm"))
    for level, seconds in zip((10, 50, 90), times, strict=True):
        close(result, f"time_until_below(voltage(a), -{level} V)", seconds, 1e-4)


def test_junction_capacitance_is_stated_at_a_reverse_voltage() -> None:
    """50 pF at 0 V are 50 pF / sqrt(1 + 4 / 0.75) at 4 V: the same time to -100 V whichever is written. Five in series share the
    voltage and five in parallel the charge: the same charge once at 500 V, once at a fifth of the time a current takes."""
    time = "time_until_below(voltage(a), -100 V)"
    feed = "a -> g: source e, constant = 1 mA"
    farads = 50e-12 / math.sqrt(1.0 + 4.0 / 0.75)
    stated = charged(0.5, feed).replace("50 pF @ 0 V", f"{farads!r} F @ 4 V")
    close(solved(stated), time, 7.9426693e-7, 1e-4)
    many = charged(0.5, feed.replace("1 mA", "5 mA")).replace("built_in", "in_parallel = 5, built_in")
    close(solved(many), time, 7.9426693e-7, 1e-4)
    high = charged(0.5, feed).replace("built_in", "in_series = 5, built_in")
    close(solved(high), time.replace("100", "500"), 7.9426693e-7, 1e-4)


# --- stored charge: dQ/dt = i - Q/tau (Pierret, Semiconductor Device Fundamentals, 1996, ch. 8, from memory) ----------------

DRIVEN = f"""
g -> a: source e, FEED
a -> g: diode D, {DIODE}, carrier_lifetime = LIFETIME us
g -> a: diode other, {QUIET}
reference g
"""
"""A junction driven by a current; once its charge is out the other one, 1e-15 of the current until then, takes the rest."""


def reversed_after(forward: float, seconds: float, reverse: float = 1.0) -> str:
    study = f"study s: transient, duration = {seconds + 15e-6!r} s, accuracy = 0.01 % {{\n at {seconds!r} s: set I_x = {-reverse!r} A\n}}"
    return f"let I_x = {forward!r} A\n" + DRIVEN.replace("FEED", "constant = I_x").replace("LIFETIME", "5") + study


@pytest.mark.parametrize(
    ("ratio", "seconds"), [(0.1, 4.76550899e-7), (1.0, 3.46573590e-6), (4.0, 8.04718956e-6), (10.0, 1.19894764e-5)]
)
def test_storage_time(ratio: float, seconds: float) -> None:
    """tau ln(1 + I_F / I_R), 5 us, from steady state: after 20 lifetimes e^-20 is left. T2."""
    close(solved(reversed_after(ratio, 100e-6)), "time_until_below(voltage(a), 0 V)", seconds, 1e-4)


def test_storage_time_of_a_short_pulse() -> None:
    """2 us forward from rest, I_F = I_R. T2."""
    close(solved(reversed_after(1.0, 2e-6)), "time_until_below(voltage(a), 0 V)", 1.42469139e-6, 1e-4)


def test_charge_after_reversal() -> None:
    """Q at 1, 2 and 3 us after the reversal of 1 A, read off the voltage: Q = tau I_S (exp(v / (n V_T)) - 1). T2:
    the voltage is asked for to 1e-4, of which v / (n V_T), up to 22, makes 2.2e-3 of the charge."""
    volts = course(solved(reversed_after(1.0, 100e-6)), "voltage(a)").value(np.array([101e-6, 102e-6, 103e-6]))
    width = 1.8 * BOLTZMANN_OVER_CHARGE * 300.15
    assert 5e-6 * 1e-9 * np.expm1(volts / width) == pytest.approx([3.1873075e-6, 1.7032005e-6, 0.48811636e-6], rel=3e-3)


RAMPS = [
    # forward current A, slope A/us, lifetime us; time of zero charge us, reverse peak A, recovered charge nC
    (10.0, 50.0, 0.2, 0.36828113, 8.4140566, 707.96348),
    (1.0, 10.0, 2.0, 0.66762109, 5.6762109, 1610.9685),
    (20.0, 100.0, 0.05, 0.24966081, 4.9660809, 123.30980),
]


@pytest.mark.parametrize(("forward", "slope", "lifetime", "zero", "peak", "recovered"), RAMPS)
def test_ramp_turn_off(forward: float, slope: float, lifetime: float, zero: float, peak: float, recovered: float) -> None:
    """i = I_F - a t from steady state; closed form confirmed by integration outside. The time is of the whole course (20 lifetimes
    before the ramp). T2; the peak stands at a corner of the current, where a step's end may lie a thousandth off."""
    start, end = 20.0 * lifetime, 20.0 * lifetime + 1.3 * zero
    feed = f"points = [0 s: {forward!r} A, {start!r} us: {forward!r} A, {end!r} us: {forward - slope * 1.3 * zero!r} A]"
    text = DRIVEN.replace("FEED", feed).replace("LIFETIME", repr(lifetime))
    result = solved(text + f"observe back = min(current(D), 0 A)\nstudy s: transient, duration = {end!r} us, accuracy = 0.01 %")
    close(result, "time_until_below(voltage(a), 0 V)", (start + zero) * 1e-6, 1e-4 * zero / (start + zero))
    close(result, "-valley(current(D))", peak, 1e-3)
    charge = -float(result.figure("mean(back)")) * end * 1e-6
    assert charge == pytest.approx(1e-9 * recovered, rel=2e-3)


def test_recovery_charge_is_lifetime_times_current() -> None:
    """2 uC @ 0.4 A is a lifetime of 5 us: the same course to the last bit."""
    text = reversed_after(1.0, 100e-6)
    other = text.replace("carrier_lifetime = 5 us", "recovery_charge = 2 uC @ 0.4 A")
    assert other != text
    figure = "time_until_below(voltage(a), 0 V)"
    assert float(solved(text).figure(figure)) == pytest.approx(float(solved(other).figure(figure)), rel=1e-12)


# --- breakdown ----------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("volts", "amperes", "node"),
    [(13.0, 0.00941989524546722, 12.0580105), (20.0, 0.0788702706, 12.1129729), (100.0, 0.878246894, 12.1753106)],
)
def test_breakdown_voltage_behind_a_resistance(volts: float, amperes: float, node: float) -> None:
    """i = 1 mA exp((v - 12 V) / V_T) through 100 Ohm: by Lambert W. T1."""
    text = f"""
    v -> g: source e, constant = {volts!r} V
    v -> a: resistor R, 100 Ohm
    g -> a: diode D, {QUIET}, breakdown_voltage = 12 V @ 1 mA
    reference g
    study s: operating_point
    """
    result = solved(text)
    close(result, "-mean(current(D))", amperes, 1e-7)
    close(result, "mean(voltage(a))", node, 1e-7)


def test_breakdown_resistance() -> None:
    """20 V through 100 Ohm, clamp of 12 V with 5 Ohm, load of 200 Ohm (linear algebra): the exponential is at 12 V at the very current
    that flows. T1."""
    text = f"""
    v -> g: source e, constant = 20 V
    v -> a: resistor R, 100 Ohm
    a -> g: resistor R_L, 200 Ohm
    g -> a: diode D, {QUIET}, breakdown_voltage = 12 V @ 18.6046511627907 mA, breakdown_resistance = 5 Ohm
    reference g
    study s: operating_point
    """
    result = solved(text)
    close(result, "mean(voltage(a))", 12.0930232558, 1e-7)
    close(result, "-mean(current(D))", 0.0186046512, 1e-7)
    close(result, "mean_power(D)", 0.22498648, 1e-7)


@pytest.mark.parametrize(
    ("aiding", "seconds", "joules"), [(0.0, 100e-6, 12.5e-3), (12.0, 131.578947e-6, 16.4473684e-3)]
)
def test_inductor_into_a_clamp(aiding: float, seconds: float, joules: float) -> None:
    """1 mH with 5 A into 50 V: time L I / (V_c - V) to zero, energy (L I^2 / 2) V_c / (V_c - V). At 50 K the exponential is 4.3 mV
    wide, and 50 V hold at 1 A: up to 7 mV off at 5 A and less below, so 3e-4 of 38 V. The last hundredth of the current is left out,
    as the knee makes an asymptote of it."""
    text = f"""
    g -> x: source e, constant = {-aiding!r} V
    x -> a: inductor L, 1 mH, initial_current = 5 A
    g -> a: diode D, saturation_current = 1e-15 A, ideality_factor = 1, temperature = 50 K, breakdown_voltage = 50 V @ 1 A
    reference g
    study s: transient, duration = 200 us, accuracy = 0.01 %
    """
    result = solved(text)
    close(result, "time_until_below(current(L), 50 mA)", 0.99 * seconds, 0.0, 3e-4 * seconds)
    close(result, "energy(D)", joules, 0.0, 3e-4 * joules)


# --- the forward fit ----------------------------------------------------------------------------------------------------------

LAWS = [(1e-9, 1.8, 0.03), (2.5e-12, 1.05, 0.0), (20e-6, 1.1, 0.025), (3e-8, 2.1, 0.6)]


@pytest.mark.parametrize(("saturation", "factor", "resistance"), LAWS)
def test_points_of_a_known_law_give_it_back(saturation: float, factor: float, resistance: float) -> None:
    """v = n V_T ln(1 + i / I_S) + R i at six currents; I_S stands in an exponent, where rounding is enlarged some 40 times."""
    width = factor * BOLTZMANN_OVER_CHARGE * 298.15
    points = [(width * math.log1p(i / saturation) + resistance * i, i) for i in (1e-3, 1e-2, 0.1, 0.3, 1.0, 3.0)]
    found = fit(points, 298.15)
    assert found.ideality_factor == pytest.approx(factor, rel=1e-8)
    assert found.saturation_current == pytest.approx(saturation, rel=1e-6)
    assert found.series_resistance == pytest.approx(resistance, rel=1e-6, abs=1e-9)
    assert max(abs(miss) for miss in found.misses) < 1e-10


def test_two_points_fix_the_bare_law() -> None:
    """n V_T = (v_2 - v_1) / ln(i_2 / i_1) where i >> I_S: 0.2 V between 10 mA and 1 A."""
    found = fit([(0.7, 0.01), (0.9, 1.0)], 298.15)
    assert found.ideality_factor == pytest.approx(0.2 / math.log(100.0) / (BOLTZMANN_OVER_CHARGE * 298.15), rel=1e-6)
    assert found.series_resistance == 0.0
    assert found.saturation_current == pytest.approx(0.01 * math.exp(-0.7 * math.log(100.0) / 0.2), rel=1e-5)


def test_fitted_diode_goes_through_its_points() -> None:
    """Through text and engine: three points of a law, solved at one of its currents and at one between. T1."""
    width = 1.7 * BOLTZMANN_OVER_CHARGE * 298.15
    volts = {i: width * math.log1p(i / 5e-9) + 0.04 * i for i in (0.01, 0.1, 0.5, 1.0)}
    curve = ", ".join(f"{volts[i]!r} V @ {i!r} A" for i in (0.01, 0.1, 1.0))
    for amperes in (0.1, 0.5):
        text = f"g -> a: source e, constant = {amperes!r} A\na -> g: diode D, forward = [{curve}]\nreference g\nstudy s: operating_point"
        close(solved(text), "mean(voltage(a))", volts[amperes], 1e-7)
