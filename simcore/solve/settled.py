"""The settled study: one period of the state that a circuit comes to for good.

Knows the course that asks for it and how a periodic state is found.
"""

from __future__ import annotations

import math

from grammar.quantities import SECOND, show
from simcore.components.frame import CurrentBranch, Frame, NonlinearBranch
from simcore.design.circuit import Change
from simcore.solve.course import Course, Reached
from simcore.solve.failure import NoSolution, Reason
from simcore.solve.settle import settle
from simcore.solve.solution import Solution
from simcore.solve.sources import MOST_PERIODS, common_period

_WHOLE = 1e-6
"""How far a period that is asked for may be off whole periods of the sources."""


def solve(course: Course, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
    """The settled period under changes. Raises NoSolution."""
    circuit = course.variant(changes)
    frame = course.frame(circuit, math.inf)
    period = _settling_period(course, frame, changes)
    memory = dict(course.before.memory) if course.before else {}
    engine = course.engine(circuit, frame, memory)
    clock = course.asked_clock(changes, math.inf)
    stepping = course.stepping(frame, period)
    slope = course.before.slopes.get(course.study.name) if course.before else None
    found = course.guard(lambda: settle(engine, clock, period, stepping, slope), clock)
    course.told += engine.flags.told
    engine.remember(memory)
    solution = course.solution(course.valued(changes, found.stretches), found.stretches, clock, period, period)
    solution.notes.append(found.how)
    solution.multiplier = found.multiplier
    solution.statistics |= {"periods": found.periods, "periods with derivatives": found.responding}
    slopes = {} if found.slope is None else {course.study.name: found.slope}
    return solution, Reached(memory, clock, math.inf, changes, slopes=slopes)


def _settling_period(course: Course, frame: Frame, changes: tuple[Change, ...]) -> float:
    """The period to settle to, s: the one that is asked for, which must be whole periods of the sources, else
    theirs."""
    asked, common = course.study.period, common_period(frame)
    if asked is None and common is None:
        raise NoSolution(course.study.name, Reason.NO_PERIOD, detail=_without_period(frame, changes))
    if asked is not None and common is not None:
        whole = round(asked / common)
        if whole < 1 or abs(asked / common - whole) > _WHOLE:
            detail = f"{show(asked, SECOND)} is asked for, and they repeat every {show(common, SECOND)}"
            raise NoSolution(course.study.name, Reason.NOT_WHOLE, detail=detail)
    period = asked or common
    assert period is not None
    return period


def _without_period(frame: Frame, changes: tuple[Change, ...]) -> str:
    """Why a circuit has no period, in words that name its sources, or where it has none what was done to it."""
    branches = [branch for branch in frame.branches if not isinstance(branch, NonlinearBranch)]
    given = [branch.current if isinstance(branch, CurrentBranch) else branch.source for branch in branches]
    names = {branch.element: None for branch, value in zip(branches, given, strict=True) if value.constant != 0.0}
    if frame.sines or any(waveform.period is not None for waveform in frame.waveforms):
        return f"none within {MOST_PERIODS} periods of the slowest of {', '.join(names)}"
    if names:
        return f"none of them repeats: {', '.join(names)}"
    done = ", ".join(f"{change.verb} {change.target}" for change in changes)
    return f"none is left after {done}" if done else "there is none"
