"""Runs a kernel over a stretch of time: starts it consistently, meets the sources' corners, records, and handles
failures.

Times here are on the sources' clock. Knows kernels and their controls, and nothing of studies, kinds or figures.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass, field

import numpy as np

from simcore.components.frame import Waveform
from simcore.equations.kernel import Kernel
from simcore.equations.plain import evaluate
from simcore.equations.run_interface import DONE, EVENT, FULL, WEAK, nearest, record_width
from simcore.solve.corners import corner, line
from simcore.solve.failure import Reason
from simcore.solve.flags import Flags
from simcore.solve.stretch import Stretch

_ROOM = 40_000
_COLD_LIMIT = 100
_LIMIT = 25
_STEPS_AT_MOST = 2_000_000
_WORK_AT_MOST = 5e8
"""Solved systems times their branches and columns, of one solution of a study: minutes, whatever the circuit."""
_ON_ARRAYS = 2_000
"""Branches and columns of an emitted run whose solution takes as long as the smallest one on arrays."""
_ATTEMPTS_TOGETHER = 2.5e5
"""Attempts at a step, times branches and columns, in which a call of the run ends."""
_ATTEMPTS = 100
_CHANGES_AT_MOST = 200
_START_AGREEMENT = 1e-4
_LEAST_BEND = 1e-5
"""Least tolerance of a watched current's curvature: a tighter one meets what rounding and Newton leave in the third
difference, which no shorter step makes smaller, so that steps would shrink to the smallest."""


@dataclass(frozen=True)
class Stepping:
    """How a run is stepped: relative tolerance of a step, extrapolation order, largest step in s, largest with a kink
    inside, largest in which a threshold is passed, smallest step, the step
    that gives a consistent start, the span in s over which the scale of a state is remembered, the sources' largest
    voltage as the scale of what has none yet, and the least current in A that rounding lets be told."""

    tolerance: float
    order: int
    largest: float
    kink: float
    event: float
    smallest: float
    begin: float
    memory: float
    voltage: float
    current: float


@dataclass
class Counts:
    """What a run cost."""

    steps: int = 0
    rejected: int = 0
    solves: int = 0
    iterations: int = 0
    weak: int = 0
    work: int = 0

    def add(self, result: tuple[int, ...], size: int) -> None:
        """Add the answer of a run on so many branches and columns."""
        _, _, steps, rejected, solves, iterations, weak, _ = result
        self.steps += steps
        self.rejected += rejected
        self.solves += solves
        self.iterations += iterations
        self.weak += weak
        self.work += max(solves, iterations) * size


class Interrupted(Exception):
    """A run that could not go on, at a time on the sources' clock; detail says what more is known."""

    def __init__(self, reason: Reason, time: float, detail: str = ""):
        super().__init__(reason.value[0])
        self.reason, self.time, self.detail = reason, time, detail


Memory = dict[tuple[Hashable, ...], float]


