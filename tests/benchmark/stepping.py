"""Start-up from rest: cost of a cycle at equal measured error, against general solvers on hand-written equations."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from simcore.equations.compiled import available
from simcore.equations.kernel import KernelCache
from simcore.report.tables import table
from tests.benchmark.circuits import Bridge, Ladder
from tests.benchmark.equations import BridgeNodes, Equations, equations_of
from tests.benchmark.general import IDA, SCIPY, Run, ida_is_here, run_general
from tests.benchmark.own import OwnRun, circuit_of, compiled_kernels, run_own

ERRORS = (1e-3, 1e-4)
BOUND = 3.0
"""CPU time in s that one run of a general solver is given."""
TARGETS = {IDA: 10.0, "scipy": 50.0}
"""How many times our cost the others' should at least be, on the bridge at an error of 1e-4."""
CASES: tuple[tuple[Bridge | Ladder, int], ...] = (
    (Bridge(), 10),
    (Ladder(3), 10),
    (Ladder(10), 5),
    (Ladder(20), 3),
    (Ladder(50), 2),
)
COMPILED_AT_MOST = 10
"""Stages of a ladder up to which its run is compiled: beyond, compilation takes minutes."""
OURS, COMPILED = "ours", "ours, compiled"
NODES = ", nodes"
"""Behind the name of a solver that was given the circuit as nodal analysis gives it."""
STRAY = 1e-9
"""F at each a.c. terminal, where a solver takes differential equations only."""
_TOLERANCES = [10.0 ** (-exponent / 2.0) for exponent in range(4, 15)]
_REFERENCE = 1e-10
_REFERENCE_BOUND = 60.0
_REPEATS = 3
_BRIEF = 0.5
_FAILURES = 5
"""Runs that fail or take too long after which a solver is given no tighter tolerance."""


@dataclass(frozen=True)
class Reached:
    """The cheapest run that reached an error: its tolerance, its error, ms of CPU time a cycle."""

    tolerance: float
    error: float
    cycle: float
    run: Run


class Reference:
    """A run of the hand-written equations at a tight tolerance, and the errors of other runs by it."""

    def __init__(self, spec: Bridge | Ladder, cycles: int):
        period = 1.0 / spec.frequency
        limits = (cycles * period, period, spec.crest, _REFERENCE, _REFERENCE_BOUND)
        run = run_general("LSODA", equations_of(spec), *limits) or run_general("Radau", equations_of(spec), *limits)
        if run is None:
            raise RuntimeError(f"no reference for {spec.name} within {_REFERENCE_BOUND:g} s")
        self._times, self._output = np.r_[0.0, run.times], np.r_[0.0, run.output]
        self._peak = float(np.max(np.abs(run.output)))

    def error(self, run: Run) -> float:
        """Largest error of the output at the points of a run, over the output's peak."""
        from scipy.interpolate import CubicSpline

        exact = CubicSpline(self._times, self._output)
        return float(np.max(np.abs(run.output - exact(run.times)))) / self._peak


def _sweep(run: Callable[[float], Run | None], reference: Reference, cycles: int) -> dict[float, Reached]:
    """By error, the cheapest run that reached it; tolerances from loose to tight, until the least error is reached."""
    found: dict[float, Reached] = {}
    failures = 0
    for tolerance in _TOLERANCES:
        done = _fastest(lambda tolerance=tolerance: run(tolerance))
        if done is None:
            failures += 1
            if failures > _FAILURES and tolerance < _TOLERANCES[2]:
                break
            continue
        error = reference.error(done)
        for wanted in ERRORS:
            cycle = done.seconds / cycles * 1e3
            if error <= wanted and (wanted not in found or cycle < found[wanted].cycle):
                found[wanted] = Reached(tolerance, error, cycle, done)
        if error <= ERRORS[-1]:
            break
    return found


def _fastest(run: Callable[[], Run | None]) -> Run | None:
    """The fastest of three runs, or the only one where it took long."""
    runs = [run()]
    while len(runs) < _REPEATS and runs[-1] is not None and runs[-1].seconds < _BRIEF:
        runs.append(run())
    done = [each for each in runs if each is not None]
    return min(done, key=lambda each: each.seconds) if done else None


