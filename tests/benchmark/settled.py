"""The periodic steady state: what finding it costs, counted in periods, against following the circuit into it.

Goes through the engine's own doors below a study, since a study tells less of how it settled.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from simcore.components.build import build_frame
from simcore.design.circuit import PlannedStudy
from simcore.report.tables import table
from simcore.solve.course import Course
from simcore.solve.engine import Engine, Stepping
from simcore.solve.settle import Settled, _by_following, _Map, settle
from simcore.solve.sources import common_period
from tests.benchmark.circuits import Bridge, Ladder
from tests.benchmark.own import circuit_of

TOLERANCE = 1e-3


@dataclass(frozen=True)
class Case:
    """A circuit, and how many periods it may take at most."""

    name: str
    spec: Bridge | Ladder
    target: int


CASES = (
    Case("bridge, R C = 0.5 s", Bridge(load=500.0), 15),
    Case("choke input", Bridge(crest=59.0, source_resistance=0.2, capacitance=2.2e-3, load=12.0, choke=50e-3), 15),
    Case("ladder 10, 100 MOhm", Ladder(10), 50),
)


Way = Callable[[Engine, float, Stepping], Settled]


def _newton(engine: Engine, period: float, stepping: Stepping) -> Settled:
    return settle(engine, 0.0, period, stepping)


def _following(engine: Engine, period: float, stepping: Stepping) -> Settled:
    """Period after period from rest, to the same estimated distance at which Newton stops."""
    way = _Map(engine, 0.0, period, stepping)
    return _by_following(way, np.array(engine.states()))


def _timed(spec: Bridge | Ladder, way: Way) -> tuple[Settled, float, float]:
    """How a circuit settled, the CPU time in s, and that of one plain period in the state found."""
    circuit = circuit_of(spec.text)
    course = Course(PlannedStudy("s", "settled"), lambda changes: circuit, None, TOLERANCE)
    frame = build_frame(circuit, math.inf)
    period = common_period(frame)
    assert period is not None
    engine, stepping = course.engine(circuit, frame, {}), course.stepping(frame, period)
    start = time.process_time()
    found = way(engine, period, stepping)
    middle = time.process_time()
    engine.advance(engine.saved[0] + period, stepping, record=False)
    return found, middle - start, time.process_time() - middle


def _row(case: Case) -> list[str]:
    found, seconds, plain = _timed(case.spec, _newton)
    assert found.multiplier is not None
    followed, long, _ = _timed(case.spec, _following)
    counts = [found.periods, found.responding, found.periods + found.responding]
    target, equal = f"<= {case.target}", f"{seconds / plain:.0f}"
    cost = [f"{seconds * 1e3:.0f}", equal, f"{found.multiplier:.4g}", str(followed.periods), f"{long * 1e3:.0f}"]
    return [case.name, *map(str, counts), target, *cost]


def tables() -> list[str]:
    """The lines of this part."""
    headings = ["circuit", "plain", "with derivatives", "together", "target", "ms", "ms over a plain period's"]
    headings += ["largest multiplier", "following: periods", "following: ms"]
    title = f"Periods to the periodic steady state from rest, at a step tolerance of {TOLERANCE:g}; emission included"
    return [title, *table(headings, [_row(case) for case in CASES])]