@dataclass
class Engine:
    """A kernel with its numbers and present state.

    rounding: of a branch's current, in A; period: of the first sine in s, 0 where there is none
    saved: the kernel's own numbers (see run_interface), the first being the time on the sources' clock in s
    watch: told the time it has come to, now and then
    """

    kernel: Kernel
    numbers: list[float]
    waveforms: list[Waveform]
    rounding: float = 0.0
    period: float = 0.0
    counts: Counts = field(default_factory=Counts)
    watch: Callable[[float], None] | None = None

    def __post_init__(self) -> None:
        self.saved = [0.0] * self.kernel.saved_count
        self._states = len(self.kernel.system.states)
        self._junctions = len(self.kernel.system.junctions)
        self._size = len(self.kernel.system.columns) + len(self.kernel.system.frame.branches)
        self._attempts = max(_ATTEMPTS, int(_ATTEMPTS_TOGETHER / self._size))
        self._first_step, self._slowest = 0.0, nearest(self.kernel.system, 0)
        self._record: Sequence[float] | None = None
        self._response: list[float] | None = None
        self.flags = Flags(self.kernel.system.frame, self.numbers, self.period)

    # --- state by name, so that it can move between forms of the equations ---

    def remember(self, memory: Memory) -> None:
        """Write the present states, junction voltages and peaks to a memory by element."""
        for key, position in self._positions():
            memory[key] = self.saved[position]
        self.flags.remember(memory, self.saved[0])

    def recall(self, memory: Memory) -> None:
        """Take states, junction voltages and peaks from a memory; what it lacks starts at its initial value."""
        inputs = {f"p{index}": number for index, number in enumerate(self.numbers)}
        initial = [float(value) for value in evaluate([state.initial for state in self.kernel.system.states], inputs)]
        for key, position in self._positions():
            start = initial[position - 2] if position < 2 + self._states else 0.0
            self.saved[position] = memory.get(key, start)
        self.flags.recall(memory, self.saved[0])

    def move(self, time: float) -> None:
        """Set the sources' clock; what is pending keeps its distance."""
        self.flags.move(time - self.saved[0])
        self.saved[0] = time

    def _positions(self) -> list[tuple[tuple[Hashable, ...], int]]:
        system = self.kernel.system
        branches = system.frame.branches
        seen: dict[tuple, int] = {}
        result = []
        holders = [(state.branch, state.quantity) for state in system.states]
        holders += [(junction.branch, "junction") for junction in system.junctions]
        holders += [(state.branch, f"peak {state.quantity}") for state in system.states]
        holders += [(system.columns[watched].branch or 0, "watched peak") for watched in self.kernel.watched]
        for position, (index, quantity) in enumerate(holders):
            key = (branches[index].element, branches[index].port, quantity)
            seen[key] = seen.get(key, 0) + 1
            result.append(((*key, seen[key]), 2 + position))
        return result

    def states(self) -> list[float]:
        """The states' values, in the kernel's order."""
        return self.saved[2 : 2 + self._states]

    def peaks(self) -> list[float]:
        """The states' peaks of late, in the kernel's order."""
        first = 2 + self._states + self._junctions
        return self.saved[first : first + self._states]

    def set_states(self, values: Sequence[float]) -> None:
        """Put the states at given values."""
        self.saved[2 : 2 + self._states] = [float(value) for value in values]

    # --- running ---

    def begin(self, time: float, step: float) -> np.ndarray:
        """Values just after a time, from the states as they are: steps too short to move them, extrapolated to none.
        Returns the columns."""
        self.follow(time)
        states, failure = self.saved[2 : 2 + self._states], None
        for shorter in (1.0, 1e-3, 1e-6):
            keep = list(self.saved)
            try:
                twice = self._from(states, time, 2.0 * step * shorter)
                once = self._from(states, time, step * shorter)
            except Interrupted as stop:
                self.saved, failure = keep, failure or stop
                continue
            self.set_states(states)
            self.saved[0] = time
            self._first_step = step * shorter
            return 2.0 * once - twice
        assert failure is not None
        raise Interrupted(failure.reason, time, failure.detail)

    def _from(self, states: list[float], time: float, step: float) -> np.ndarray:
        self.set_states(states)
        return self.single(time, step)

    def single(self, time: float, step: float) -> np.ndarray:
        """One backward-Euler step of a given length that ends at a time."""
        self.saved[0], self.saved[1] = time - step, step
        floors = (1.0, self.rounding)
        limits = (1.0, _START_AGREEMENT, math.inf, math.inf)
        controls = (time, math.inf, 0.0, 1.0, 1, _COLD_LIMIT, 0.0, 1.0, _ROOM, _ATTEMPTS, *floors, *limits)
        if self.saved[0] == time:
            lost = f"a step of {step:.2g} s is lost in the digits of the clock, {nearest(self.kernel.system, 0)}"
            raise Interrupted(Reason.NO_CONVERGENCE, time, lost)
        written, _ = self._call(controls)
        columns = len(self.kernel.system.columns)
        return np.array(self._record[written - 2 * columns - 1 : written - 1]).reshape(columns, 2)[:, 1]

    def advance(self, end: float, stepping: Stepping, record: bool) -> list[Stretch]:
        """Run to a time, corner by corner; returns what was recorded (nothing where not asked)."""
        stretches = []
        while self.saved[0] < end:
            time = self.saved[0]
            first, numbers = self._begun(time, stepping.begin), list(self.numbers)
            stop = min(end, self._next_corner(time), *(instant for instant, _, _ in self.flags.pending))
            stop = end if end - stop < stepping.smallest else stop  # but for rounding the same instant
            self.saved[1] = min(stepping.largest, 1e-3 * stepping.memory, max(stop - time, stepping.smallest))
            chunks = self._to_corner(stop, stepping, record)
            if record and self.saved[0] > time:
                stretches.append(self._recorded(time, first, chunks, numbers, stepping.order))
        return stretches

    # --- flags ---

    def _begun(self, time: float, step: float) -> np.ndarray:
        """A consistent start in which every flag stands as its thresholds ask. Returns the columns."""
        for _ in range(_CHANGES_AT_MOST):
            if self.flags.fall_due(time):
                self._forget_guesses()
            columns = self.begin(time, step)
            passed = self.flags.passed(self._thresholds())
            if passed is None:
                return columns
            self.flags.change(passed, time)
            self._forget_guesses()
        raise Interrupted(Reason.CHATTER, time, f"at {self.kernel.system.frame.thresholds[passed].element}")

    def switched(self, time: float) -> str:
        """Let the flags stand as their thresholds ask where nothing moves any more, with no delay since there is time
        enough; the element at which one changed, "" for none."""
        passed = self.flags.passed(self._thresholds())
        due = self.flags.pending[0][1].element if self.flags.pending else ""
        if passed is not None:
            self.flags.change(passed, time)
            due = self.kernel.system.frame.thresholds[passed].element
        if due:
            self.flags.fall_due(math.inf)
            self._forget_guesses()
        return due

    def _thresholds(self) -> list[float]:
        """How far each threshold is passed."""
        return self.saved[len(self.saved) - len(self.kernel.system.thresholds) :]

    def _forget_guesses(self) -> None:
        """A law that has changed may not stand the voltage that its branch had: start its iteration from none."""
        first = 2 + self._states
        for position in range(first, first + self._junctions):
            self.saved[position] = min(self.saved[position], 0.0)

    def respond(self, end: float, stepping: Stepping) -> np.ndarray | None:
        """Run to a time and give the derivative of the states there by those at the start, shape (states, states), a
        row a state; None, and nothing is run, where the kernel cannot carry it."""
        if self.kernel.responding_run is None:
            return None
        size = self._states * self._states
        self._response = [*np.eye(self._states).ravel().tolist(), *([0.0] * (3 * size))]
        try:
            self.advance(end, stepping, record=False)
            return np.array(self._response[:size]).reshape(self._states, self._states).T
        finally:
            self._response = None

    def _to_corner(self, corner: float, stepping: Stepping, record: bool) -> list[np.ndarray]:
        width = record_width(self.kernel.system)
        controls = (
            corner,
            stepping.largest,
            stepping.smallest,
            stepping.tolerance,
            stepping.order,
            _LIMIT,
            0.5 / stepping.memory,
            1.0 if record else 0.0,
            _ROOM,
            self._attempts,
            0.01 * stepping.voltage,
            max(stepping.current, self._current_floor()),
            max(_LEAST_BEND, 30.0 * stepping.tolerance),
            min(1e-2, math.sqrt(0.3 * stepping.tolerance)),
            stepping.kink,
            stepping.event,
        )
        chunks = []
        while True:
            written, passed = self._call(controls)
            if self.watch is not None:
                self.watch(self.saved[0])
            if record:
                chunks.append(np.array(self._record[:written]).reshape(-1, width))
            if passed is not None:
                self.flags.change(passed, self.saved[0])
                self._forget_guesses()
            if self.saved[0] >= corner or passed is not None:
                return chunks

    def _current_floor(self) -> float:
        """One per cent of the largest current the run has seen."""
        first = 2 + self._states + self._junctions
        peaks = [
            self.saved[first + index]
            for index, state in enumerate(self.kernel.system.states)
            if state.quantity == "current"
        ]
        watched = first + self._states
        peaks += self.saved[watched : watched + len(self.kernel.watched)]
        return 0.01 * max(peaks, default=0.0)

    def _call(self, controls: tuple[float, ...]) -> tuple[int, int | None]:
        """Run the kernel once; returns how many numbers it recorded and the threshold that ended it, if one did. A
        pivot that shrank to rounding is answered by going back and on with the sparse LU, which may pivot."""
        if self.counts.steps > _STEPS_AT_MOST or self.counts.work > _WORK_AT_MOST:
            raise Interrupted(Reason.WORK, self.saved[0], self._slowest)
        if self._record is None:
            self._record = self.kernel.room(_ROOM + record_width(self.kernel.system))
        before = list(self.saved)
        result = self._run(controls)
        if (result is None or result[WEAK]) and self.kernel.source:
            self.kernel.use_sparse()
            self.saved[:] = before
            result = self._run(controls)
        if result is None:
            raise Interrupted(Reason.SINGULAR, self.saved[0], nearest(self.kernel.system, 0))
        if result[0] == EVENT:
            self._slowest = f"near {self.kernel.system.frame.thresholds[result[-1] - 1].element}"
        elif result[-1]:
            self._slowest = nearest(self.kernel.system, result[-1])
        self.counts.add(result, self._size if self.kernel.source else self._size + _ON_ARRAYS)
        if result[0] not in (DONE, FULL, EVENT):
            raise Interrupted(Reason.NO_CONVERGENCE, self.saved[0], nearest(self.kernel.system, result[-1]))
        return result[1], result[-1] - 1 if result[0] == EVENT else None

    def _run(self, controls: tuple[float, ...]) -> tuple[int, ...] | None:
        """The kernel's answer; None where a pivot vanished altogether."""
        try:
            if self._response is not None and controls[4] > 1 and self.kernel.responding_run is not None:
                return self.kernel.responding_run(self.numbers, self.saved, self._record, controls, self._response)
            return self.kernel.run(self.numbers, self.saved, self._record, controls)
        except ArithmeticError:
            return None

    # --- corners of the sources ---

    def follow(self, time: float) -> None:
        """Set each waveform's straight line to the one that holds just after a time."""
        for waveform in self.waveforms:
            self.numbers[waveform.base], self.numbers[waveform.slope] = line(waveform, time)

    def _next_corner(self, time: float) -> float:
        return min((corner(waveform, time) for waveform in self.waveforms), default=math.inf)

    # --- records ---

    def _recorded(
        self, start: float, first: np.ndarray, chunks: list[np.ndarray], numbers: list[float], order: int
    ) -> Stretch:
        rows = np.concatenate(chunks)
        columns = len(self.kernel.system.columns)
        pairs = rows[:, 1:-1].reshape(len(rows), columns, 2)
        begins = np.concatenate([first[None], pairs[:-1, :, 1]])
        values = np.stack([begins, pairs[:, :, 0], pairs[:, :, 1]], axis=1)
        times = np.concatenate([[start], rows[:, 0]])
        return Stretch(self.kernel.system, numbers, times, values, order, rows[:, -1] == 0.0, self._first_step)
