"""Requirements held against figures with error bounds: it holds, it fails, or the bound leaves it undecided.

It reads the records of solved studies, and knows neither files nor how studies are solved.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

from simcore.design.circuit import Requirement
from simcore.figures.evaluate import Records, figure_of
from simcore.figures.figure import Figure, bounded
from simcore.judge.outcome import State

NOT_AVAILABLE = {
    "ratings": "ratings are not available in this version",
    "within": "tables of harmonic limits are not available in this version",
}


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
class _Pair:
    """A figure on the coarse and on the fine solution."""

    coarse: Figure
    fine: Figure

    @property
    def bounded(self) -> Figure:
        return bounded(self.coarse, self.fine)

    def minus(self, other: _Pair) -> Figure:
        """The difference with its own bound: errors that both sides share cancel."""
        return bounded(self.coarse - other.coarse, self.fine - other.fine)


def judge(requirements: Iterable[Requirement], coarse: Records, fine: Records) -> list[Verdict]:
    """One verdict a requirement, in the same order.

    coarse, fine: the solved studies at a tolerance and at a tighter one; a study that is missing leaves what needs it
    undecided
    """
    return [judge_one(requirement, coarse, fine) for requirement in requirements]


def judge_one(requirement: Requirement, coarse: Records, fine: Records) -> Verdict:
    """Hold one requirement against its figure."""
    if requirement.relation in NOT_AVAILABLE:
        return Verdict(requirement, State.NOT_JUDGED, reason=NOT_AVAILABLE[requirement.relation])
    study = requirement.study
    figure, limit, upper = (
        None if part is None else _Pair(figure_of(part, study, coarse), figure_of(part, study, fine))
        for part in (requirement.figure, requirement.bound, requirement.upper)
    )
    if figure is None or limit is None:
        raise ValueError(f"a requirement `{requirement.relation}` needs a figure and a bound")
    sides = _sides(requirement.relation, figure, limit, upper)
    judged = [_side(figure, side_limit, sign, strict) for side_limit, sign, strict in sides]
    state, margin, reason = min(judged, key=_rank)
    notes = dict.fromkeys(text for text in (reason, figure.fine.note) if text)
    return Verdict(
        requirement,
        state,
        figure.bounded,
        limit.bounded,
        None if upper is None else upper.bounded,
        margin,
        "; ".join(notes),
    )


def _sides(relation: str, figure: _Pair, limit: _Pair, upper: _Pair | None) -> list[tuple[_Pair, float, bool]]:
    """The limits to keep, each with +1 if the figure may not be above it, -1 if not below, and whether it is strict."""
    if relation == "between":
        if upper is None:
            raise ValueError("`between` needs two bounds")
        return [(limit, -1.0, False), (upper, 1.0, False)]
    return [(limit, 1.0 if relation in ("<=", "<") else -1.0, relation in ("<", ">"))]


def _side(figure: _Pair, limit: _Pair, sign: float, strict: bool) -> tuple[State, Figure | None, str]:
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


def _side_of_an_instant_that_does_not_come(
    figure: _Pair, limit: _Pair, sign: float
) -> tuple[State, Figure | None, str]:
    """It is later than what the study saw: enough to be late enough, enough to be too late, or too little to tell."""
    seen = [part.beyond for part in (figure.fine, figure.coarse) if part.beyond is not None]
    if len(seen) < 2:
        return State.UNDECIDED, None, "it comes in one of two solutions only"
    if min(seen) >= max(limit.fine.value, limit.coarse.value):
        return (State.FAILS if sign > 0.0 else State.HOLDS), None, ""
    return State.UNDECIDED, None, "the study ends before the limit: make its duration longer"


_ORDER = (State.FAILS, State.UNDECIDED, State.HOLDS)


def _rank(judged: tuple[State, Figure | None, str]) -> tuple[int, float]:
    """The side that decides: the worse state, then the smaller margin."""
    state, margin, _ = judged
    return _ORDER.index(state), math.inf if margin is None else margin.value
