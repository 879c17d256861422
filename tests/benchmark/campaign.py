"""What a sweep costs: periods of variants a second and a core, ours and general solvers', and settled bench supplies.

Each figure comes from a process of its own, `python -m tests.benchmark.campaign KIND CIRCUIT`, so that its memory is its
own too; that process prints what it found as JSON. Variants have loads of their own. All solvers are held to one error.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import partial
from typing import Any

import numpy as np

from simcore.equations.compiled import available
from simcore.equations.kernel import KernelCache
from simcore.report.tables import table
from tests.benchmark.circuits import Bridge, Ladder, SixPulse
from tests.benchmark.command import CIRCUIT, peak_memory
from tests.benchmark.equations import BridgeNodes, Equations, SixPulseNodes, equations_of
from tests.benchmark.general import IDA, SCIPY, Run, ida_is_here, run_general
from tests.benchmark.limit import seconds_an_iteration
from tests.benchmark.own import OwnRun, circuit_of, compiled_kernels, run_own

Spec = Bridge | SixPulse | Ladder
ERROR = 1e-3
"""Largest error of the output over its peak that a run may have."""
SPECS: dict[str, tuple[Spec, int]] = {
    "bridge": (Bridge(), 20),
    "six-pulse": (SixPulse(), 20),
    "ladder 5": (Ladder(5), 10),
}
"""Circuits, and the periods of a run of each."""
KINDS = ("plain", "compiled")
NODES = ", nodes"
"""Behind a general solver's name: given the equations of all nodes, with STRAY in F at each where it takes no others."""
STRAY = 1e-9
_TOLERANCES = (1e-2, 3e-3, 1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 1e-6)
_TIGHT = 1e-6
_BOUND = 20.0
"""CPU time in s that one run of a general solver is given."""
_LOADS = (1.0, 0.7, 1.6)
_SETTLED = "bench supply"
_SWEEP, _STUDY = "spread", "full_load"
_REPEATS, _ROWS = 5, 40
_VARIANTS, _CORES, _MANY = 10_000, 2, 1_000_000


def solvers_of(name: str) -> list[str]:
    """The general solvers that a circuit is given to: of it as reduced by hand, and as nodal analysis gives it."""
    general = [*([IDA] if ida_is_here() else []), *SCIPY]
    forms = {"bridge": ["", NODES], "six-pulse": [NODES]}.get(name, [""])
    return [solver + form for form in forms for solver in general]


def _form(spec: Spec, kind: str) -> Equations:
    stray = 0.0 if kind.startswith(IDA) else STRAY
    if isinstance(spec, SixPulse):
        return SixPulseNodes(spec, stray)
    return BridgeNodes(spec, stray) if kind.endswith(NODES) and isinstance(spec, Bridge) else equations_of(spec)


def _periods(name: str, kind: str) -> dict[str, float]:
    """Periods a second over variants with other loads, each by its fastest run, at the loosest tolerance that keeps to
    ERROR on the first of them; empty where none does."""
    spec, periods = SPECS[name]
    variants = [replace(spec, load=spec.load * factor) for factor in _LOADS]
    period, span, found = 1.0 / spec.frequency, periods / spec.frequency, {"compilation": 0.0}
    exact = run_own(circuit_of(spec.text), spec, span, _TIGHT, KernelCache())
    if kind in KINDS:
        circuits = [circuit_of(variant.text) for variant in variants]
        kernels = KernelCache()
        if kind == "compiled":
            kernels, found["compilation"] = compiled_kernels(circuits[0], spec)
        run_own(circuits[0], spec, period, ERROR, kernels)

        def run(index: int, tolerance: float) -> Run | None:
            return run_own(circuits[index], variants[index], span, tolerance, kernels)
    else:
        solver = kind.removesuffix(NODES)

        def run(index: int, tolerance: float) -> Run | None:
            form = _form(variants[index], kind)
            return run_general(solver, form, span, period, spec.crest, tolerance, _BOUND)

    for tolerance in _TOLERANCES:
        first = run(0, tolerance)
        error = _error(first, exact) if first is not None else float("inf")
        if error <= ERROR:
            runs = [_fastest(partial(run, index, tolerance)) for index in range(len(variants))]
            if None in runs:
                continue
            seconds = sum(each.seconds for each in runs if each is not None)
            found |= {"rate": len(runs) * periods / seconds, "error": error, "tolerance": tolerance}
            if isinstance(runs[0], OwnRun):
                found["iterations"] = sum(each.counts.iterations for each in runs) / (len(runs) * periods)  # type: ignore[union-attr]
            break
    return found


