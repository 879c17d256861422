"""A signal as a piecewise polynomial of time, with exact arithmetic, integrals and extrema.

It must not know circuits, solutions or the language: only times, coefficients and a dimension. Where a result is no
polynomial (a quotient, a square root) it is interpolated, and the pieces are halved until that is good to FIT_ERROR.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from grammar.quantities import NONE, SECOND, Dimension
from simcore.figures import polynomials
from simcore.figures.corners import highest_turn
from simcore.figures.polynomials import Array

MAX_ORDER = 16
"""Products above this order are interpolated at it."""

FIT_ORDER = 8
FIT_ERROR = 1e-11
FIT_HALVINGS = 40


_NOWHERE: Array = np.empty((0, 2))


class SignalError(Exception):
    """A signal cannot be formed; the text says why in the trade's words."""


@dataclass(frozen=True, eq=False)
class Signal:
    """A piecewise polynomial of time; it may jump between pieces.

    times: breakpoints in s, rising, shape (n + 1,)
    coefficients: shape (n, order + 1), ascending powers of s = (2 t - t_k - t_k+1) / (t_k+1 - t_k), -1 to 1 in piece k;
                  in the SI unit of the dimension
    dimension: of the values
    rough: spans in s, shape (m, 2), with a kink or jump inside: what a piece there reaches between its ends is no
    extremum
    """

    times: Array
    coefficients: Array
    dimension: Dimension
    rough: Array = field(default_factory=lambda: _NOWHERE)

    def __post_init__(self) -> None:
        if self.coefficients.ndim != 2 or len(self.times) != len(self.coefficients) + 1 or len(self.times) < 2:
            raise ValueError("a signal needs one row of coefficients for each of its pieces, and one piece at least")
        if not np.all(np.diff(self.times) > 0.0):
            raise ValueError("the breakpoints of a signal rise")
        if not np.all(np.isfinite(self.coefficients)):
            raise ValueError("the values of a signal are finite")

    @classmethod
    def through(cls, times: Array, values: Array, dimension: Dimension, rough: Array = _NOWHERE) -> Signal:
        """The signal through values at evenly spaced points of each piece, ends included.

        times: shape (n + 1,), s; values: shape (n, 3), at start, middle and end, in the SI unit; rough: see Signal
        """
        start, middle, end = np.asarray(values, dtype=float).T
        rows = np.stack([middle, 0.5 * (end - start), 0.5 * (start + end) - middle], axis=1)
        return cls(np.asarray(times, dtype=float), rows, dimension, rough)

    @classmethod
    def constant(cls, times: Array, value: float, dimension: Dimension) -> Signal:
        """The same value over the whole span of times."""
        ends = np.array([times[0], times[-1]], dtype=float)
        return cls(ends, np.array([[float(value)]]), dimension)

    # --- what it is ------------------------------------------------------------------------------------------------

    @property
    def start(self) -> float:
        """First instant, s."""
        return float(self.times[0])

    @property
    def end(self) -> float:
        """Last instant, s."""
        return float(self.times[-1])

    @property
    def span(self) -> float:
        """Length in s."""
        return self.end - self.start

    @cached_property
    def widths(self) -> Array:
        """Length of each piece in s, shape (n,)."""
        return np.diff(self.times)

    @cached_property
    def piece_ends(self) -> tuple[Array, Array]:
        """Values at the start and at the end of each piece, shape (n,) both."""
        even = self.coefficients[:, 0::2].sum(axis=1)
        odd = self.coefficients[:, 1::2].sum(axis=1)
        return even - odd, even + odd

    def value(self, time: Array | float) -> Array:
        """Values at times in s, any shape; at a jump the value after it. Outside the span: ValueError."""
        asked = np.asarray(time, dtype=float)
        flat = np.atleast_1d(asked).ravel()
        if flat.size and (flat.min() < self.start or flat.max() > self.end):
            raise ValueError(f"the signal runs from {self.start!r} s to {self.end!r} s")
        piece = np.clip(np.searchsorted(self.times, flat, side="right") - 1, 0, len(self.widths) - 1)
        local = 2.0 * (flat - self.times[piece]) / self.widths[piece] - 1.0
        return polynomials.values(self.coefficients[piece], local).reshape(asked.shape)

    # --- arithmetic ------------------------------------------------------------------------------------------------

    def on(self, times: Array) -> Signal:
        """The same signal on other breakpoints, which hold all of its own within their span."""
        if len(times) == len(self.times) and np.array_equal(times, self.times):
            return self
        middle = 0.5 * (times[1:] + times[:-1])
        piece = np.clip(np.searchsorted(self.times, middle, side="right") - 1, 0, len(self.widths) - 1)
        width = self.widths[piece]
        scale = np.diff(times) / width
        offset = (2.0 * middle - self.times[piece] - self.times[piece + 1]) / width
        rows = polynomials.substituted(self.coefficients[piece], scale, offset)
        return Signal(times, rows, self.dimension, self.rough)

    def restrict(self, start: float, end: float) -> Signal:
        """The part from start to end in s; both within the span up to rounding, else ValueError."""
        slack = 1e-9 * self.span
        if start < self.start - slack or end > self.end + slack or not start < end:
            raise ValueError(f"{start!r} s to {end!r} s is no part of {self.start!r} s to {self.end!r} s")
        start, end = max(start, self.start), min(end, self.end)
        inside = self.times[(self.times > start) & (self.times < end)]
        return self.on(np.concatenate([[start], inside, [end]]))

    def __neg__(self) -> Signal:
        return Signal(self.times, -self.coefficients, self.dimension, self.rough)

    def __add__(self, other: Signal | float) -> Signal:
        if not isinstance(other, Signal):
            rows = self.coefficients.copy()
            rows[:, 0] += other
            return Signal(self.times, rows, self.dimension, self.rough)
        left, right = aligned(self, other)
        columns = max(left.coefficients.shape[1], right.coefficients.shape[1])
        rows = polynomials.padded(left.coefficients, columns) + polynomials.padded(right.coefficients, columns)
        return Signal(left.times, rows, self.dimension, _either(left, right))

    def __radd__(self, other: float) -> Signal:
        return self + other

    def __sub__(self, other: Signal | float) -> Signal:
        return self + (-other)

    def __rsub__(self, other: float) -> Signal:
        return -self + other

    def __mul__(self, other: Signal | float) -> Signal:
        if not isinstance(other, Signal):
            return Signal(self.times, self.coefficients * other, self.dimension, self.rough)
        left, right = aligned(self, other)
        dimension = self.dimension * other.dimension
        if left.coefficients.shape[1] + right.coefficients.shape[1] - 2 > MAX_ORDER:
            return fitted(lambda a, b: a * b, (left, right), dimension, MAX_ORDER)
        rows = polynomials.product(left.coefficients, right.coefficients)
        return Signal(left.times, rows, dimension, _either(left, right))

    def __rmul__(self, other: float) -> Signal:
        return self * other

    def __truediv__(self, other: Signal | float) -> Signal:
        if isinstance(other, Signal) and other.coefficients.size == 1:
            if other.coefficients[0, 0] == 0.0:
                raise SignalError("it divides by zero")
            return self.scaled(1.0 / float(other.coefficients[0, 0]), self.dimension / other.dimension)
        if isinstance(other, Signal):
            return fitted(lambda a, b: a / b, aligned(self, other), self.dimension / other.dimension)
        return Signal(self.times, self.coefficients / other, self.dimension, self.rough)

    def __rtruediv__(self, other: float) -> Signal:
        return fitted(lambda a: other / a, (self,), NONE / self.dimension)

    def __abs__(self) -> Signal:
        """Pieces are cut at their roots, so that the result is exact."""
        return self._signed(self._cut_at_zeros())

    def scaled(self, factor: float, dimension: Dimension) -> Signal:
        """The signal times a number that has a unit; dimension is that of the result."""
        return Signal(self.times, self.coefficients * factor, dimension, self.rough)

    def _cut_at_zeros(self) -> Signal:
        piece, local = polynomials.roots(self.coefficients)
        zeros = self.times[piece] + 0.5 * (local + 1.0) * self.widths[piece]
        return self.on(np.union1d(self.times, zeros))

    @staticmethod
    def _signed(cut: Signal) -> Signal:
        sign = np.where(polynomials.means(cut.coefficients) < 0.0, -1.0, 1.0)
        return Signal(cut.times, cut.coefficients * sign[:, None], cut.dimension, cut.rough)

    # --- integrals and extrema -------------------------------------------------------------------------------------

    def integral(self) -> float:
        """Definite integral over the span, in the unit times s; exact up to rounding."""
        return float(np.sum(self.widths * polynomials.means(self.coefficients)))

    def running(self) -> Signal:
        """The integral from the start to each instant, in the unit times s; exact up to rounding."""
        powers = np.arange(1.0, self.coefficients.shape[1] + 1.0)
        rows = np.zeros((len(self.widths), len(powers) + 1))
        rows[:, 1:] = 0.5 * self.widths[:, None] * self.coefficients / powers
        before = np.concatenate([[0.0], np.cumsum(self.widths * polynomials.means(self.coefficients))[:-1]])
        rows[:, 0] = before - (rows[:, 1:] * (-1.0) ** powers).sum(axis=1)
        return Signal(self.times, rows, self.dimension * SECOND)

    def inner(self, other: Signal) -> float:
        """Integral of the product of both over the span, in both units times s; exact whatever the orders."""
        left, right = aligned(self, other)
        return float(np.sum(left.widths * polynomials.product_means(left.coefficients, right.coefficients)))

    def highest(self) -> float:
        """The largest value."""
        return self._highest

    def lowest(self) -> float:
        """The smallest value."""
        return -self._negated.highest()

    @cached_property
    def _negated(self) -> Signal:
        return -self

    @cached_property
    def _highest(self) -> float:
        """Only pieces whose Bernstein form leaves room for more than the ends show are searched."""
        start, end = self.piece_ends
        best, smooth = max(float(start.max()), float(end.max())), self._smooth_pieces()
        rows = self.coefficients[(polynomials.bernstein(self.coefficients).max(axis=1) > best) & smooth]
        piece, local = polynomials.roots(polynomials.derivative(rows))
        best = max(best, float(polynomials.values(rows[piece], local).max(initial=best)))
        return highest_turn(self.times, self.coefficients, ~smooth, best)

    def _smooth_pieces(self) -> Array:
        """Which pieces lie in no rough span, shape (n,)."""
        if len(self.rough) == 0:
            return np.ones(len(self.widths), dtype=bool)
        middle = 0.5 * (self.times[1:] + self.times[:-1])
        before = np.searchsorted(self.rough[:, 0], middle, side="right") - 1
        return (before < 0) | (middle > self.rough[np.maximum(before, 0), 1])

    def largest_magnitude(self) -> float:
        """The largest absolute value."""
        return max(self.highest(), -self.lowest())

    def first_below(self, level: float) -> float | None:
        """The first instant in s at which the signal is at or below a level; None where that does not come."""
        distance = self - level
        reach = np.flatnonzero(polynomials.bernstein(distance.coefficients).min(axis=1) <= 0.0)
        if len(reach) == 0:
            return None
        start, end = (values[reach] for values in distance.piece_ends)
        piece, local = polynomials.roots(distance.coefficients[reach])
        zeros = self.times[reach[piece]] + 0.5 * (local + 1.0) * self.widths[reach[piece]]
        hits = [self.times[reach[start <= 0.0]], self.times[reach[end <= 0.0] + 1], zeros]
        found = np.concatenate(hits)
        return float(found.min()) if len(found) else None

    def spans_above(self, level: float) -> Array:
        """Start and end in s of each span in which the signal is above a level, in order, shape (m, 2)."""
        cut = (self - level)._cut_at_zeros()
        above = np.concatenate([[False], polynomials.means(cut.coefficients) > 0.0, [False]])
        starts, ends = np.flatnonzero(above[1:] & ~above[:-1]), np.flatnonzero(above[:-1] & ~above[1:])
        return np.stack([cut.times[starts], cut.times[ends]], axis=1)

    def time_above(self, level: float) -> float:
        """How long in s the signal is above a level, all in all."""
        return float(np.sum(np.diff(self.spans_above(level))))


