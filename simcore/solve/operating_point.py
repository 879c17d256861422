"""The operating point: every source at its value at t = 0, everything at rest.

Knows the course that asks for it and how a state of rest is found.
"""

from __future__ import annotations

from simcore.design.circuit import Change
from simcore.solve.course import Course, Reached
from simcore.solve.engine import Memory
from simcore.solve.rest import rest
from simcore.solve.solution import Solution


def solve(course: Course, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
    """The state of rest under changes."""
    circuit = course.variant(changes)
    frame = course.frame(circuit, 0.0)
    engine = course.engine(circuit, frame, {})
    clock = course.asked_clock(changes, 0.0)
    stretch = course.guard(lambda: rest(engine, clock), clock)
    course.told += engine.flags.told
    memory: Memory = {}
    engine.remember(memory)
    valued = course.valued(changes, [stretch])
    return course.solution(valued, [stretch], clock, None, 1.0), Reached(memory, clock, 0.0, changes)
