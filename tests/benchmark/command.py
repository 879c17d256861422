"""The command as a whole process: wall time and peak memory."""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from simcore.report.tables import table

_TIMES = 5
_CIRCUIT = Path(__file__).resolve().parents[2] / "circuits" / "bench_supply.rect"


@dataclass(frozen=True)
class Case:
    """A program's arguments, and at most how many s and MB it should take."""

    name: str
    arguments: Sequence[str]
    seconds: float | None = None
    memory: float | None = None


def _cases(folder: str) -> list[Case]:
    run = ["-m", "simcore.command", "run", str(_CIRCUIT), "--out", folder]
    return [
        Case("python -c pass", ["-c", "pass"]),
        Case("bulkrail --help", ["-m", "simcore.command", "--help"], 0.15),
        Case("import simcore", ["-c", "import simcore"]),
        Case("bulkrail look bench_supply.rect", ["-m", "simcore.command", "look", str(_CIRCUIT)]),
        Case("bulkrail run bench_supply.rect", run, 1.0, 150.0),
    ]


def _once(arguments: Sequence[str]) -> tuple[float, float | None]:
    """Wall time in s and peak memory in MB (None where the system does not tell) of a Python process."""
    start = time.perf_counter()
    process = subprocess.Popen([sys.executable, *arguments], stdout=subprocess.DEVNULL)
    if not hasattr(os, "wait4"):
        status, memory = process.wait(), None
    else:
        _, code, usage = os.wait4(process.pid, 0)
        unit = 1.0 if sys.platform == "darwin" else 1024.0
        process.returncode = status = os.waitstatus_to_exitcode(code)
        memory = usage.ru_maxrss * unit / 1e6
    if status:
        raise RuntimeError(f"{' '.join(arguments)} ended with status {status}")
    return time.perf_counter() - start, memory


def tables() -> list[str]:
    """The lines of this part."""
    rows = []
    with tempfile.TemporaryDirectory() as folder:
        for case in _cases(folder):
            runs = [_once(case.arguments) for _ in range(_TIMES)]
            wall = [seconds for seconds, _ in runs]
            peaks = [memory for _, memory in runs if memory is not None]
            cells = [f"{statistics.median(wall):.2f}", f"{min(wall):.2f}"]
            cells.append("" if case.seconds is None else f"< {case.seconds:g}")
            cells.append(f"{max(peaks):.0f}" if peaks else "not told")
            cells.append("" if case.memory is None else f"< {case.memory:g}")
            rows.append([case.name, *cells])
    headings = ["process", "median s", "least s", "target s", "peak MB", "target MB"]
    return [f"Whole processes, {_TIMES} times each", *table(headings, rows)]
