"""Extrema inside a step in which a curve turns: a falling line to which b (t - t_0)^p adds from an instant within the step on."""

from __future__ import annotations

import numpy as np
import pytest

from grammar.quantities import VOLT
from simcore.figures.signal import Signal

TIMES = np.array([0.0, 2.0, 3.0, 4.0])
TURN, FACTOR = 2.3, 3.0


def turning(power: float, rough: bool = True) -> Signal:
    """10 V - t, and the turn in the second step; of each step the ends, and the middle that gives the quadratic its integral."""

    def integral(start: float, end: float) -> float:
        added = [FACTOR * max(time - TURN, 0.0) ** (power + 1.0) / (power + 1.0) for time in (start, end)]
        return 10.0 * (end - start) - 0.5 * (end**2 - start**2) + added[1] - added[0]

    def value(time: float) -> float:
        return 10.0 - time + FACTOR * max(time - TURN, 0.0) ** power

    rows = []
    for start, end in zip(TIMES[:-1], TIMES[1:], strict=True):
        mean = integral(start, end) / (end - start)
        rows.append((value(start), 1.5 * mean - 0.25 * (value(start) + value(end)), value(end)))
    return Signal.through(TIMES, np.array(rows), VOLT, np.array([[2.0, 3.0]]) if rough else np.empty((0, 2)))


@pytest.mark.parametrize("power", [1.0, 2.0])
def test_the_lowest_point_lies_where_the_curve_turns(power: float) -> None:
    """A slope that jumps has it at the turn, a slope that bends a little later: where FACTOR p (t - t_0)^(p - 1) = 1."""
    later = 0.0 if power == 1.0 else 1.0 / (2.0 * FACTOR)
    lowest = 10.0 - TURN - later + FACTOR * later**power
    for signal, found in ((turning(power), turning(power).lowest()), (-turning(power), -(-turning(power)).highest())):
        assert found == pytest.approx(lowest, abs=2e-2), signal
    ends = min(float(value.min()) for value in turning(power).piece_ends)
    assert ends - lowest > 0.1


def test_a_turn_is_sought_only_where_a_kink_is_told_and_the_curve_goes_on() -> None:
    smooth = turning(1.0, rough=False)
    assert smooth.lowest() != turning(1.0).lowest()
    torn = Signal(TIMES, turning(1.0).coefficients + np.array([[0.0], [1.0], [0.0]]) * np.eye(1, 3), VOLT, np.array([[2.0, 3.0]]))
    assert torn.lowest() == min(float(value.min()) for value in torn.piece_ends)
