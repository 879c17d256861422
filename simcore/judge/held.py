"""One figure held against one limit, each with its error bound: it holds, it fails, or the bounds leave it undecided.

It knows neither where figures come from nor what they are compared with.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from simcore.design.circuit import Requirement
from simcore.figures.figure import Figure, bounded
from simcore.figures.record import Record
from simcore.judge.outcome import State


@dataclass(frozen=True)
class Verdict:
    """What one requirement came to.

    figure, limit, upper: with their bounds; upper only for `between`, all None where nothing was judged
    margin: distance to the nearer limit, positive where the figure is on the right side, with the bound that decides
    reason: why it is not decided, or what a reader must know; "" where there is nothing
    """

    requirement: Requirement
    state: State
    figure: Figure | None = None
    limit: Figure | None = None
    upper: Figure | None = None
    margin: Figure | None = None
    reason: str = ""


@dataclass(frozen=True)
class Pair:
    """A figure on the coarse and on the fine solution."""

    coarse: Figure
    fine: Figure

    @property
    def bounded(self) -> Figure:
        return bounded(self.coarse, self.fine)

    def minus(self, other: Pair) -> Figure:
        """The difference with its own bound: errors that both sides share cancel."""
        return bounded(self.coarse - other.coarse, self.fine - other.fine)

    @classmethod
    def of(cls, figure: Callable[[Record], Figure], coarse: Record, fine: Record) -> Pair:
        """A figure taken of both."""
        return cls(figure(coarse), figure(fine))

    @classmethod
    def exact(cls, figure: Figure) -> Pair:
        """A number that is not solved for."""
        return cls(figure, figure)


def side(figure: Pair, limit: Pair, sign: float, strict: bool) -> tuple[State, Figure | None, str]:
    """Judge one limit."""
    for part in (figure.fine, figure.coarse, limit.fine, limit.coarse):
        if not part.defined:
            return State.UNDECIDED, None, part.note
    if figure.fine.dimension != limit.fine.dimension:
        return State.UNDECIDED, None, "the figure and its limit have different units"
    if not all(math.isfinite(part.value) for part in (figure.fine, figure.coarse)):
        return _side_of_an_instant_that_does_not_come(figure, limit, sign)
    if not all(math.isfinite(part.value) for part in (limit.fine, limit.coarse)):
        return State.UNDECIDED, None, "the limit is an instant that does not come"
    margin = limit.minus(figure) if sign > 0.0 else figure.minus(limit)
    bound = margin.bound or 0.0
    least, most = margin.value - bound, margin.value + bound
    if least > 0.0 or (least == 0.0 and not strict):
        return State.HOLDS, margin, ""
    if most < 0.0 or (most == 0.0 and strict):
        return State.FAILS, margin, ""
    return State.UNDECIDED, margin, "the error bound of the figure reaches across the limit"


def _side_of_an_instant_that_does_not_come(figure: Pair, limit: Pair, sign: float) -> tuple[State, Figure | None, str]:
    """It is later than what the study saw: enough to be late enough, enough to be too late, or too little to tell."""
    seen = [part.beyond for part in (figure.fine, figure.coarse) if part.beyond is not None]
    if len(seen) < 2:
        return State.UNDECIDED, None, "it comes in one of two solutions only"
    if min(seen) >= max(limit.fine.value, limit.coarse.value):
        return (State.FAILS if sign > 0.0 else State.HOLDS), None, ""
    return State.UNDECIDED, None, "the study ends before the limit: make its duration longer"


ORDER = (State.FAILS, State.UNDECIDED, State.HOLDS)
"""From the worst on."""


def rank(judged: tuple[State, Figure | None, str]) -> tuple[int, float]:
    """The side that decides: the worse state, then the smaller margin."""
    state, margin, _ = judged
    return ORDER.index(state), math.inf if margin is None else margin.value
