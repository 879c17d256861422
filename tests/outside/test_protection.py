"""Loads, fuses, inrush limiters, clamps, relays and saturating cores against closed forms, through text and engine.

T1: an operating point, 1e-7. T2: a figure of a course in time, here solved to 0.01 % and held to 1e-4 and what is said beside it.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from checking import close, course, solved

import simcore
from simcore.components.build import build_frame
from simcore.solve.sources import largest_voltage, rounding_current

FINE = "accuracy = 0.01 %"

# --- loads ------------------------------------------------------------------------------------------------------------------


def reservoir(takes: str) -> str:
    return f"""
    a -> g: capacitor C, 220 uF, initial_voltage = 380 V
    a -> g: load converter, {takes}
    reference g
    study s: transient, duration = 100 ms, {FINE}
    """


def test_hold_up_with_constant_power() -> None:
    """C (V0^2 - V1^2) / (2 P) from 380 V to 300 V at 100 W, and the voltage on the way, sqrt(V0^2 - 2 P t / C). T2."""
    result = solved(reservoir("power = 100 W, cut_in = 350 V, cut_out = 290 V"))
    close(result, "time_until_below(voltage(a), 300 V)", 0.05984, 1e-4)
    found = course(result, "voltage(a)").value(np.array([0.01, 0.03, 0.05]))
    assert found == pytest.approx([367.843840, 342.238620, 314.555964], rel=1e-4)


def test_load_of_constant_power_stops_at_its_cut_out() -> None:
    """From 380 V down to 350 V: then nothing is drawn, and it does not start again below its cut-in. T2 on the energy taken."""
    result = solved(reservoir("power = 100 W, cut_in = 360 V, cut_out = 350 V"))
    close(result, "valley(voltage(a))", 350.0, 1e-4)
    close(result, "energy(converter)", 0.5 * 220e-6 * (380.0**2 - 350.0**2), 2e-4)
    assert any("converter" in note and "stops" in note for note in result.solved.notes)
    idle = solved(reservoir("power = 100 W, cut_in = 390 V, cut_out = 350 V"))
    close(idle, "valley(voltage(a))", 380.0, 1e-6)


def test_hold_up_with_constant_current() -> None:
    """C (V0 - V1) / I at 0.3 A; of the current (10 mV / 300 V)^2 is missing. T2."""
    close(solved(reservoir("current = 0.3 A")), "time_until_below(voltage(a), 300 V)", 0.058666667, 1e-4)


def test_hold_up_with_a_resistance() -> None:
    """R C ln(V0 / V1) at 1444 Ohm. T2."""
    close(solved(reservoir("resistance = 1444 Ohm")), "time_until_below(voltage(a), 300 V)", 0.075095987, 1e-4)


def test_a_stepped_resistance_and_a_duty_cycle_of_current() -> None:
    """10 V on 20 Ohm for 3 ms and on 50 Ohm for 7 ms: (0.3 / 20 + 0.7 / 50) V^2 = 2.9 W; 2 A for a quarter of the time: rms 1 A, at
    10 V less a millionth of half of it, as a load of constant current lets go about 10 mV."""
    result = solved("""
    a -> g: source e, constant = 10 V
    a -> g: load R, resistance = [0 s: 20 Ohm, 3 ms: 20 Ohm, 3 ms: 50 Ohm, 10 ms: 50 Ohm], period = 10 ms
    a -> g: load I, current = [0 s: 2 A, 2.5 ms: 2 A, 2.5 ms: 0 A, 10 ms: 0 A], period = 10 ms
    reference g
    study s: settled
    """)
    close(result, "mean_power(R)", 2.9, 1e-6)
    close(result, "rms(current(I))", 1.0 / math.sqrt(1.0 + 1e-6), 1e-7)
    close(result, "ripple(current(R))", 0.3, 1e-9)


def test_the_scale_of_voltages_is_that_of_sources_alone() -> None:
    """A list of powers in kW is no list of voltages: the floor below which a voltage needs no accuracy follows from the 1 V source,
    on both sides of every jump of it."""
    text = """
    a -> g: source e, points = [0 s: 0 V, 1 ms: 0 V, 1 ms: 1 V, 1.1 ms: 0 V, 10 ms: 0 V], period = 10 ms, series_resistance = 1 mOhm
    a -> g: load P, power = [0 s: 1 kW, 10 ms: 5 kW], period = 10 ms, cut_in = 100 V, cut_out = 50 V
    a -> g: load R, resistance = [0 s: 20 Ohm, 3 ms: 20 Ohm, 3 ms: 0.5 Ohm, 10 ms: 50 Ohm], period = 10 ms
    reference g
    study s: settled
    """
    frame = build_frame(simcore.read_text(text, "x").circuit)
    assert largest_voltage(frame, 0.01) == pytest.approx(1.0, rel=1e-4)
    assert rounding_current(frame, 1.0) == pytest.approx(3e-15 / 1e-3, rel=1e-4)


def test_power_over_time() -> None:
    """A ramp from 0 W to 200 W in 40 ms takes 4 J, then 200 W: 220 uF fall from 380 V to 310 V in 40 ms more / 7.5 ms or so. T2."""
    result = solved(reservoir("power = [0 s: 0 W, 40 ms: 200 W], cut_in = 350 V, cut_out = 290 V"))
    joules = 0.5 * 220e-6 * (380.0**2 - 310.0**2)
    close(result, "time_until_below(voltage(a), 310 V)", 0.04 + (joules - 4.0) / 200.0, 1e-4)


# --- fuses ------------------------------------------------------------------------------------------------------------------


def discharged(melting: float, seconds: float) -> str:
    return f"""
    a -> g: capacitor C, 1000 uF, initial_voltage = 325 V
    a -> g: fuse F, resistance = 0.5 Ohm, melting_i2t = {melting!r} A^2 s
    reference g
    study s: transient, duration = {seconds!r} s, {FINE}
    """


def test_fuse_stands_what_is_below_its_i2t() -> None:
    """1000 uF at 325 V into 0.5 Ohm: V^2 C / (2 R) = 105.625 A^2 s. T2."""
    result = solved(discharged(106.0, 0.02))
    close(result, "i2t(current(F))", 105.625, 1e-4)
    assert not any("melts" in note for note in result.solved.notes)


@pytest.mark.parametrize("melting", [20.0, 100.0, 105.0])
def test_fuse_melts_at_its_i2t(melting: float) -> None:
    """After (R C / 2) ln(W / (W - melting)), W = 105.625 A^2 s; what is left in the capacitor then stays. Near W the time hangs on the
    difference, which enlarges an error by W / (W - melting). T2."""
    whole = 105.625
    seconds = 0.5 * 1e-3 / 2.0 * math.log(whole / (whole - melting))
    enlarged = whole / (whole - melting)
    result = solved(discharged(melting, 2.0 * seconds))
    close(result, "time_until_below(current(F), 1 A)", seconds, 2e-5 * enlarged + 1e-4)
    close(result, "i2t(current(F))", melting, 1e-4)
    close(result, "valley(voltage(a))", 325.0 * math.sqrt(1.0 - melting / whole), 2e-5 * enlarged + 1e-4)
    assert any("F melts" in note for note in result.solved.notes)


def carried(amperes: float, seconds: float) -> str:
    return f"""
    g -> a: source e, constant = {amperes!r} A
    a -> g: resistor R, 1 kOhm
    a -> g: fuse F, resistance = 1 mOhm, rated_current = 10 A, melting_i2t = 50 A^2 s
    reference g
    study s: transient, duration = {seconds!r} s, {FINE}
    """


@pytest.mark.parametrize("amperes", [13.0, 20.0, 100.0])
def test_fuse_that_loses_heat(amperes: float) -> None:
    """dH/dt = i^2 - H / tau, tau = M / (1.25 I_n)^2: melts after -tau ln(1 - (1.25 I_n / i)^2); 1.25 is the conventional non-fusing
    current (IEC 60269-1, from memory). T2, enlarged near the limit as the time hangs on a difference; a millionth of the current goes
    through the resistor beside it."""
    tau, share = 50.0 / 12.5**2, (12.5 / amperes) ** 2
    seconds = -tau * math.log1p(-share)
    enlarged = share / ((1.0 - share) * -math.log1p(-share))
    close(solved(carried(amperes, 2.0 * seconds)), "time_until_below(current(F), 1 A)", seconds, 2e-4 * max(enlarged, 1.0))


def test_heat_of_a_fuse_that_loses_some() -> None:
    """H = i^2 tau (1 - exp(-t / tau)), seen as a signal: at 8 A for half a second. T2."""
    tau = 50.0 / 12.5**2
    result = solved(carried(8.0, 0.5))
    amperes = 8.0 / (1.0 + 1e-6)
    close(result, "peak(heat(F))", amperes**2 * tau * -math.expm1(-0.5 / tau), 1e-4)
    close(result, "mean(heat(F))", amperes**2 * tau * (1.0 + tau / 0.5 * math.expm1(-0.5 / tau)), 1e-4)


def test_fuse_carries_its_rated_current_for_good() -> None:
    """1.2 times the rated one for two hundred time constants: warm, and whole."""
    result = solved(carried(12.0, 60.0))
    close(result, "valley(current(F))", 12.0 / (1.0 + 1e-6), 1e-7)
    assert not result.solved.notes


# --- inrush limiters ----------------------------------------------------------------------------------------------------------

LIMITER = "inrush_limiter T, cold_resistance = 10 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K, heat_capacity = 300 mJ/K"
WARMING = f"""
v -> g: source e, constant = VOLTS V
v -> a: {LIMITER}
a -> g: resistor R, 5 Ohm
reference g
observe theta = temperature(T)
study rest: operating_point
study s: transient, duration = 200 s, {FINE}
study switch_on: transient, duration = 20 s, {FINE}
"""


def rest_of(volts: float, ohm: float = 5.0) -> float:
    """Temperature in K where R(T) i^2 = D (T - T_a), by bisection."""

    def excess(kelvin: float) -> float:
        hot = 10.0 * math.exp(2800.0 * (1.0 / kelvin - 1.0 / 298.15))
        return hot * (volts / (hot + ohm)) ** 2 - 0.015 * (kelvin - 298.15)

    low, high = 298.15, 2000.0
    for _ in range(100):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if excess(middle) > 0.0 else (low, middle)
    return low


@pytest.mark.parametrize("volts", [2.0, 20.0, 50.0])
def test_inrush_limiter_at_rest(volts: float) -> None:
    """R(T) i^2 = D (T - T_a) (IEC 60539-1, from memory), as an operating point (T1) and after 10 time constants (e^-10 at most)."""
    text = WARMING.replace("VOLTS", repr(volts))
    kelvin = rest_of(volts)
    close(solved(text, "rest"), "mean(theta)", kelvin, 1e-7)
    assert float(course(solved(text), "theta").value(200.0)) == pytest.approx(kelvin, rel=1e-4)


def test_inrush_limiter_keeps_the_books() -> None:
    """Energy taken = heat stored + heat given off: C (T_end - T_a) + D (mean T - T_a) duration. T2."""
    result = solved(WARMING.replace("VOLTS", "20"), "switch_on")
    end = float(course(result, "theta").value(20.0))
    assert end - 298.15 > 100.0, "it has warmed up"
    given_off = 0.015 * (float(result.figure("mean(theta)")) - 298.15) * 20.0
    close(result, "energy(T)", 0.3 * (end - 298.15) + given_off, 2e-4)
    close(result, "peak(current(T))", 20.0 / (10.0 * math.exp(2800.0 * (1.0 / end - 1.0 / 298.15)) + 5.0), 2e-4)


# --- clamps ------------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("volts", "ohm", "amperes"), [(430.0, 1.0, 1e-3), (710.0, 1.0, 50.0), (-710.0, 1.0, -50.0)])
def test_clamp_goes_through_its_points(volts: float, ohm: float, amperes: float) -> None:
    """Two points fix i = (v / V_1)^exponent (IEC 61051-1, from memory); alike in both directions. T1; the
    current has that of its two leaks beside it, 1e-12 S each."""
    text = f"""
    v -> g: source e, constant = {volts + ohm * amperes!r} V
    v -> a: resistor R, {ohm!r} Ohm
    a -> g: clamp V, clamping = [430 V @ 1 mA, 710 V @ 50 A]
    reference g
    study s: operating_point
    """
    result = solved(text)
    close(result, "mean(voltage(a))", volts, 1e-7)
    close(result, "mean(current(V))", amperes + 2e-12 * volts, 1e-7)


def test_clamp_takes_the_energy_of_an_inductor() -> None:
    """L I^2 / 2, wherever its curve lies; the voltage starts at V_1 I^(1/exponent), 8 A here. T2."""
    text = f"""
    g -> a: inductor L, 2 mH, initial_current = 8 A
    a -> g: clamp V, clamping = [430 V @ 1 mA, 710 V @ 50 A]
    reference g
    study s: transient, duration = 1 ms, {FINE}
    """
    result = solved(text)
    exponent = math.log(50.0 / 1e-3) / math.log(710.0 / 430.0)
    close(result, "energy(V)", 0.064, 1e-4)
    close(result, "peak(voltage(a))", 710.0 * (8.0 / 50.0) ** (1.0 / exponent), 1e-4)


# --- relays -------------------------------------------------------------------------------------------------------------------


def test_relay_closes_and_opens_with_hysteresis_and_delay() -> None:
    """R C towards 100 V, 0.1 s: 60 V after 0.1 ln(100/40) s, 20 ms later the contact puts 100 Ohm beside 1 kOhm; it falls from there
    towards 100/11 V with 1/110 s, to 30 V after ln, and 20 ms later the contact opens again. T2 on each instant."""
    text = f"""
    v -> g: source e, constant = 100 V
    v -> a: resistor R, 1 kOhm
    a -> g: capacitor C, 100 uF
    a -> b: resistor R_x, 100 Ohm
    b -> g: switch K, closed_resistance = 1 uOhm, control = voltage(a), closes_above = 60 V, opens_below = 30 V, delay = 20 ms
    reference g
    study s: transient, duration = 180 ms, {FINE}
    """
    result = solved(text)
    closes = 0.1 * math.log(100.0 / 40.0) + 0.02
    top = 100.0 * (1.0 - math.exp(-closes / 0.1))
    close(result, "time_until_above(current(K), 0.1 A)", closes, 1e-4)
    close(result, "peak(voltage(a))", top, 1e-4)
    level = 100.0 / 11.0
    opens = closes + 0.1 / 11.0 * math.log((top - level) / (30.0 - level)) + 0.02
    bottom = level + (30.0 - level) * math.exp(-0.02 * 110.0)
    found = course(result, "voltage(a)")
    assert found.restrict(closes, 0.18).lowest() == pytest.approx(bottom, rel=2e-4)
    assert float(found.value(0.18)) == pytest.approx(100.0 - (100.0 - bottom) * math.exp(-(0.18 - opens) / 0.1), rel=2e-4)


# --- saturating cores -----------------------------------------------------------------------------------------------------------

EXCESS = 0.3 / 0.7
"""The inductance falls to 70 % at the saturation current, so that L / L(I_s) - 1 = 3/7."""


def core_current(flux: float | np.ndarray, inductance: float, limit: float, power: int) -> float | np.ndarray:
    """i = flux / L (1 + c / m (flux / flux_s)^(m-1)), flux_s being the flux at the saturation current."""
    knee = limit * inductance / (1.0 + EXCESS / power)
    return flux / inductance * (1.0 + EXCESS / power * (flux / knee) ** (power - 1))


def test_inductance_has_fallen_by_30_percent_at_the_saturation_current() -> None:
    """What a data sheet states: dflux/di at 5 A, over 0.02 A, is 0.7 mH; with 10 V, dflux = V dt. T2 and the curve's bend, 1e-5."""
    text = f"""
    a -> g: source e, constant = 10 V
    a -> g: inductor L, 1 mH, saturation_current = 5 A
    reference g
    study s: transient, duration = 1 ms, {FINE}
    """
    result = solved(text)
    below, above = (float(result.figure(f"time_until_above(current(L), {level} A)")) for level in (4.9, 5.1))
    assert 10.0 * (above - below) / 0.2 == pytest.approx(0.7e-3, rel=1e-3)


