"""Our own runs at a given tolerance of a step, interpreted or compiled, and their cost.

Goes below the studies' accuracy on purpose: one tolerance, one solution.
"""

from __future__ import annotations

import importlib.util
import time
from collections.abc import Hashable, Sequence
from dataclasses import dataclass

import numpy as np

import simcore
from simcore.components.build import build_frame
from simcore.components.frame import Frame
from simcore.design.circuit import Circuit, PlannedStudy
from simcore.equations.grounding import grounded
from simcore.equations.kernel import Kernel, KernelCache
from simcore.solve.course import Course
from simcore.solve.engine import Counts
from simcore.solve.solution import Solution
from tests.benchmark.circuits import Bridge, Ladder
from tests.benchmark.general import Run


@dataclass(frozen=True)
class OwnRun(Run):
    """A run of ours and what it counted."""

    counts: Counts


def numba_is_here() -> bool:
    """Whether numba is installed."""
    return importlib.util.find_spec("numba") is not None


class CompiledCache(KernelCache):
    """Kernels whose emitted run, as it stands, is compiled; seconds: what the compilations took so far."""

    seconds = 0.0

    def kernel(self, frame: Frame, references: Sequence[Hashable]) -> Kernel:
        known = set(map(id, self._kernels.values()))
        kernel = super().kernel(frame, references)
        if id(kernel) not in known:
            kernel.run = self._compiled(kernel)
        return kernel

    def _compiled(self, kernel: Kernel):
        import numba

        run = numba.njit(kernel.run, error_model="numpy")
        room = np.empty(0)

        def call(
            numbers: list[float], saved: list[float], record: list[float], controls: tuple[float, ...]
        ) -> tuple[int, ...]:
            nonlocal room
            if len(room) < len(record):
                room = np.empty(len(record))
            state, start, known = np.array(saved), time.process_time(), len(run.signatures)
            answer = run(np.array(numbers), state, room, controls)
            if len(run.signatures) > known:
                self.seconds += time.process_time() - start
            saved[:] = state.tolist()
            record[: answer[1]] = room[: answer[1]].tolist()
            return answer

        return call


def circuit_of(text: str) -> Circuit:
    """The circuit of a description without a study."""
    return simcore.read_text(text + "study s: transient, duration = 1 s\n", "benchmark").circuit


def kernel_of(text: str) -> Kernel:
    """The kernel of a description without a study."""
    circuit = circuit_of(text)
    frame = build_frame(circuit)
    return Kernel(frame, grounded(frame, circuit.references))


def run_own(circuit: Circuit, spec: Bridge | Ladder, span: float, tolerance: float, kernels: KernelCache) -> OwnRun:
    """One run from rest over a span in s; emission is not counted, where the kernels are there already."""
    course = Course(PlannedStudy("s", "transient", duration=span), lambda changes: circuit, None, tolerance, kernels)
    start = time.process_time()
    solution, _ = course.solve()
    seconds = time.process_time() - start
    output = output_of(solution, spec)
    return OwnRun(solution.times[1:], output, seconds, course.counts.steps, course.counts)


def output_of(solution: Solution, spec: Bridge | Ladder) -> np.ndarray:
    """Output voltage at the end of each step, in V."""
    return solution.voltage(*spec.output)[:, 2]