def _fastest(run: Callable[[], Run | None]) -> Run | None:
    """The fastest of some runs, or the only one where it took long; None where one failed."""
    runs = [run()]
    while len(runs) < _REPEATS and runs[-1] is not None and runs[-1].seconds < 1.0:
        runs.append(run())
    return None if runs[-1] is None else min(filter(None, runs), key=lambda each: each.seconds)


def _error(run: Run, exact: Run) -> float:
    """Largest error at the points of a run, over the peak."""
    from scipy.interpolate import CubicSpline

    held = CubicSpline(np.r_[0.0, exact.times], np.r_[0.0, exact.output])
    return float(np.max(np.abs(run.output - held(run.times)))) / float(np.max(np.abs(exact.output)))


def _variants(compiled: bool) -> dict[str, float]:
    """Variants of the bench supply a second: the first study's requirements judged, one of which takes a figure from
    another settled study, so that a variant is two settled states, each found at two tolerances."""
    from simcore.campaign.face import sweep_task
    from simcore.campaign.solver import Solver
    from simcore.opening import open_design

    opened, mistakes = open_design(CIRCUIT, {})
    if mistakes:
        raise RuntimeError(f"{CIRCUIT} has mistakes")
    solver = Solver(sweep_task(opened, _SWEEP, (_STUDY,), ()))
    solver.row(0)
    start = time.process_time()
    if compiled:
        solver.compile()
    middle = time.process_time()
    line = solver.block(0, _ROWS)
    seconds = time.process_time() - middle
    return {"rate": _ROWS / seconds, "compilation": middle - start, "bytes": len(line.encode()) / _ROWS}


def _measured(kind: str, name: str) -> dict[str, Any]:
    """What a process of its own finds, which has no machine code kept from before."""
    command = [sys.executable, "-m", "tests.benchmark.campaign", kind, name]
    with tempfile.TemporaryDirectory() as caches:
        environment = {**os.environ, "XDG_CACHE_HOME": caches}
        return json.loads(subprocess.run(command, capture_output=True, text=True, check=True, env=environment).stdout)


def tables() -> Iterator[str]:
    """The lines of this part."""
    kinds = KINDS if available() else KINDS[:1]
    rows = []
    for name in SPECS:
        plain = 0.0
        for kind in (*kinds, *solvers_of(name)):
            found = _measured(kind, name)
            if "rate" not in found:
                rows.append([name, kind, "", "", "not reached", "", "", f"{found['memory']:.0f}"])
                continue
            plain = plain or found["rate"]
            cells = [f"{found['tolerance']:.0e}", f"{found['error']:.1e}", f"{found['rate']:.0f}"]
            cells += [f"{found['rate'] / plain:.2g}", f"{found['compilation']:.1f}" if found["compilation"] else ""]
            rows.append([name, kind, *cells, f"{found['memory']:.0f}"])
            if kind == "compiled" and name == "bridge":
                limit = 1.0 / (seconds_an_iteration(SPECS[name][0]) * found["iterations"])  # type: ignore[arg-type]
                rows.append([name, "by hand, compiled", "", "", f"{limit:.0f}", f"{limit / plain:.2g}", "", ""])
    yield f"Start-up from rest, error of the output <= {ERROR:g}: periods of variants a second of CPU time, one core"
    headings = ["circuit", "run", "tolerance", "error", "periods/s", "over plain", "compilation s", "peak MB"]
    yield from table(headings, rows, left=2)
    yield "by hand: the same count of Newton iterations in a run written for this circuit alone (see limit.py)"
    yield f"not reached: at no tolerance down to 1e-6 within {_BOUND:g} s of CPU time a run"
    yield ""
    rows = []
    for kind in kinds:
        found = _measured(kind, _SETTLED)
        hours = (_VARIANTS / found["rate"] / _CORES + found["compilation"]) / 3600.0
        cells = [f"{found['rate']:.1f}", f"{1e3 / found['rate']:.0f}", f"{found['compilation']:.1f}"]
        cells += [f"{hours * 60.0:.1f}", f"{_MANY / found['rate'] / 3600.0:.1f}"]
        cells += [f"{found['bytes'] * _MANY / 1e6:.0f}", f"{found['memory']:.0f}"]
        rows.append([kind, *cells])
    yield f"Settled bench supplies ({_STUDY} judged), CPU time; {_VARIANTS} variants are projected on {_CORES} cores"
    headings = ["run", "variants/s", "ms each", "compilation s", f"{_VARIANTS}: min", f"{_MANY}: core hours"]
    yield from table([*headings, "its journal MB", "peak MB"], rows)


def main(kind: str, name: str) -> int:
    """Measure one figure and print it."""
    found = _variants(kind == "compiled") if name == _SETTLED else _periods(name, kind)
    print(json.dumps({**found, "memory": peak_memory()}))
    return 0


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