def _either(left: Signal, right: Signal) -> Array:
    """The rough spans of a result of both: signals of one solution share theirs, constants have none."""
    return left.rough if len(left.rough) >= len(right.rough) else right.rough


def aligned(left: Signal, right: Signal) -> tuple[Signal, Signal]:
    """Both on the breakpoints of both, over the span they share; ValueError where they share none."""
    if left.times is right.times or np.array_equal(left.times, right.times):
        return left, right
    start, end = max(left.start, right.start), min(left.end, right.end)
    if not start < end:
        raise ValueError("two signals that share no time")
    times = np.union1d(left.times, right.times)
    times = times[(times >= start) & (times <= end)]
    return left.on(times), right.on(times)


def smaller(left: Signal, right: Signal) -> Signal:
    """At each instant the smaller of both; exact."""
    return -larger(-left, -right)


def larger(left: Signal, right: Signal) -> Signal:
    """At each instant the larger of both; exact: pieces are cut where the two cross."""
    difference = (left - right)._cut_at_zeros()
    first, second = left.on(difference.times), right.on(difference.times)
    columns = max(first.coefficients.shape[1], second.coefficients.shape[1])
    take = polynomials.means(difference.coefficients)[:, None] >= 0.0
    rows = np.where(
        take, polynomials.padded(first.coefficients, columns), polynomials.padded(second.coefficients, columns)
    )
    return Signal(difference.times, rows, left.dimension, _either(left, right))