def _measured(spec: Bridge | Ladder, cycles: int) -> dict[str, dict[float, Reached]]:
    """By solver and error, the cheapest run."""
    reference, span, period = Reference(spec, cycles), cycles / spec.frequency, 1.0 / spec.frequency
    circuit = circuit_of(spec.text)
    caches, compilation = {OURS: KernelCache()}, 0.0
    if available() and (isinstance(spec, Bridge) or spec.stages <= COMPILED_AT_MOST):
        caches[COMPILED], compilation = compiled_kernels(circuit, spec)
    found = {}
    for name, cache in caches.items():
        run_own(circuit, spec, period, ERRORS[0], cache)
        found[name] = _sweep(
            lambda tolerance, cache=cache: run_own(circuit, spec, span, tolerance, cache), reference, cycles
        )
    for solver in (*([IDA] if ida_is_here() else []), *SCIPY):
        forms: dict[str, Callable[[], Equations]] = {solver: lambda: equations_of(spec)}
        if isinstance(spec, Bridge):
            stray = 0.0 if solver == IDA else STRAY
            forms[solver + NODES] = lambda stray=stray: BridgeNodes(spec, stray)
        for name, form in forms.items():
            found[name] = _sweep(
                lambda tolerance, solver=solver, form=form: run_general(
                    solver, form(), span, period, spec.crest, tolerance, BOUND
                ),
                reference,
                cycles,
            )
    if COMPILED in caches:
        print(f"{spec.name}: compiled in {compilation:.1f} s of CPU time")
    return found


def _cost_rows(spec: Bridge | Ladder, found: dict[str, dict[float, Reached]]) -> list[list[str]]:
    rows = []
    for wanted in ERRORS:
        own = found[OURS].get(wanted)
        for solver, reached in found.items():
            best = reached.get(wanted)
            head = [spec.name, f"{wanted:g}", solver]
            if best is None:
                rows.append([*head, "", "", "", "not reached", "", ""])
                continue
            ratio = best.cycle / own.cycle if own else float("nan")
            cells = [f"{best.tolerance:.0e}", f"{best.error:.1e}", f"{best.run.steps}", f"{best.cycle:.3g}"]
            rows.append([*head, *cells, f"{ratio:.2g}", _target(spec, wanted, solver, found)])
    return rows


def _target(spec: Bridge | Ladder, wanted: float, solver: str, found: dict[str, dict[float, Reached]]) -> str:
    if not isinstance(spec, Bridge) or wanted != ERRORS[-1]:
        return ""
    if solver == IDA:
        return f">= {TARGETS[IDA]:g}"
    costs = {name: found[name][wanted].cycle for name in SCIPY if wanted in found[name]}
    return f">= {TARGETS['scipy']:g}" if costs and solver == min(costs, key=lambda name: costs[name]) else ""


def _work_rows(spec: Bridge | Ladder, cycles: int, found: dict[str, dict[float, Reached]]) -> list[list[str]]:
    rows = []
    for name in (OURS, COMPILED):
        for wanted, best in found.get(name, {}).items():
            assert isinstance(best.run, OwnRun)
            counts = best.run.counts
            iteration = best.run.seconds / counts.iterations * 1e6
            stages = f"{iteration / spec.stages:.3g}" if isinstance(spec, Ladder) else ""
            shares = [f"{counts.iterations / counts.solves:.2f}", f"{100.0 * counts.rejected / counts.steps:.0f} %"]
            work = [f"{counts.iterations / cycles:.0f}", *shares, f"{iteration:.3g}", stages]
            rows.append([spec.name, f"{wanted:g}", name, f"{best.tolerance:.0e}", f"{best.error:.1e}", *work])
    return rows


def tables() -> Iterator[str]:
    """The lines of this part, circuit by circuit."""
    yield "Start-up from rest at equal measured error of the output (largest, over its peak), CPU time"
    headings = ["circuit", "error <=", "solver", "tolerance", "error", "steps", "ms/cycle", "over ours", "target"]
    work_headings = ["circuit", "error <=", "run", "tolerance", "error", "its/cycle", "its/solve", "reject", "us/it"]
    for spec, cycles in CASES:
        found = _measured(spec, cycles)
        yield from table(headings, _cost_rows(spec, found), left=3)
        yield ""
        yield from table([*work_headings, "us/it/stage"], _work_rows(spec, cycles, found), left=3)
        yield ""
    yield "its: Newton iterations; reject: rejected over accepted steps; us/it: microseconds of all an iteration."
    yield f"not reached: by no tolerance from 1e-2 to 1e-7 within {BOUND:g} s a run."
    if not ida_is_here():
        yield "SUNDIALS IDA was left out: scikit-sundae is not installed."
    yield f"nodes: the equations of all nodes; {STRAY * 1e9:g} nF at each a.c. terminal, but for IDA, which solves for them."
    if not available():
        yield "Compiled runs were left out: numba is not installed."
