"""General solvers on hand-written equations: scipy's, and SUNDIALS IDA where scikit-sundae is installed.

Each run is bounded in time; it gives times, output voltage and cost.
"""

from __future__ import annotations

import importlib.util
import os
import sys
import time
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass

import numpy as np

from tests.benchmark.equations import Equations

IDA = "IDA"
SCIPY = ("Radau", "BDF", "LSODA")
_STEPS_AT_MOST = 10_000_000
STEPS_A_PERIOD = 16
"""Steps a period at least, as for our own runs: a longer one could leap over a conduction."""


class TimeUp(Exception):
    """A run has used the time it was given."""


@dataclass(frozen=True)
class Run:
    """A run from rest: times in s after the start, output in V there, CPU time in s, steps taken."""

    times: np.ndarray
    output: np.ndarray
    seconds: float
    steps: int


def ida_is_here() -> bool:
    """Whether scikit-sundae is installed."""
    return importlib.util.find_spec("sksundae") is not None


def run_general(
    solver: str, equations: Equations, span: float, period: float, size: float, tolerance: float, bound: float
) -> Run | None:
    """One run from rest over a span in s; None where it fails or takes longer than a bound in s.

    tolerance: relative; the absolute one is as much of size, in V
    """
    start = time.process_time()
    task = _Task(equations, span, period / STEPS_A_PERIOD, size * tolerance, tolerance, start + bound)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            found = _ida(task) if solver == IDA else _scipy(solver, task)
    except (TimeUp, ArithmeticError, ValueError, RuntimeError):
        return None
    if found is None:
        return None
    times, output = found
    if not (np.all(np.isfinite(output)) and abs(times[-1] - span) <= 1e-9 * span):
        return None
    return Run(times[1:], output[1:], time.process_time() - start, len(times) - 1)


@contextmanager
def _silent() -> Iterator[None]:
    """Keeps what a library prints of its failures, past Python, out of the tables."""
    sys.stdout.flush()
    kept, nowhere = os.dup(1), os.open(os.devnull, os.O_WRONLY)
    try:
        os.dup2(nowhere, 1)
        yield
    finally:
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)


@dataclass(frozen=True)
class _Task:
    """What to integrate, from rest: span and longest step in s, tolerances, and when to give up."""

    equations: Equations
    span: float
    largest: float
    absolute: float
    relative: float
    deadline: float

    def rates(self, time_now: float, states: np.ndarray) -> np.ndarray | list[float]:
        if time.process_time() > self.deadline:
            raise TimeUp
        return self.equations.rates(time_now, states)


def _scipy(solver: str, task: _Task) -> tuple[np.ndarray, np.ndarray] | None:
    from scipy.integrate import solve_ivp

    found = solve_ivp(
        task.rates,
        (0.0, task.span),
        np.zeros(task.equations.states),
        method=solver,
        jac=task.equations.jacobian,
        rtol=task.relative,
        atol=task.absolute,
        max_step=task.largest,
    )
    return (found.t, task.equations.output(found.y)) if found.success else None


def _ida(task: _Task) -> tuple[np.ndarray, np.ndarray] | None:
    from sksundae.ida import IDA as Solver

    count, stored = task.equations.states, np.array(task.equations.stored)

    def residual(time_now: float, y: np.ndarray, rate: np.ndarray, out: np.ndarray) -> None:
        out[:] = stored * rate - task.rates(time_now, y)

    def slopes(
        time_now: float, y: np.ndarray, rate: np.ndarray, found: np.ndarray, weight: float, out: np.ndarray
    ) -> None:
        out[:] = -task.equations.jacobian(time_now, y)
        out[range(count), range(count)] += weight * stored

    limits = {"rtol": task.relative, "atol": task.absolute, "max_step": task.largest}
    solver = Solver(residual, jacfn=slopes, max_num_steps=_STEPS_AT_MOST, **limits)
    with _silent():
        found = solver.solve(np.array([0.0, task.span]), np.zeros(count), np.zeros(count))
    return (found.t, task.equations.output(found.y.T)) if found.success else None
