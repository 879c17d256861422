"""The transient study: a course in time in pieces, cut where an event or an element's own instant changes the circuit.

Knows the course that asks for it.
"""

from __future__ import annotations

from simcore.components.build import instants
from simcore.components.frame import Frame
from simcore.design.circuit import Change, Circuit
from simcore.solve.course import Course, Reached
from simcore.solve.engine import Memory
from simcore.solve.solution import Solution
from simcore.solve.sources import common_period
from simcore.solve.stretch import Stretch


def solve(course: Course, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
    """The course in time, from changes that hold at its start. Raises NoSolution."""
    assert course.study.duration is not None
    memory = dict(course.before.memory) if course.before else {}
    moment = course.before.moment if course.before else 0.0
    events = list(course.study.events)
    clock, period, now = 0.0, None, 0.0
    stretches: list[Stretch] = []
    valued: list[Circuit] = []
    while now < course.study.duration or not stretches:
        while events and events[0][0] <= now:
            changes = (*changes, events.pop(0)[1])
        circuit = course.variant(changes)
        frame = course.frame(circuit, moment + now)
        if not stretches:
            clock = _first_clock(course, changes, moment, memory)
            period = course.study.period or common_period(frame) or common_period(course.whole(changes, moment))
        end = _next_change(course, circuit, moment, now, events)
        piece = _piece(course, circuit, frame, memory, clock + now, clock + end, now)
        stretches += piece
        valued += course.valued(changes, piece)
        now = end
    solution = course.solution(valued, stretches, clock, period, course.study.duration)
    return solution, Reached(memory, clock + now, moment + now, changes)


def _piece(
    course: Course, circuit: Circuit, frame: Frame, memory: Memory, start: float, end: float, done: float = 0.0
) -> list[Stretch]:
    engine = course.engine(circuit, frame, memory)
    engine.move(start)
    if course.watch is not None:
        watch = course.watch
        engine.watch = lambda time: watch(done + time - start)
    stepping = course.stepping(frame, course.study.duration)
    recorded = course.guard(lambda: engine.advance(end, stepping, record=True), start)
    course.told += engine.flags.told
    _forget(memory)
    engine.remember(memory)
    return recorded


def _forget(memory: Memory) -> None:
    """An inductor that is taken out carries nothing when it is put back, nor does a junction; a capacitor keeps its
    charge."""
    for key in [key for key in memory if key[2] in ("current", "flux", "charge")]:
        del memory[key]


def _next_change(
    course: Course, circuit: Circuit, moment: float, now: float, events: list[tuple[float, Change]]
) -> float:
    times = [course.study.duration, *(time for time, _ in events)]
    times += [instant - moment for instant in instants(circuit) if instant - moment > now]
    return min(time for time in times if time is not None and time > now)


def _first_clock(course: Course, changes: tuple[Change, ...], moment: float, memory: Memory) -> float:
    """The sources' clock at t = 0; after another study with an angle, the state is carried on to that instant."""
    if course.before is None:
        return course.asked_clock(changes, moment)
    clock = course.before.clock
    period = common_period(course.whole(changes, moment))
    if course.study.angle is None or period is None:
        return clock
    earlier = course.variant(course.before.changes)
    ahead = (course.asked_clock(changes, moment) - clock) % period
    _piece(course, earlier, course.frame(earlier, moment), memory, clock, clock + ahead)
    return clock + ahead