@pytest.mark.parametrize("start", [0.0, 3.0, -4.0])
def test_saturating_inductor_under_constant_voltage(start: float) -> None:
    """flux = flux_0 + V t, current its polynomial: every 0.1 ms. T2. Energy stored = integral of i dflux."""
    text = f"""
    a -> g: source e, constant = 10 V
    a -> g: inductor L, 1 mH, saturation_current = 5 A, initial_current = {start!r} A
    reference g
    study s: transient, duration = 1 ms, {FINE}
    """
    result = solved(text)
    fluxes = np.linspace(-0.01, 0.01, 400_001)
    curve = core_current(fluxes, 1e-3, 5.0, 3)
    first = float(np.interp(start, curve, fluxes))
    times = np.linspace(1e-4, 1e-3, 10)
    expected = core_current(first + 10.0 * times, 1e-3, 5.0, 3)
    assert course(result, "current(L)").value(times) == pytest.approx(expected, rel=1e-4, abs=1e-4)
    rising = np.linspace(0.0, first + 0.01, 20_001)
    stored = float(np.trapezoid(core_current(rising, 1e-3, 5.0, 3), rising))
    close(result, "stored_energy(L)", stored, 1e-4)


def test_harmonics_of_a_saturating_inductor() -> None:
    """Flux F cos: i = F/L (cos + k cos^3), k = c/3 (F/F_s)^2: fundamental F/L (1 + 3k/4), third F/L k/4, no other. T2."""
    text = f"""
    a -> g: source e, sine = 10 V peak, frequency = 50 Hz
    a -> g: inductor L, 10 mH, saturation_current = 2 A
    reference g
    study s: settled, angle = 90 deg, {FINE}
    """
    result = solved(text)
    flux = 10.0 / (100.0 * math.pi)
    share = EXCESS / 3.0 * (flux / (2.0 * 10e-3 / (1.0 + EXCESS / 3.0))) ** 2
    close(result, "harmonic(current(L), 1)", flux / 10e-3 * (1.0 + 0.75 * share) / math.sqrt(2.0), 2e-4)
    close(result, "harmonic(current(L), 3)", flux / 10e-3 * 0.25 * share / math.sqrt(2.0), 1e-3)
    assert float(result.figure("harmonic(current(L), 5)")) < 1e-4 * flux / 10e-3


def test_inrush_of_a_saturating_transformer() -> None:
    """230 V rms, 50 Hz, switched at the voltage's zero: the flux swings to 2 V_m / omega = 2.07072753 Wb, of which the ninth power
    makes the current. T2 on the flux, times nine."""
    text = f"""
    a -> g: source e, sine = 230 V rms, frequency = 50 Hz
    (a -> g) : (s -> t): transformer T, turns = 1 : 1, magnetising = 10 H, saturation_current = 100 mA
    s -> t: resistor R, 1 GOhm
    reference g, t
    study s: transient, duration = 20 ms, {FINE}
    study crest: transient, duration = 20 ms, angle = 90 deg, {FINE}
    """
    close(solved(text), "peak(current(T.w1))", core_current(2.07072753, 10.0, 0.1, 9), 9e-4)
    close(solved(text, "crest"), "peak(current(T.w1))", core_current(1.03536376, 10.0, 0.1, 9), 9e-4)