def power(base: Signal, exponent: float, dimension: Dimension) -> Signal:
    """base to a constant exponent: exact for small whole ones, else interpolated.

    What lies below zero by rounding only counts as zero, so that a magnitude has a root.
    """
    if exponent in (1.0, 2.0, 3.0, 4.0):
        result = base
        for _ in range(int(exponent) - 1):
            result = result * base
        return result
    if exponent == round(exponent):
        return fitted(lambda a: a**exponent, (base,), dimension)
    rounding = 1e-12 * base.largest_magnitude()
    return fitted(lambda a: np.where((a < 0.0) & (a > -rounding), 0.0, a) ** exponent, (base,), dimension)


def fitted(
    function: Callable[..., Array], signals: tuple[Signal, ...], dimension: Dimension, order: int = FIT_ORDER
) -> Signal:
    """Any function of signals with equal breakpoints, interpolated at Chebyshev points of each piece.

    Error: at points between, weighted by a piece's share of the span, it is at most FIT_ERROR of the mean magnitude;
    pieces are halved until that holds. SignalError where it cannot be reached: the function has a pole or is undefined.
    """
    nodes = polynomials.lobatto_points(order)
    between = 0.5 * (nodes[1:] + nodes[:-1])
    span = signals[0].span
    scale: float | None = None
    done_starts, done_rows = [], []
    edges = np.stack([signals[0].times[:-1], signals[0].times[1:]])
    rows = [signal.coefficients for signal in signals]
    for _ in range(FIT_HALVINGS):
        with np.errstate(all="ignore"):
            samples, checks = (
                function(*(polynomials.values(row, np.tile(points, (len(row), 1))) for row in rows))
                for points in (nodes, between)
            )
            candidate = polynomials.through(samples)
            error = np.abs(polynomials.values(candidate, np.tile(between, (len(candidate), 1))) - checks).max(axis=1)
        if scale is None:
            finite = np.abs(samples[np.isfinite(samples)])
            scale = float(finite.mean()) if finite.size else 0.0
        good = error * (edges[1] - edges[0]) <= FIT_ERROR * scale * span
        done_starts.append(edges[0][good])
        done_rows.append(candidate[good])
        if good.all():
            rough = max((signal.rough for signal in signals), key=len)
            return _joined(signals[0].end, np.concatenate(done_starts), np.concatenate(done_rows), dimension, rough)
        bad = ~good
        edges, rows = edges[:, bad], [row[bad] for row in rows]
        middle = 0.5 * (edges[0] + edges[1])
        hopeless = ~np.isfinite(samples[bad]).any(axis=1) | (middle <= edges[0]) | (middle >= edges[1])
        if hopeless.any():
            edges = edges[:, hopeless]
            break
        edges, rows = _halved(edges, rows, middle)
    raise SignalError(f"grows without bound or is not defined near t = {edges[0][0]:.6g} s")


def _halved(edges: Array, rows: list[Array], middle: Array) -> tuple[Array, list[Array]]:
    half = np.full(edges.shape[1], 0.5)
    new_edges = np.stack([np.concatenate([edges[0], middle]), np.concatenate([middle, edges[1]])])
    new_rows = [
        np.concatenate([polynomials.substituted(row, half, -half), polynomials.substituted(row, half, half)])
        for row in rows
    ]
    return new_edges, new_rows


def _joined(end: float, starts: Array, rows: Array, dimension: Dimension, rough: Array) -> Signal:
    order = np.argsort(starts)
    return Signal(np.append(starts[order], end), rows[order], dimension, rough)
