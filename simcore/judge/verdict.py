"""Requirements held against figures with error bounds: it holds, it fails, or the bound leaves it undecided.

It reads the records of solved studies, and knows neither files nor how studies are solved.
"""

from __future__ import annotations

from collections.abc import Iterable

from simcore.design.accessible import DischargeTable
from simcore.design.circuit import Circuit, Requirement
from simcore.figures.evaluate import Records, figure_of
from simcore.judge.discharge import judge_discharge
from simcore.judge.harmonics import judge_harmonics
from simcore.judge.held import Pair, Verdict, rank, side
from simcore.judge.ratings import judge_ratings, spread_ratings

__all__ = ["Verdict", "judge", "judge_one", "spread"]


def judge(requirements: Iterable[Requirement], coarse: Records, fine: Records) -> list[Verdict]:
    """The verdicts on requirements, in the same order: one each, of `ratings` one a rating.

    coarse, fine: the solved studies at a tolerance and at a tighter one; a study that is missing leaves what needs it
    undecided
    """
    found: list[Verdict] = []
    for requirement in requirements:
        if requirement.relation == "ratings":
            found += judge_ratings(requirement, coarse, fine)
        elif requirement.relation == "within":
            discharges = isinstance(requirement.limits, DischargeTable)
            found.append((judge_discharge if discharges else judge_harmonics)(requirement, coarse, fine))
        else:
            found.append(judge_one(requirement, coarse, fine))
    return found


def spread(circuit: Circuit, requirements: Iterable[Requirement]) -> list[Requirement]:
    """Requirements as they are judged, one for each verdict that `judge` makes of them, in the same order."""
    found: list[Requirement] = []
    for requirement in requirements:
        found += spread_ratings(circuit, requirement) if requirement.relation == "ratings" else [requirement]
    return found


def judge_one(requirement: Requirement, coarse: Records, fine: Records) -> Verdict:
    """Hold the figure of a requirement against its limit or limits."""
    study = requirement.study
    figure, limit, upper = (
        None if part is None else Pair(figure_of(part, study, coarse), figure_of(part, study, fine))
        for part in (requirement.figure, requirement.bound, requirement.upper)
    )
    if figure is None or limit is None:
        raise ValueError(f"a requirement `{requirement.relation}` needs a figure and a bound")
    sides = _sides(requirement.relation, figure, limit, upper)
    judged = [side(figure, side_limit, sign, strict) for side_limit, sign, strict in sides]
    state, margin, reason = min(judged, key=rank)
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


def _sides(relation: str, figure: Pair, limit: Pair, upper: Pair | None) -> list[tuple[Pair, float, bool]]:
    """The limits to keep, each with +1 if the figure may not be above it, -1 if not below, and whether it is strict."""
    if relation == "between":
        if upper is None:
            raise ValueError("`between` needs two bounds")
        return [(limit, -1.0, False), (upper, 1.0, False)]
    return [(limit, 1.0 if relation in ("<=", "<") else -1.0, relation in ("<", ">"))]
