"""Ripples weighed by frequency and surges by width and number, against closed forms of sums of sines and half sines."""

import math

import numpy as np
import pytest

from grammar.quantities import AMPERE
from simcore.figures.signal import Signal
from simcore.figures.weighted import SHORTEST, weighted_ripple, weighted_surge

F = 50.0
FACTORS = [(100.0, 1.0), (1000.0, 1.3), (10000.0, 1.4)]


def signal(function, span: float, count: int = 1000) -> Signal:
    """A function as quadratics through the ends and the middle of many steps."""
    times = np.linspace(0.0, span, count + 1)
    points = np.stack([times[:-1], 0.5 * (times[:-1] + times[1:]), times[1:]], axis=1)
    return Signal.through(times, np.vectorize(function)(points), AMPERE, np.zeros((0, 2)))


def test_each_harmonic_counts_by_its_own_factor() -> None:
    """1 A of 100 Hz, 2 A of 1 kHz (crests), and a mean that is no ripple: the factor between points is that of the
    logarithm; by hand, rms squared is half the crest squared."""
    current = signal(lambda t: 5.0 + math.sin(2e2 * math.pi * t) + 2.0 * math.sin(2e3 * math.pi * t), 1.0 / F)
    by_hand = math.sqrt(0.5 * (1.0 + (2.0 / 1.3) ** 2))
    assert weighted_ripple(current, F, FACTORS, 100.0) == pytest.approx(by_hand, rel=1e-5)
    # The same rating stated at 1 kHz is one of a current 1.3 times as large.
    assert weighted_ripple(current, F, FACTORS, 1000.0) == pytest.approx(1.3 * by_hand, rel=1e-5)
    between = signal(lambda t: math.sin(2.0 * math.pi * 300.0 * t), 1.0 / F)
    factor = 1.0 + 0.3 * math.log10(3.0)
    assert weighted_ripple(between, F, FACTORS, None) == pytest.approx(math.sqrt(0.5) / factor, rel=1e-5)


def test_what_is_above_the_orders_and_what_has_no_period_counts_with_the_least_factor() -> None:
    fast = signal(lambda t: math.sin(2.0 * math.pi * 20e3 * t), 1.0 / F, 4000)
    assert weighted_ripple(fast, F, [(100.0, 1.0), (1000.0, 2.0), (20e3, 1.5)], None) == pytest.approx(
        math.sqrt(0.5) / 1.5, rel=1e-3
    )
    assert weighted_ripple(fast, None, FACTORS, None) == pytest.approx(math.sqrt(0.5), rel=1e-3)


def half_sines(crests: list[float], width: float, period: float = 20e-3) -> Signal:
    def at(t: float) -> float:
        number, local = divmod(t, period)
        crest = crests[int(number)] if number < len(crests) else 0.0
        return crest * math.sin(math.pi * local / width) if local < width else 0.0

    return signal(at, period * len(crests), 2000 * len(crests))


def test_a_surge_counts_by_its_width() -> None:
    """The i2t of a half sine is half its crest squared times its width: that of the rating's width is as hard."""
    for width in (2e-3, 10e-3, 15e-3):
        pulse = half_sines([100.0], width)
        expected = 100.0 * math.sqrt(width / 10e-3)
        assert weighted_surge(pulse, 10e-3, 120.0, (), False) == pytest.approx(expected, rel=2e-3)
    spike = half_sines([100.0], 0.1e-3)
    assert weighted_surge(spike, 10e-3, 120.0, (), False) == pytest.approx(100.0 * math.sqrt(SHORTEST / 10e-3), rel=2e-2)
    assert weighted_surge(signal(lambda t: -1.0, 20e-3, 10), 10e-3, 120.0, (), False) == 0.0


def test_a_run_of_half_cycles_counts_by_what_so_many_may_have() -> None:
    """100 A stood once, 50 A four times in a row, so by the logarithms 2^-1/2 times 100 A twice."""
    cycles = [(4.0, 50.0)]
    pair = half_sines([80.0, 80.0], 10e-3)
    assert weighted_surge(pair, 10e-3, 100.0, cycles, False) == pytest.approx(80.0 * math.sqrt(2.0), rel=2e-3)
    falling = half_sines([80.0, 40.0, 40.0, 40.0], 10e-3)
    four = math.sqrt((80.0**2 + 3.0 * 40.0**2) / 4.0) * 2.0
    two = math.sqrt((80.0**2 + 40.0**2) / 2.0) * math.sqrt(2.0)
    assert weighted_surge(falling, 10e-3, 100.0, cycles, False) == pytest.approx(max(four, two, 80.0), rel=2e-3)
    # No curve, or a current that goes on for ever: the hardest pulse alone.
    assert weighted_surge(falling, 10e-3, 100.0, (), False) == pytest.approx(80.0, rel=2e-3)
    assert weighted_surge(falling, 10e-3, 100.0, cycles, True) == pytest.approx(80.0, rel=2e-3)
