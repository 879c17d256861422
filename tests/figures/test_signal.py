"""Signals: arithmetic, integrals, extrema and crossings are exact, whatever the pieces."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from grammar.quantities import AMPERE, NONE, VOLT, WATT
from simcore.figures import polynomials
from simcore.figures.signal import MAX_ORDER, Signal, SignalError, aligned, fitted, larger, power, smaller

ROUNDING = 1e-11

numbers = st.floats(-10.0, 10.0).map(lambda x: round(x, 3))
rows = st.lists(st.lists(numbers, min_size=3, max_size=3), min_size=1, max_size=6)


def signal_of(values: list[list[float]], start: float = 0.0, step: float = 0.5) -> Signal:
    times = start + step * np.arange(len(values) + 1) ** 1.3
    return Signal.through(times, np.array(values), VOLT)


def sampled(signal: Signal, count: int = 4001) -> tuple[np.ndarray, np.ndarray]:
    """Dense instants inside the pieces and the values there, as a check that knows no polynomials."""
    parts = [np.linspace(a, b, count)[1:-1] for a, b in zip(signal.times[:-1], signal.times[1:], strict=True)]
    times = np.concatenate(parts)
    return times, signal.value(times)


def test_through_meets_its_three_points_and_jumps_between_pieces() -> None:
    signal = signal_of([[1.0, 2.0, 5.0], [-3.0, 0.0, 1.0]])
    middles = 0.5 * (signal.times[1:] + signal.times[:-1])
    assert signal.value(middles) == pytest.approx([2.0, 0.0])
    assert signal.value(signal.times) == pytest.approx([1.0, -3.0, 1.0])
    start, end = signal.piece_ends
    assert start == pytest.approx([1.0, -3.0]) and end == pytest.approx([5.0, 1.0])


def test_wrong_shapes_are_refused() -> None:
    with pytest.raises(ValueError, match="one row of coefficients"):
        Signal(np.array([0.0, 1.0]), np.zeros((2, 3)), VOLT)
    with pytest.raises(ValueError, match="rise"):
        Signal(np.array([0.0, 1.0, 1.0]), np.zeros((2, 3)), VOLT)
    with pytest.raises(ValueError, match="finite"):
        Signal(np.array([0.0, 1.0]), np.array([[np.nan]]), VOLT)
    with pytest.raises(ValueError, match="runs from"):
        signal_of([[1.0, 1.0, 1.0]]).value(-1.0)


@settings(max_examples=40, deadline=None)
@given(rows, rows, numbers)
def test_arithmetic_agrees_with_arithmetic_of_values(left: list, right: list, factor: float) -> None:
    first, second = signal_of(left), signal_of(right, start=0.1, step=0.3)
    one, two = aligned(first, second)
    times, _ = sampled(one, 17)
    a, b = first.value(times), second.value(times)
    assert (one + two).value(times) == pytest.approx(a + b, abs=1e-9)
    assert (first - second).value(times) == pytest.approx(a - b, abs=1e-9)
    assert (first * second).value(times) == pytest.approx(a * b, abs=1e-8)
    assert (factor - first * factor).value(times) == pytest.approx(factor - factor * a, abs=1e-9)
    assert abs(first).value(times) == pytest.approx(abs(a), abs=1e-9)
    assert larger(first, second).value(times) == pytest.approx(np.maximum(a, b), abs=1e-9)
    assert smaller(first, second).value(times) == pytest.approx(np.minimum(a, b), abs=1e-9)


@settings(max_examples=40, deadline=None)
@given(rows, st.lists(st.floats(0.01, 0.99), max_size=5))
def test_cutting_pieces_changes_nothing(values: list, shares: list[float]) -> None:
    signal = signal_of(values)
    cuts = signal.start + signal.span * np.array(shares)
    cut = signal.on(np.union1d(signal.times, cuts))
    assert cut.integral() == pytest.approx(signal.integral(), abs=ROUNDING * 100)
    assert cut.inner(cut) == pytest.approx(signal.inner(signal), rel=ROUNDING, abs=ROUNDING)
    assert cut.highest() == pytest.approx(signal.highest(), abs=1e-10)
    assert cut.lowest() == pytest.approx(signal.lowest(), abs=1e-10)
    assert cut.time_above(1.5) == pytest.approx(signal.time_above(1.5), abs=1e-6)


@settings(max_examples=40, deadline=None)
@given(rows)
def test_extrema_of_a_power_against_dense_values(values: list) -> None:
    signal = signal_of(values)
    quartic = signal * signal - signal
    local = np.tile(np.linspace(-1.0, 1.0, 4001), (len(values), 1))
    dense = polynomials.values(quartic.coefficients, local)
    # Between neighbours 1/2000 apart a polynomial leaves its chord by at most |p''| / (8 * 2000^2); here |p''| < 1e5.
    spacing = 1e5 / (8.0 * 2000.0**2)
    assert dense.max() - 1e-9 <= quartic.highest() <= dense.max() + spacing
    assert dense.min() - spacing <= quartic.lowest() <= dense.min() + 1e-9


def test_the_top_of_a_parabola_between_breakpoints_is_exact() -> None:
    signal = Signal.through(np.array([0.0, 1.0]), np.array([[0.0, 4.0 * 0.25 * 0.75, 3.0 * 0.0 + 0.5]]), VOLT)
    # u = a t^2 + b t through (0, 0), (0.5, 0.75), (1, 0.5): a = -2, b = 2.5; top b^2 / (-4 a) = 0.78125.
    assert signal.highest() == pytest.approx(0.78125, rel=1e-14)
    assert signal.lowest() == 0.0


def test_roots_of_known_polynomials() -> None:
    wanted = np.array([-0.7, -0.1, 0.35, 0.9])
    row = np.polynomial.polynomial.polyfromroots(wanted)
    index, found = polynomials.roots(np.stack([row, np.eye(5)[0], -row]))
    assert list(index) == [0, 0, 0, 0, 2, 2, 2, 2]
    assert found == pytest.approx(np.concatenate([wanted, wanted]), abs=1e-13)


def test_a_root_at_the_middle_and_a_touching_root_are_found_once() -> None:
    odd = np.array([[0.0, -0.25, 0.0, 1.0]])
    assert polynomials.roots(odd)[1] == pytest.approx([-0.5, 0.0, 0.5], abs=1e-13)
    touching = np.array([[0.09, -0.6, 1.0]])
    _, found = polynomials.roots(touching)
    assert len(found) >= 1
    assert found == pytest.approx(np.full(len(found), 0.3), abs=1e-6)


def test_a_zero_row_has_no_roots() -> None:
    assert len(polynomials.roots(np.zeros((3, 4)))[0]) == 0


def test_restriction_keeps_values_and_refuses_what_is_outside() -> None:
    signal = signal_of([[1.0, 2.0, 5.0], [5.0, 0.0, 1.0], [1.0, 1.0, 4.0]])
    part = signal.restrict(0.2, 1.0)
    assert (part.start, part.end) == (0.2, 1.0)
    times = np.linspace(0.2, 1.0, 33)
    assert part.value(times) == pytest.approx(signal.value(times), abs=1e-12)
    with pytest.raises(ValueError, match="no part of"):
        signal.restrict(-0.5, 1.0)


def test_first_below_sees_crossings_jumps_and_absence() -> None:
    falling = Signal.through(np.array([0.0, 1.0, 2.0]), np.array([[4.0, 3.0, 2.0], [1.0, 0.5, 0.0]]), VOLT)
    assert falling.first_below(3.0) == pytest.approx(0.5)
    assert falling.first_below(1.5) == pytest.approx(1.0)
    assert falling.first_below(0.25) == pytest.approx(1.75)
    assert falling.first_below(5.0) == 0.0
    assert falling.first_below(-0.1) is None


def test_a_dip_inside_a_piece_is_seen() -> None:
    dip = Signal.through(np.array([0.0, 1.0]), np.array([[1.0, 0.0, 1.0]]), VOLT)
    # 4 (t - 1/2)^2 = 0.25 at t = 1/4 and 3/4.
    assert dip.first_below(0.25) == pytest.approx(0.25, abs=1e-13)
    assert dip.time_above(0.25) == pytest.approx(0.5, abs=1e-13)


def test_products_carry_dimensions_and_high_orders_are_interpolated() -> None:
    voltage = signal_of([[1.0, 1.2, 1.1], [1.1, 0.9, 1.0]])
    current = Signal(voltage.times, voltage.coefficients, AMPERE)
    assert (voltage * current).dimension == WATT
    assert (voltage / voltage).dimension == NONE
    high = voltage
    for _ in range(9):
        high = high * voltage
    assert high.coefficients.shape[1] <= MAX_ORDER + 1
    times, values = sampled(voltage, 33)
    assert high.value(times) == pytest.approx(values**10, rel=1e-8)


def test_quotients_and_roots_are_interpolated_to_the_stated_error() -> None:
    base = signal_of([[1.0, 2.0, 4.0], [3.0, 2.5, 1.0]])
    times, values = sampled(base, 33)
    assert (1.0 / base).value(times) == pytest.approx(1.0 / values, abs=1e-9)
    assert power(base, 0.5, VOLT).value(times) == pytest.approx(np.sqrt(values), abs=1e-9)
    from_zero = Signal.through(np.array([0.0, 1.0]), np.array([[0.0, 0.5, 1.0]]), VOLT)
    # The integral of sqrt(t) from 0 to 1 is 2/3; a square root has no polynomial at its zero.
    assert power(from_zero, 0.5, VOLT).integral() == pytest.approx(2.0 / 3.0, rel=1e-8)


def test_a_magnitude_has_a_root_although_rounding_leaves_it_below_zero() -> None:
    magnitude = abs(Signal.through(np.array([0.0, 1.0]), np.array([[-0.1, 0.2, 0.7]]), VOLT))
    below = magnitude - 1e-15
    assert below.lowest() < 0.0
    root = power(below, 0.5, VOLT)
    assert (root * root).integral() == pytest.approx(magnitude.integral(), rel=1e-8)


def test_division_by_zero_and_undefined_functions_are_said() -> None:
    through_zero = Signal.through(np.array([0.0, 1.0]), np.array([[-1.0, 0.1, 1.0]]), VOLT)
    with pytest.raises(SignalError, match="near t = "):
        1.0 / through_zero
    with pytest.raises(SignalError, match="not defined"):
        fitted(np.log, (through_zero,), NONE)
