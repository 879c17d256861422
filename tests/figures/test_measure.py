"""Figures of signals against closed forms and against identities that need no reference."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from grammar.quantities import AMPERE, ANGLE, NONE, SECOND, VOLT, WATT
from simcore.figures import measure
from simcore.figures.signal import Signal
from tests.figures.fake_solution import three_points

FREQUENCY = 50.0
PERIOD = 1.0 / FREQUENCY
OMEGA = 2.0 * math.pi * FREQUENCY
PIECES = 2400
INTERPOLATION = 1e-8
"""A quadratic through three points of a sine at 2400 pieces a period: (omega h / 2)^3 / 15 of the crest is 1.5e-10."""


def wave(function, pieces: int = PIECES, periods: int = 1, dimension=VOLT) -> Signal:
    times = np.linspace(0.0, periods * PERIOD, pieces * periods + 1)
    return Signal.through(times, three_points(times, function), dimension)


def steps(levels: list[float], dimension=AMPERE) -> Signal:
    """A block wave: equal shares of one period at constant levels, exact."""
    times = np.linspace(0.0, PERIOD, len(levels) + 1)
    return Signal.through(times, np.repeat(np.array(levels)[:, None], 3, axis=1), dimension)


def test_sine() -> None:
    sine = wave(lambda t: 325.0 * np.sin(OMEGA * t))
    assert measure.mean(sine).value == pytest.approx(0.0, abs=1e-9)
    assert measure.rms(sine).value == pytest.approx(325.0 / math.sqrt(2.0), rel=INTERPOLATION)
    assert measure.peak(sine).value == pytest.approx(325.0, rel=INTERPOLATION)
    assert measure.valley(sine).value == pytest.approx(-325.0, rel=INTERPOLATION)
    assert measure.ripple(sine).value == pytest.approx(650.0, rel=INTERPOLATION)
    assert measure.crest_factor(sine).value == pytest.approx(math.sqrt(2.0), rel=INTERPOLATION)
    # IEC 60050-103: form factor of a sine, rms over rectified mean, pi / (2 sqrt 2).
    assert measure.form_factor(sine).value == pytest.approx(math.pi / (2.0 * math.sqrt(2.0)), rel=INTERPOLATION)
    assert measure.harmonic(sine, 1, FREQUENCY).value == pytest.approx(325.0 / math.sqrt(2.0), rel=INTERPOLATION)
    assert measure.harmonic(sine, 3, FREQUENCY).value == pytest.approx(0.0, abs=1e-6)
    # The rest is the interpolation error alone, which a difference of squares could not show.
    assert measure.distortion(sine, FREQUENCY).value < INTERPOLATION


def test_factors_of_a_signal_without_a_mean_are_undefined_and_say_so() -> None:
    sine = wave(lambda t: np.sin(OMEGA * t))
    figure = measure.ripple_factor(sine)
    assert not figure.defined and "the mean is zero" in figure.note and figure.dimension == NONE
    nothing = steps([0.0, 0.0])
    assert "zero throughout" in measure.form_factor(nothing).note
    assert "zero throughout" in measure.crest_factor(nothing).note
    assert "fundamental is zero" in measure.distortion(steps([1.0, 1.0]), FREQUENCY).note
    assert not measure.distortion(nothing, FREQUENCY).defined


def test_half_wave_rectified_sine() -> None:
    # Rows 2A1 and 2E of the published resistive-load figures (Millman and Halkias 1972, from memory; computed).
    half = wave(lambda t: np.maximum(np.sin(OMEGA * t), 0.0))
    assert measure.mean(half).value == pytest.approx(0.318309886, rel=INTERPOLATION)
    assert measure.rms(half).value == pytest.approx(0.5, rel=INTERPOLATION)
    assert measure.form_factor(half).value == pytest.approx(1.5707963, rel=INTERPOLATION * 4)
    assert measure.ripple_factor(half).value == pytest.approx(1.2113633, rel=INTERPOLATION * 4)
    root2 = math.sqrt(2.0)
    for order, amplitude in [(1, 0.5), (2, 0.212206591), (4, 0.0424413182), (6, 0.0181891363), (3, 0.0), (5, 0.0)]:
        found = measure.harmonic(half, order, FREQUENCY).value * root2
        assert found == pytest.approx(amplitude, abs=INTERPOLATION)


def test_full_wave_rectified_sine() -> None:
    # Row 2A3: single-phase bridge, ideal diodes, resistive load (Millman and Halkias 1972, from memory; computed).
    full = wave(lambda t: abs(np.sin(OMEGA * t)))
    assert measure.mean(full).value == pytest.approx(2.0 / math.pi, rel=INTERPOLATION)
    assert measure.form_factor(full).value == pytest.approx(1.1107207, rel=INTERPOLATION * 4)
    assert measure.ripple_factor(full).value == pytest.approx(0.48342585, rel=INTERPOLATION)


def test_rectifying_a_sine_signal_is_exact() -> None:
    sine = wave(lambda t: np.sin(OMEGA * t + 0.3), pieces=601)
    direct = wave(lambda t: abs(np.sin(OMEGA * t + 0.3)), pieces=600000)
    assert measure.mean(abs(sine)).value == pytest.approx(measure.mean(direct).value, rel=1e-7)


def test_block_wave_of_a_six_pulse_bridge() -> None:
    # Mohan, Undeland and Robbins 2003, chapter 5 (from memory; computed): line current of a six-pulse bridge with
    # smooth current, +1 for 120 deg, 0, -1 for 120 deg, 0. Distortion of all orders sqrt(pi^2/9 - 1),
    # fundamental sqrt(6)/pi.
    block = steps([0.0, 1.0, 1.0, 0.0, -1.0, -1.0])
    assert measure.distortion(block, FREQUENCY).value == pytest.approx(0.3108419393, rel=1e-9)
    assert measure.distortion(block + 0.7, FREQUENCY).value == pytest.approx(0.3108419393, rel=1e-9)
    assert measure.harmonic(block, 1, FREQUENCY).value == pytest.approx(math.sqrt(6.0) / math.pi, rel=1e-12)
    assert measure.harmonic(block, 5, FREQUENCY).value == pytest.approx(math.sqrt(6.0) / math.pi / 5.0, rel=1e-11)
    assert measure.harmonic(block, 3, FREQUENCY).value == pytest.approx(0.0, abs=1e-12)
    assert measure.harmonic(block, 97, FREQUENCY).value == pytest.approx(math.sqrt(6.0) / math.pi / 97.0, rel=1e-9)


def test_square_wave_of_a_bridge_with_smooth_current() -> None:
    # Same source, single phase: sqrt(pi^2/8 - 1).
    assert measure.distortion(steps([1.0, -1.0]), FREQUENCY).value == pytest.approx(0.483425847609, rel=1e-10)


def test_triangle_ripple_factor() -> None:
    # A triangle from 9 to 11: rms of the alternating part 1/sqrt(3).
    times = np.array([0.0, 0.5, 1.0]) * PERIOD
    triangle = Signal.through(times, np.array([[9.0, 10.0, 11.0], [11.0, 10.0, 9.0]]), VOLT)
    assert measure.ripple(triangle).value == pytest.approx(2.0, rel=1e-14)
    assert measure.ripple_factor(triangle).value == pytest.approx(1.0 / math.sqrt(3.0) / 10.0, rel=1e-13)
    assert measure.valley(triangle).value == pytest.approx(9.0)


def test_i2t_and_energy_have_their_units() -> None:
    current = steps([2.0, 0.0])
    figure = measure.i2t(current)
    assert figure.value == pytest.approx(4.0 * PERIOD / 2.0)
    assert figure.dimension == AMPERE * AMPERE * SECOND
    power = steps([3.0, 1.0], dimension=WATT)
    assert measure.energy(power).value == pytest.approx(2.0 * PERIOD)
    assert measure.energy(power).dimension == WATT * SECOND


def test_discharge_reaches_a_level_after_its_time_constant() -> None:
    times = np.linspace(0.0, 0.2, 4001)
    falling = Signal.through(times, three_points(times, lambda t: 10.0 * np.exp(-t / 0.05)), VOLT)
    figure = measure.time_until(falling, 9.0 * math.exp(-0.01 / 0.05), 0.01, below=True)
    assert figure.value == pytest.approx(0.05 * math.log(10.0 / 9.0), rel=1e-9)
    never = measure.time_until(falling, 0.1, 0.01, below=True)
    assert math.isinf(never.value) and never.beyond == pytest.approx(0.19) and never.note
    at_once = measure.time_until(falling, 11.0, 0.01, below=True)
    assert at_once.value == 0.0 and "from the start" in at_once.note
    rising = measure.time_until(-falling, -5.0, 0.0, below=False)
    assert rising.value == pytest.approx(0.05 * math.log(2.0), rel=1e-9)


def test_conduction_angle_of_a_half_wave_counts_a_thousandth_of_the_peak() -> None:
    half = wave(lambda t: 3.0 * np.maximum(np.sin(OMEGA * t), 0.0), periods=2, dimension=AMPERE)
    figure = measure.conduction_angle(half, FREQUENCY)
    assert figure.dimension == ANGLE
    assert figure.value == pytest.approx(math.pi - 2.0 * math.asin(1e-3), abs=1e-7)
    assert measure.conduction_angle(steps([-1.0, -2.0]), FREQUENCY).value == 0.0


levels = st.lists(st.floats(-5.0, 5.0).map(lambda x: round(x, 2)), min_size=3, max_size=8)


@settings(max_examples=30, deadline=None)
@given(levels, st.floats(0.01, 100.0))
def test_scaling_a_signal_scales_its_figures(values: list[float], factor: float) -> None:
    signal, scaled = steps(values), steps(values) * factor
    for figure in (measure.mean, measure.rms, measure.peak, measure.valley, measure.ripple):
        assert figure(scaled).value == pytest.approx(factor * figure(signal).value, rel=1e-9, abs=1e-9)
    for factor_figure in (measure.ripple_factor, measure.form_factor, measure.crest_factor):
        one, two = factor_figure(signal), factor_figure(scaled)
        assert one.defined == two.defined
        if one.defined:
            assert two.value == pytest.approx(one.value, rel=1e-6)


@settings(max_examples=20, deadline=None)
@given(levels)
def test_parseval(values: list[float]) -> None:
    signal = wave(lambda t: values[0] + sum(v * np.sin(n * OMEGA * t + n) for n, v in enumerate(values[1:], 1)), 1200)
    orders = [measure.harmonic(signal, order, FREQUENCY).value for order in range(1, len(values) + 3)]
    total = measure.mean(signal).value ** 2 + sum(value**2 for value in orders)
    assert total == pytest.approx(measure.rms(signal).value ** 2, rel=1e-6, abs=1e-12)


@settings(max_examples=20, deadline=None)
@given(levels, st.floats(0.0, 1.0))
def test_turning_a_periodic_signal_changes_no_harmonic(values: list[float], shift: float) -> None:
    def turned(angle: float) -> Signal:
        return wave(lambda t: sum(v * np.sin(n * (OMEGA * t + angle)) for n, v in enumerate(values, 1)), 600)

    for order in (1, 2, 3):
        one, two = (measure.harmonic(turned(angle), order, FREQUENCY).value for angle in (0.0, 6.0 * shift))
        assert two == pytest.approx(one, rel=1e-6, abs=1e-6)
