"""The command as a whole process: wall time and peak memory."""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from simcore.report.tables import table

_TIMES = 5
_CIRCUITS = Path(__file__).resolve().parents[2] / "circuits"
CIRCUIT, _SMALL = _CIRCUITS / "bench_supply.rect", _CIRCUITS / "half_wave.rect"


@dataclass(frozen=True)
class Case:
    """A program's arguments, and at most how many s and MB it should take."""

    name: str
    arguments: Sequence[str]
    seconds: float | None = None
    memory: float | None = None


def _cases(folder: str) -> list[Case]:
    run, small = (["-m", "simcore.command", "run", str(file), "--out", folder] for file in (CIRCUIT, _SMALL))
    return [
        Case("python -c pass", ["-c", "pass"]),
        Case("bulkrail --help", ["-m", "simcore.command", "--help"], 0.15),
        Case("import simcore", ["-c", "import simcore"]),
        Case("bulkrail look bench_supply.rect", ["-m", "simcore.command", "look", str(CIRCUIT)]),
        Case("bulkrail run half_wave.rect", small, 0.5, 150.0),
        Case("bulkrail run bench_supply.rect", run, 1.0, 150.0),
    ]


def peak_memory() -> float:
    """The largest memory that this process has had, in MB."""
    import resource

    unit = 1.0 if sys.platform == "darwin" else 1024.0
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * unit / 1e6


@dataclass(frozen=True)
class Used:
    """Wall and CPU time in s and peak memory in MB of a process; None where the system does not tell."""

    wall: float
    processor: float | None = None
    memory: float | None = None


def _once(arguments: Sequence[str], environment: Mapping[str, str]) -> Used:
    start = time.perf_counter()
    process = subprocess.Popen([sys.executable, *arguments], stdout=subprocess.DEVNULL, env=environment)
    if not hasattr(os, "wait4"):
        status, used = process.wait(), Used(time.perf_counter() - start)
    else:
        _, code, usage = os.wait4(process.pid, 0)
        process.returncode = status = os.waitstatus_to_exitcode(code)
        unit = 1.0 if sys.platform == "darwin" else 1024.0
        used = Used(time.perf_counter() - start, usage.ru_utime + usage.ru_stime, usage.ru_maxrss * unit / 1e6)
    if status:
        raise RuntimeError(f"{' '.join(arguments)} ended with status {status}")
    return used


def _shown(values: Sequence[float | None], form: str, pick: Callable[[Sequence[float]], float]) -> str:
    known = [value for value in values if value is not None]
    return format(pick(known), form) if known else "not told"


def tables() -> list[str]:
    """The lines of this part."""
    rows = []
    with tempfile.TemporaryDirectory() as folder:
        # Bytecode is kept, as where the package is installed, and the first run of each, which writes it, not counted.
        environment = {**os.environ, "PYTHONPYCACHEPREFIX": str(Path(folder) / "bytecode")}
        environment.pop("PYTHONDONTWRITEBYTECODE", None)
        for case in _cases(folder):
            runs = [_once(case.arguments, environment) for _ in range(_TIMES + 1)][1:]
            cells = [_shown([run.wall for run in runs], ".2f", statistics.median)]
            cells.append(_shown([run.processor for run in runs], ".2f", statistics.median))
            cells.append("" if case.seconds is None else f"< {case.seconds:g}")
            cells.append(_shown([run.memory for run in runs], ".0f", max))
            cells.append("" if case.memory is None else f"< {case.memory:g}")
            rows.append([case.name, *cells])
    headings = ["process", "wall s", "CPU s", "target s", "peak MB", "target MB"]
    return [f"Whole processes, {_TIMES} times each: median times, largest memory", *table(headings, rows)]
