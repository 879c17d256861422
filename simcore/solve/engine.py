"""Runs a kernel over a stretch of time: starts it consistently, meets the sources' corners, records, and handles
failures.

Times here are on the sources' clock. Knows kernels and their controls, and nothing of studies, kinds or figures.
"""

from __future__ import annotations

import bisect
import math
from collections.abc import Hashable, Sequence
from dataclasses import dataclass, field

import numpy as np

from simcore.components.frame import Waveform
from simcore.equations.kernel import Kernel
from simcore.equations.plain import evaluate
from simcore.equations.run_source import DONE, FULL, record_width
from simcore.solve.failure import Reason
from simcore.solve.stretch import Stretch

_ROOM = 40_000
_COLD_LIMIT = 100
_LIMIT = 25
_STEPS_AT_MOST = 2_000_000
REST_STEP = 1e15


@dataclass(frozen=True)
class Stepping:
    """How a run is stepped: relative tolerance of a step, extrapolation order, largest step in s, largest with a kink
    inside, smallest step, the step
    that gives a consistent start, the span in s over which the scale of a state is remembered, and the sources' largest
    voltage as the scale of what has none yet."""

    tolerance: float
    order: int
    largest: float
    kink: float
    smallest: float
    begin: float
    memory: float
    voltage: float


@dataclass
class Counts:
    """What a run cost."""

    steps: int = 0
    rejected: int = 0
    solves: int = 0
    iterations: int = 0
    weak: int = 0

    def add(self, result: tuple[int, ...]) -> None:
        _, _, steps, rejected, solves, iterations, weak = result
        self.steps += steps
        self.rejected += rejected
        self.solves += solves
        self.iterations += iterations
        self.weak += weak


class Interrupted(Exception):
    """A run that could not go on, at a time on the sources' clock; detail says what more is known."""

    def __init__(self, reason: Reason, time: float, detail: str = ""):
        super().__init__(reason.value[0])
        self.reason, self.time, self.detail = reason, time, detail


Memory = dict[tuple[Hashable, ...], float]


