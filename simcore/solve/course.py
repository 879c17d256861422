"""What solving a study takes, whatever its kind: the circuit under changes, its frame, an engine with the right steps,
and the solution made of what was recorded.

Each kind of study has a module of its own with `solve`. Knows studies, circuits and the engine; circuits under changes
come from a function, so that text stays out of here.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from importlib import import_module
from typing import TypeVar

import numpy as np

from grammar.quantities import SECOND, show
from simcore.components.build import build_frame
from simcore.components.frame import Frame
from simcore.design.circuit import Change, Circuit, PlannedStudy
from simcore.design.study_kinds import STUDY_KINDS
from simcore.equations.grounding import grounded
from simcore.equations.kernel import KernelCache
from simcore.solve.engine import Counts, Engine, Interrupted, Memory, Stepping
from simcore.solve.failure import NoSolution
from simcore.solve.solution import Solution
from simcore.solve.sources import clock_at_phase, common_period, largest_voltage, rounding_current
from simcore.solve.stretch import Stretch

Answer = TypeVar("Answer")
Variant = Callable[[tuple[Change, ...]], Circuit]
Watch = Callable[[float], None]
"""Told how much of a study is solved, in s."""
Solver = Callable[["Course", tuple[Change, ...]], tuple[Solution, "Reached"]]
"""What solves a kind of study, from the changes that hold from its start. Raises NoSolution."""
EXTRAPOLATION_ORDER = 3
_STEPS_A_PERIOD = 16
_KINKS_A_PERIOD = 200
_BEGIN = 1e-7
_TOLD = 6
"""Changes by thresholds that are told one by one."""
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
        changes = (self.before.changes if self.before else ()) + self.study.changes
        solver: Solver = import_module(STUDY_KINDS[self.study.kind].where).solve
        return solver(self, changes)

    # --- what solvers of all kinds use ---

    def whole(self, changes: tuple[Change, ...], moment: float) -> Frame:
        """The circuit with all its sources in place, whatever is opened: what an angle counts from."""
        return self.frame(self._set(changes), moment)

    def asked_clock(self, changes: tuple[Change, ...], moment: float) -> float:
        """The sources' clock at the study's angle."""
        return clock_at_phase(self.whole(changes, moment), self.study.angle)

    def frame(self, circuit: Circuit, moment: float) -> Frame:
        return self.kernels.frame(circuit, moment, lambda: build_frame(circuit, moment))

    def engine(self, circuit: Circuit, frame: Frame, memory: Memory) -> Engine:
        kernel = self.kernels.kernel(frame, grounded(frame, circuit.references))
        rounding = rounding_current(frame, largest_voltage(frame, common_period(frame) or 1.0))
        first = 1.0 / frame.sines[0][0] if frame.sines else 0.0
        engine = Engine(kernel, list(frame.numbers), frame.waveforms, rounding, first, self.counts)
        engine.recall(memory)
        return engine

    def stepping(self, frame: Frame, span: float | None) -> Stepping:
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

    def guard(self, action: Callable[[], Answer], clock: float) -> Answer:
        """An action's answer; what stops it is told in the study's own time."""
        try:
            return action()
        except Interrupted as stop:
            raise NoSolution(self.study.name, stop.reason, stop.time - clock, stop.detail) from stop

    # --- the result ---

    def valued(self, changes: tuple[Change, ...], stretches: list[Stretch]) -> list[Circuit]:
        """For each stretch, the circuit with the lets that changes set."""
        return [self._set(changes)] * len(stretches)

    def _set(self, changes: tuple[Change, ...]) -> Circuit:
        return self.variant(tuple(change for change in changes if change.verb == "set"))

    def solution(
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
