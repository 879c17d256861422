"""What a sweep costs: periods of variants a second and a core, and settled bench supplies, plain and compiled.

Each figure comes from a process of its own, `python -m tests.benchmark.campaign KIND CIRCUIT`, so that its memory is its
own too; that process prints what it found as JSON.
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
from collections.abc import Iterator
from typing import Any

from simcore.equations.compiled import available
from simcore.equations.kernel import KernelCache
from simcore.report.tables import table
from tests.benchmark.circuits import Bridge, Ladder, SixPulse
from tests.benchmark.command import CIRCUIT, peak_memory
from tests.benchmark.own import circuit_of, compiled_kernels, run_own

TOLERANCE = 1e-3
SPECS: dict[str, tuple[Bridge | SixPulse | Ladder, int]] = {
    "bridge": (Bridge(), 20),
    "six-pulse": (SixPulse(), 20),
    "ladder 5": (Ladder(5), 10),
}
"""Circuits, and the periods of a run of each."""
KINDS = ("plain", "compiled")
_SETTLED = "bench supply"
_SWEEP, _STUDY = "spread", "full_load"
_REPEATS, _ROWS = 5, 40
_VARIANTS, _CORES, _MANY = 10_000, 2, 1_000_000


def _periods(name: str, compiled: bool) -> dict[str, float]:
    """Periods a second, the fastest of some runs."""
    spec, periods = SPECS[name]
    circuit = circuit_of(spec.text)
    kernels, seconds = compiled_kernels(circuit, spec) if compiled else (KernelCache(), 0.0)
    span = periods / spec.frequency
    run_own(circuit, spec, 1.0 / spec.frequency, TOLERANCE, kernels)
    fastest = min(run_own(circuit, spec, span, TOLERANCE, kernels).seconds for _ in range(_REPEATS))
    return {"rate": periods / fastest, "compilation": seconds}


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
    """What a process of its own finds."""
    command = [sys.executable, "-m", "tests.benchmark.campaign", kind, name]
    return json.loads(subprocess.run(command, capture_output=True, text=True, check=True).stdout)


def tables() -> Iterator[str]:
    """The lines of this part."""
    kinds = KINDS if available() else KINDS[:1]
    rows = []
    for name in SPECS:
        for kind in kinds:
            found = _measured(kind, name)
            cells = [f"{found['rate']:.0f}", f"{1e3 / found['rate']:.3g}", f"{found['compilation']:.1f}"]
            rows.append([name, kind, *cells, f"{found['memory']:.0f}"])
    yield f"Start-up from rest at a step tolerance of {TOLERANCE:g}: periods of variants a second of CPU time, one core"
    headings = ["circuit", "run", "periods/s", "ms/period", "compilation s", "peak MB"]
    yield from table(headings, rows, left=2)
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
    compiled = kind == "compiled"
    found = _variants(compiled) if name == _SETTLED else _periods(name, compiled)
    print(json.dumps({**found, "memory": peak_memory()}))
    return 0


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