@dataclass
class Engine:
    """A kernel with its numbers and present state.

    saved: the kernel's own numbers (see run_source), the first being the time on the sources' clock in s
    """

    kernel: Kernel
    numbers: list[float]
    waveforms: list[Waveform]
    counts: Counts = field(default_factory=Counts)

    def __post_init__(self) -> None:
        self.saved = [0.0] * self.kernel.saved_count
        self._states = len(self.kernel.system.states)
        self._junctions = len(self.kernel.system.junctions)
        self._record: Sequence[float] | None = None
        self._response: list[float] | None = None

    # --- state by name, so that it can move between forms of the equations ---

    def remember(self, memory: Memory) -> None:
        """Write the present states and junction voltages to a memory by element."""
        for key, position in self._positions():
            memory[key] = self.saved[position]

    def recall(self, memory: Memory) -> None:
        """Take states and junction voltages from a memory; what it lacks starts at its initial value."""
        inputs = {f"p{index}": number for index, number in enumerate(self.numbers)}
        initial = [float(value) for value in evaluate([state.initial for state in self.kernel.system.states], inputs)]
        for key, position in self._positions():
            start = initial[position - 2] if position < 2 + self._states else 0.0
            self.saved[position] = memory.get(key, start)

    def _positions(self) -> list[tuple[tuple[Hashable, ...], int]]:
        branches = self.kernel.system.frame.branches
        seen: dict[tuple, int] = {}
        result = []
        holders = [(state.branch, state.quantity) for state in self.kernel.system.states]
        holders += [(junction.branch, "junction") for junction in self.kernel.system.junctions]
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

    def rest(self, time: float) -> Stretch:
        """The operating point with the sources at their value at a time: one step long enough for every state to
        settle, and where that does not converge, steps from short to long (pseudo-transient continuation; Kelley and
        Keyes, 1998)."""
        self._follow(time)
        start = list(self.saved)
        for steps in ([REST_STEP], [10.0**exponent for exponent in range(-12, 16)]):
            self.saved = list(start)
            try:
                for step in steps:
                    record = self._single(time, step)
            except Interrupted:
                continue
            values = np.stack([record, record, record])[None]
            return Stretch(
                self.kernel.system,
                list(self.numbers),
                np.array([time, time + 1.0]),
                values,
                1,
                np.array([True]),
                held=True,
            )
        raise Interrupted(Reason.NO_CONVERGENCE, time)

    def begin(self, time: float, step: float) -> np.ndarray:
        """Values just after a time, from the states as they are: steps too short to move them, extrapolated to none.
        Returns the columns."""
        self._follow(time)
        states = self.saved[2 : 2 + self._states]
        for shorter in (1.0, 1e-3, 1e-6):
            keep = list(self.saved)
            try:
                twice = self._from(states, time, 2.0 * step * shorter)
                once = self._from(states, time, step * shorter)
            except Interrupted:
                self.saved = keep
                continue
            self.set_states(states)
            self.saved[0] = time
            return 2.0 * once - twice
        raise Interrupted(Reason.NO_CONVERGENCE, time)

    def _from(self, states: list[float], time: float, step: float) -> np.ndarray:
        self.set_states(states)
        return self._single(time, step)

    def _single(self, time: float, step: float) -> np.ndarray:
        """One backward-Euler step of a given length that ends at a time."""
        self.saved[0], self.saved[1] = time - step, step
        controls = (time, math.inf, 0.0, 1.0, 1, _COLD_LIMIT, 0.0, 1.0, _ROOM, 1.0, 1.0, 1.0, 1e-6, math.inf)
        if self.saved[0] == time:
            raise Interrupted(Reason.NO_CONVERGENCE, time)
        written = self._call(controls)
        columns = len(self.kernel.system.columns)
        return np.array(self._record[written - 2 * columns - 1 : written - 1]).reshape(columns, 2)[:, 1]

    def advance(self, end: float, stepping: Stepping, record: bool) -> list[Stretch]:
        """Run to a time, corner by corner; returns what was recorded (nothing where not asked)."""
        stretches = []
        while self.saved[0] < end:
            time = self.saved[0]
            corner = min(end, self._next_corner(time))
            first = self.begin(time, stepping.begin)
            self.saved[1] = min(stepping.largest, 1e-3 * stepping.memory, max(corner - time, stepping.smallest))
            chunks = self._to_corner(corner, stepping, record)
            if record:
                stretches.append(self._recorded(time, first, chunks, stepping.order))
        return stretches

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
            0.01 * stepping.voltage,
            self._current_floor(),
            30.0 * stepping.tolerance,
            min(1e-2, math.sqrt(0.3 * stepping.tolerance)),
            stepping.kink,
        )
        chunks = []
        while True:
            written = self._call(controls)
            if record:
                chunks.append(np.array(self._record[:written]).reshape(-1, width))
            if self.saved[0] >= corner:
                return chunks
            if self.counts.steps > _STEPS_AT_MOST:
                raise Interrupted(Reason.WORK, self.saved[0])

    def _current_floor(self) -> float:
        """One per cent of the largest current the run has seen, and never nothing."""
        first = 2 + self._states + self._junctions
        peaks = [
            self.saved[first + index]
            for index, state in enumerate(self.kernel.system.states)
            if state.quantity == "current"
        ]
        watched = first + self._states
        peaks += self.saved[watched : watched + len(self.kernel.watched)]
        return max(1e-9, 0.01 * max(peaks, default=0.0))

    def _call(self, controls: tuple[float, ...]) -> int:
        """Run the kernel once; returns how many numbers it recorded. A pivot that shrank to rounding is answered by
        going back and on with the sparse LU, which may pivot."""
        if self._record is None:
            self._record = self.kernel.room(_ROOM + record_width(self.kernel.system))
        before = list(self.saved)
        result = self._run(controls)
        if (result is None or result[-1]) and self.kernel.source:
            self.kernel.use_sparse()
            self.saved[:] = before
            result = self._run(controls)
        if result is None:
            raise Interrupted(Reason.SINGULAR, self.saved[0])
        self.counts.add(result)
        if result[0] not in (DONE, FULL):
            raise Interrupted(Reason.NO_CONVERGENCE, self.saved[0])
        return result[1]

    def _run(self, controls: tuple[float, ...]) -> tuple[int, ...] | None:
        """The kernel's answer; None where a pivot vanished altogether."""
        try:
            if self._response is not None and controls[4] > 1 and self.kernel.responding_run is not None:
                return self.kernel.responding_run(self.numbers, self.saved, self._record, controls, self._response)
            return self.kernel.run(self.numbers, self.saved, self._record, controls)
        except ArithmeticError:
            return None

    # --- corners of the sources ---

    def _follow(self, time: float) -> None:
        """Set each waveform's straight line to the one that holds just after a time."""
        for waveform in self.waveforms:
            self.numbers[waveform.base], self.numbers[waveform.slope] = _line(waveform, time)

    def _next_corner(self, time: float) -> float:
        return min((_corner(waveform, time) for waveform in self.waveforms), default=math.inf)

    # --- records ---

    def _recorded(self, start: float, first: np.ndarray, chunks: list[np.ndarray], order: int) -> Stretch:
        rows = np.concatenate(chunks)
        columns = len(self.kernel.system.columns)
        pairs = rows[:, 1:-1].reshape(len(rows), columns, 2)
        begins = np.concatenate([first[None], pairs[:-1, :, 1]])
        values = np.stack([begins, pairs[:, :, 0], pairs[:, :, 1]], axis=1)
        times = np.concatenate([[start], rows[:, 0]])
        return Stretch(self.kernel.system, list(self.numbers), times, values, order, rows[:, -1] == 0.0)


def _line(waveform: Waveform, time: float) -> tuple[float, float]:
    """Value at t = 0 and slope of the line that holds from a time on."""
    shift = 0.0
    if waveform.period is not None:
        shift = math.floor(_local(waveform, time)[1]) * waveform.period
    local = time - shift
    points = waveform.points
    after = bisect.bisect_right([instant for instant, _ in points], local * (1.0 + 1e-12))
    if after == 0:
        return points[0][1], 0.0
    if after == len(points):
        return points[-1][1], 0.0
    (t0, v0), (t1, v1) = points[after - 1], points[after]
    slope = (v1 - v0) / (t1 - t0)
    return v0 - slope * (t0 + shift), slope


def _local(waveform: Waveform, time: float) -> tuple[float, float]:
    """A time within the period and the count of periods before it; a time a rounding before a period's end is its
    end."""
    assert waveform.period is not None
    cycles = time / waveform.period
    nearest = round(cycles)
    if abs(cycles - nearest) < 1e-9:
        cycles = float(nearest)
    return time - math.floor(cycles) * waveform.period, cycles


def _corner(waveform: Waveform, time: float) -> float:
    """The next instant after a time at which the waveform's line changes."""
    instants = [instant for instant, _ in waveform.points]
    if waveform.period is None:
        return next((instant for instant in instants if instant > time * (1.0 + 1e-12)), math.inf)
    local, cycles = _local(waveform, time)
    shift = math.floor(cycles) * waveform.period
    margin = 1e-9 * waveform.period
    candidates = [instant for instant in (*instants, waveform.period) if instant > local + margin]
    return shift + min(candidates)
