"""A study's course: operating point, transient with its events, or settled state, as pieces between changes of the
circuit.

Knows studies, circuits and the engine; circuits under changes come from a function, so that text stays out of here.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np

from grammar.quantities import SECOND, show
from simcore.components.build import build_frame, instants
from simcore.components.frame import CurrentBranch, Frame, NonlinearBranch
from simcore.design.circuit import Change, Circuit, PlannedStudy
from simcore.equations.grounding import grounded
from simcore.equations.kernel import KernelCache
from simcore.solve.engine import Counts, Engine, Interrupted, Memory, Stepping
from simcore.solve.failure import NoSolution, Reason
from simcore.solve.rest import rest
from simcore.solve.settle import settle
from simcore.solve.solution import Solution
from simcore.solve.sources import MOST_PERIODS, clock_at_phase, common_period, largest_voltage, rounding_current
from simcore.solve.stretch import Stretch

Answer = TypeVar("Answer")
Variant = Callable[[tuple[Change, ...]], Circuit]
Watch = Callable[[float], None]
"""Told how much of a study is solved, in s."""
EXTRAPOLATION_ORDER = 3
_STEPS_A_PERIOD = 16
_KINKS_A_PERIOD = 200
_BEGIN = 1e-7
_TOLD = 6
"""Changes by thresholds that are told one by one."""
_WHOLE = 1e-6
"""How far a period that is asked for may be off whole periods of the sources."""
_EVENT = 4e-5
"""Largest step in which a threshold is passed, over the largest with a kink. A step comes fifty times nearer to it (see
SHORT), so that a controlled bridge takes a twentieth more of them than at 2e-3, and its mean errs by a twentieth."""


@dataclass(frozen=True)
class Reached:
    """Where a study left the circuit: states by element, the sources' clock and the elements' own time in s, the
    changes, the temperatures in K of what its own loss heats, and the derivative of a settled study's period map by its
    name (see settle)."""

    memory: Memory
    clock: float
    moment: float
    changes: tuple[Change, ...]
    temperatures: Mapping[str, float] = field(default_factory=dict)
    slopes: Mapping[str, np.ndarray] = field(default_factory=dict)


@dataclass
class Course:
    """Solves one study at one tolerance.

    variant: the circuit under changes; before: where the study starts, None for rest; tolerance: relative error of a
    step; watch: who wants to know how far it is. Raises NoSolution.
    """

    study: PlannedStudy
    variant: Variant
    before: Reached | None
    tolerance: float
    kernels: KernelCache = field(default_factory=KernelCache)
    counts: Counts = field(default_factory=Counts)
    told: list[tuple[float, str]] = field(default_factory=list)
    watch: Watch | None = None

    def solve(self) -> tuple[Solution, Reached]:
        """The solution, and where it left the circuit."""
        solvers = {"operating_point": self._rest, "transient": self._transient, "settled": self._settled}
        changes = (self.before.changes if self.before else ()) + self.study.changes
        return solvers[self.study.kind](changes)

    # --- the three kinds ---

    def _rest(self, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
        circuit = self.variant(changes)
        frame = self._frame(circuit, 0.0)
        engine = self._engine(circuit, frame, {})
        clock = self._asked_clock(changes, 0.0)
        stretch = self._guard(lambda: rest(engine, clock), clock)
        memory: Memory = {}
        engine.remember(memory)
        valued = self._valued(changes, [stretch])
        return self._solution(valued, [stretch], clock, None, 1.0), Reached(memory, clock, 0.0, changes)

    def _settled(self, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
        circuit = self.variant(changes)
        frame = self._frame(circuit, math.inf)
        period = self._settling_period(frame, changes)
        memory = dict(self.before.memory) if self.before else {}
        engine = self._engine(circuit, frame, memory)
        clock = self._asked_clock(changes, math.inf)
        stepping = self._stepping(frame, period)
        slope = self.before.slopes.get(self.study.name) if self.before else None
        found = self._guard(lambda: settle(engine, clock, period, stepping, slope), clock)
        self.told += engine.flags.told
        engine.remember(memory)
        solution = self._solution(self._valued(changes, found.stretches), found.stretches, clock, period, period)
        solution.notes.append(found.how)
        solution.multiplier = found.multiplier
        solution.statistics |= {"periods": found.periods, "periods with derivatives": found.responding}
        slopes = {} if found.slope is None else {self.study.name: found.slope}
        return solution, Reached(memory, clock, math.inf, changes, slopes=slopes)

    def _settling_period(self, frame: Frame, changes: tuple[Change, ...]) -> float:
        """The period to settle to, s: the one that is asked for, which must be whole periods of the sources, else
        theirs."""
        asked, common = self.study.period, common_period(frame)
        if asked is None and common is None:
            raise NoSolution(self.study.name, Reason.NO_PERIOD, detail=_without_period(frame, changes))
        if asked is not None and common is not None:
            whole = round(asked / common)
            if whole < 1 or abs(asked / common - whole) > _WHOLE:
                detail = f"{show(asked, SECOND)} is asked for, and they repeat every {show(common, SECOND)}"
                raise NoSolution(self.study.name, Reason.NOT_WHOLE, detail=detail)
        period = asked or common
        assert period is not None
        return period

    def _transient(self, changes: tuple[Change, ...]) -> tuple[Solution, Reached]:
        assert self.study.duration is not None
        memory = dict(self.before.memory) if self.before else {}
        moment = self.before.moment if self.before else 0.0
        events = list(self.study.events)
        clock, period, now = 0.0, None, 0.0
        stretches: list[Stretch] = []
        valued: list[Circuit] = []
        while now < self.study.duration or not stretches:
            while events and events[0][0] <= now:
                changes = (*changes, events.pop(0)[1])
            circuit = self.variant(changes)
            frame = self._frame(circuit, moment + now)
            if not stretches:
                clock = self._first_clock(changes, moment, memory)
                period = self.study.period or common_period(frame) or common_period(self._whole(changes, moment))
            end = self._next_change(circuit, moment, now, events)
            piece = self._piece(circuit, frame, memory, clock + now, clock + end, now)
            stretches += piece
            valued += self._valued(changes, piece)
            now = end
        solution = self._solution(valued, stretches, clock, period, self.study.duration)
        return solution, Reached(memory, clock + now, moment + now, changes)

    # --- pieces ---

    def _piece(
        self, circuit: Circuit, frame: Frame, memory: Memory, start: float, end: float, done: float = 0.0
    ) -> list[Stretch]:
        engine = self._engine(circuit, frame, memory)
        engine.move(start)
        if self.watch is not None:
            watch = self.watch
            engine.watch = lambda time: watch(done + time - start)
        stepping = self._stepping(frame, self.study.duration)
        recorded = self._guard(lambda: engine.advance(end, stepping, record=True), start)
        self.told += engine.flags.told
        self._forget(memory)
        engine.remember(memory)
        return recorded

    @staticmethod
    def _forget(memory: Memory) -> None:
        """An inductor that is taken out carries nothing when it is put back, nor does a junction; a capacitor keeps its
        charge."""
        for key in [key for key in memory if key[2] in ("current", "flux", "charge")]:
            del memory[key]

    def _next_change(self, circuit: Circuit, moment: float, now: float, events: list[tuple[float, Change]]) -> float:
        times = [self.study.duration, *(time for time, _ in events)]
        times += [instant - moment for instant in instants(circuit) if instant - moment > now]
        return min(time for time in times if time is not None and time > now)

    def _whole(self, changes: tuple[Change, ...], moment: float) -> Frame:
        """The circuit with all its sources in place, whatever is opened: what an angle counts from."""
        return self._frame(self._set(changes), moment)

    def _asked_clock(self, changes: tuple[Change, ...], moment: float) -> float:
        """The sources' clock at the study's angle."""
        return clock_at_phase(self._whole(changes, moment), self.study.angle)

    def _first_clock(self, changes: tuple[Change, ...], moment: float, memory: Memory) -> float:
        """The sources' clock at t = 0; after another study with an angle, the state is carried on to that instant."""
        if self.before is None:
            return self._asked_clock(changes, moment)
        clock = self.before.clock
        period = common_period(self._whole(changes, moment))
        if self.study.angle is None or period is None:
            return clock
        earlier = self.variant(self.before.changes)
        ahead = (self._asked_clock(changes, moment) - clock) % period
        self._piece(earlier, self._frame(earlier, moment), memory, clock, clock + ahead)
        return clock + ahead

    def _frame(self, circuit: Circuit, moment: float) -> Frame:
        return self.kernels.frame(circuit, moment, lambda: build_frame(circuit, moment))

    def _engine(self, circuit: Circuit, frame: Frame, memory: Memory) -> Engine:
        kernel = self.kernels.kernel(frame, grounded(frame, circuit.references))
        rounding = rounding_current(frame, largest_voltage(frame, common_period(frame) or 1.0))
        first = 1.0 / frame.sines[0][0] if frame.sines else 0.0
        engine = Engine(kernel, list(frame.numbers), frame.waveforms, rounding, first, self.counts)
        engine.recall(memory)
        return engine

    def _stepping(self, frame: Frame, span: float | None) -> Stepping:
        period = self.study.period or common_period(frame) or span
        assert period is not None and span is not None
        scale = min(period, span) if frame.sines or frame.waveforms else span
        largest = scale / _STEPS_A_PERIOD * min(1.0, (self.tolerance / 1e-3) ** 0.25)
        voltage = largest_voltage(frame, scale)
        return Stepping(
            tolerance=self.tolerance,
            order=EXTRAPOLATION_ORDER,
            largest=largest,
            kink=scale / _KINKS_A_PERIOD * (self.tolerance / 1e-3) ** (1.0 / 3.0),
            event=scale / _KINKS_A_PERIOD * (self.tolerance / 1e-3) ** (1.0 / 3.0) * _EVENT,
            smallest=1e-9 * scale,
            begin=_BEGIN * scale,
            memory=scale,
            voltage=voltage,
            current=max(1e-9, rounding_current(frame, voltage) / self.tolerance),
        )

    def _guard(self, action: Callable[[], Answer], clock: float) -> Answer:
        """An action's answer; what stops it is told in the study's own time."""
        try:
            return action()
        except Interrupted as stop:
            raise NoSolution(self.study.name, stop.reason, stop.time - clock, stop.detail) from stop

    # --- the result ---

    def _valued(self, changes: tuple[Change, ...], stretches: list[Stretch]) -> list[Circuit]:
        """For each stretch, the circuit with the lets that changes set."""
        return [self._set(changes)] * len(stretches)

    def _set(self, changes: tuple[Change, ...]) -> Circuit:
        return self.variant(tuple(change for change in changes if change.verb == "set"))

    def _solution(
        self, valued: list[Circuit], stretches: list[Stretch], clock: float, period: float | None, span: float
    ) -> Solution:
        times = np.concatenate([stretches[0].times[:1], *(stretch.times[1:] for stretch in stretches)]) - clock
        times[-1] = span
        window = (0.0, span)
        if self.study.last is not None and period is not None:
            window = (max(0.0, span - self.study.last * period), span)
        first_event = self.study.events[0][0] if self.study.events else None
        counts = self.counts
        statistics = {
            "steps": counts.steps,
            "rejected steps": counts.rejected,
            "solves": counts.solves,
            "iterations": counts.iterations,
            "weak pivots": counts.weak,
        }
        notes = [f"{what} at {show(time - clock, SECOND)}" for time, what in self.told[:_TOLD]]
        if len(self.told) > _TOLD:
            notes.append(f"and {len(self.told) - _TOLD} more such changes")
        whole = self.variant(())
        times_of = (times, stretches, valued, period, window, self.tolerance, first_event)
        return Solution(whole, self.study, *times_of, notes, statistics, work=counts.work)


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
