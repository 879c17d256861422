"""Our own runs at a given tolerance of a step, interpreted or compiled, and their cost.

Goes below the studies' accuracy on purpose: one tolerance, one solution.
"""

from __future__ import annotations

import time
from dataclasses import dataclass

import numpy as np

import simcore
from simcore.components.build import build_frame
from simcore.design.circuit import Circuit, PlannedStudy
from simcore.equations.grounding import grounded
from simcore.equations.kernel import Kernel, KernelCache
from simcore.solve.course import Course
from simcore.solve.engine import Counts
from simcore.solve.solution import Solution
from tests.benchmark.circuits import Bridge, Ladder, SixPulse
from tests.benchmark.general import Run


@dataclass(frozen=True)
class OwnRun(Run):
    """A run of ours and what it counted."""

    counts: Counts


def compiled_kernels(circuit: Circuit, spec: Bridge | Ladder | SixPulse) -> tuple[KernelCache, float]:
    """Kernels of a circuit whose run is machine code, and the CPU time in s that compiling it took."""
    kernels = KernelCache()
    run_own(circuit, spec, 1.0 / spec.frequency, 1e-3, kernels)
    start = time.process_time()
    kernels.compile()
    return kernels.afresh(), time.process_time() - start


def circuit_of(text: str) -> Circuit:
    """The circuit of a description without a study."""
    return simcore.read_text(text + "study s: transient, duration = 1 s\n", "benchmark").circuit


def kernel_of(text: str) -> Kernel:
    """The kernel of a description without a study."""
    circuit = circuit_of(text)
    frame = build_frame(circuit)
    return Kernel(frame, grounded(frame, circuit.references))


def run_own(
    circuit: Circuit, spec: Bridge | Ladder | SixPulse, span: float, tolerance: float, kernels: KernelCache
) -> OwnRun:
    """One run from rest over a span in s; emission is not counted, where the kernels are there already."""
    course = Course(PlannedStudy("s", "transient", duration=span), lambda changes: circuit, None, tolerance, kernels)
    start = time.process_time()
    solution, _ = course.solve()
    seconds = time.process_time() - start
    output = output_of(solution, spec)
    return OwnRun(solution.times[1:], output, seconds, course.counts.steps, course.counts)


def output_of(solution: Solution, spec: Bridge | Ladder | SixPulse) -> np.ndarray:
    """Output voltage at the end of each step, in V."""
    return solution.voltage(*spec.output)[:, 2]
