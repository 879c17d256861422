"""Extrema inside a step in which a diode begins to conduct: the curve turns at an instant that no step ends at.

Piecewise polynomials are told from each other here, and nothing of signals or solutions.
"""

from __future__ import annotations

import numpy as np

from simcore.figures import polynomials
from simcore.figures.polynomials import Array

_JOINED = 1e-9
"""Share of the largest value by which neighbouring pieces may miss each other and still count as joined."""
_SHARPEST, _SMOOTHEST = 0.4, 0.75
"""Bounds of what tells the power of a turn, p / (p + 1): 1/2 where the slope jumps, 2/3 where its slope does."""
_POINTS = 65


def highest_turn(times: Array, rows: Array, rough: Array, best: float) -> float:
    """The highest value within rough pieces, or `best` where none is higher.

    Up to an instant inside such a piece the curve goes on as in the one before; from there b (t - t_0)^p adds to it. Of
    the three unknowns, p, b and t_0, the piece's end and its integral, both exact to the step, and the slope behind it
    tell. It counts where the curve is continuous, rises before and falls behind.
    times: breakpoints, shape (n + 1,); rows: coefficients, shape (n, order + 1); rough: which pieces hold a kink
    """
    inside = np.flatnonzero(rough[1:-1] & ~rough[:-2] & ~rough[2:]) + 1
    if len(inside) == 0:
        return best
    own, before, after = rows[inside], _before(times, rows, inside), rows[inside + 1]
    ratio = (times[inside + 1] - times[inside]) / (times[inside + 2] - times[inside + 1])
    low, high = np.full(len(inside), -1.0), np.full(len(inside), 1.0)
    slope = polynomials.values(polynomials.derivative(after), low) * ratio
    added = own - before
    end, area = polynomials.values(added, high), 2.0 * polynomials.means(added)
    bend = slope - polynomials.values(polynomials.derivative(before), high)
    with np.errstate(all="ignore"):
        share = bend * area / end**2
        power = share / (1.0 - share)
        length = area * (power + 1.0) / end
    slack = _JOINED * max(abs(best), float(np.max(np.abs(rows[:, 0]))))
    joined = np.abs(polynomials.values(added, low)) <= slack
    joined &= np.abs(polynomials.values(own, high) - polynomials.values(after, low)) <= slack
    turns = (share > _SHARPEST) & (share < _SMOOTHEST) & (length > 0.0) & (length <= 2.0)
    tops = (polynomials.values(polynomials.derivative(before), low) > 0.0) & (slope < 0.0)
    chosen = np.flatnonzero(joined & turns & tops)
    if len(chosen) == 0:
        return best
    local = np.linspace(-1.0, 1.0, _POINTS)
    past = np.maximum(local[None] - 1.0 + length[chosen, None], 0.0) / length[chosen, None]
    course = polynomials.values(before[chosen], np.tile(local, (len(chosen), 1)))
    course += end[chosen, None] * past ** power[chosen, None]
    return max(best, float(course.max()))


def _before(times: Array, rows: Array, inside: Array) -> Array:
    """The pieces before others, prolonged: as polynomials of the others' own s."""
    width = times[inside] - times[inside - 1]
    scale = (times[inside + 1] - times[inside]) / width
    offset = (times[inside + 1] - times[inside - 1]) / width
    return polynomials.substituted(rows[inside - 1], scale, offset)
