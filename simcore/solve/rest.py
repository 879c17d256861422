"""The operating point: the state in which nothing moves, the sources standing at their values at one instant.

Knows the engine, and nothing of studies, kinds or figures.
"""

from __future__ import annotations

import numpy as np

from simcore.equations.assemble import System
from simcore.equations.run_interface import nearest
from simcore.solve.engine import Engine, Interrupted
from simcore.solve.failure import Reason
from simcore.solve.sources import common_period, largest_voltage
from simcore.solve.stretch import Stretch

REST_STEP = 1e15
_AGAIN = (1e9, 1e3, 1.0, 1e-3)
"""Steps in s that follow it and move nothing: at the long one an inductance is so small a resistance that its current
is lost in the rounding of its voltage, at these it comes back."""
_AT_MOST, _STILL = 200, 1e-9
"""Long steps at most, and the relative change of a column below which it stands still."""
_ROUNDING = 16.0 * float(np.finfo(float).eps)
"""Share of the largest voltage by which rounding moves any: a few additions a node."""


def rest(engine: Engine, time: float) -> Stretch:
    """The operating point with the sources at their value at a time: a step long enough for every state to settle,
    again while it still moves something (a temperature on which a resistance depends) or passes a threshold (a load
    that starts), and where that does not converge, steps from short to long (pseudo-transient continuation; Kelley and
    Keyes, 1998). Raises Interrupted."""
    engine.follow(time)
    start = list(engine.saved)
    for steps in ([REST_STEP], [10.0**exponent for exponent in range(-12, 16)]):
        engine.saved = list(start)
        try:
            for step in steps:
                engine.single(time, step)
            _stand_still(engine, time)
            for step in _AGAIN:
                record = engine.single(time, step)
        except Interrupted as stop:
            failure = stop
            continue
        return Stretch(
            engine.kernel.system,
            list(engine.numbers),
            np.array([time, time + 1.0]),
            np.stack([record, record, record])[None],
            1,
            np.array([True]),
            shortest=_AGAIN[-1],
            held=True,
        )
    raise failure


def _stand_still(engine: Engine, time: float) -> None:
    """Long steps until one passes no threshold, and moves no voltage and nothing that a branch carries. Currents follow
    from these, and are told no better than these let them."""
    system = engine.kernel.system
    sources = largest_voltage(system.frame, common_period(system.frame) or 1.0)
    last = engine.single(time, REST_STEP)
    for _ in range(_AT_MOST):
        changed = engine.switched(time)
        record = engine.single(time, REST_STEP)
        moved = _movement(system, last, record, sources)
        if not changed and not np.any(moved > 0.0):
            return
        last = record
    if changed:
        raise Interrupted(Reason.CHATTER, time, f"at {changed}")
    moving = nearest(system, -1 - len(system.states) - int(np.argmax(moved)))
    raise Interrupted(Reason.NO_CONVERGENCE, time, moving)


def _movement(system: System, last: np.ndarray, record: np.ndarray, sources: float) -> np.ndarray:
    """How far each column moved beyond what counts as standing still; sources: their largest voltage in V."""
    voltages = np.arange(len(system.columns)) < len(system.reduction.free)
    currents = np.array([column.branch is not None for column in system.columns])
    largest = max(sources, float(np.max(np.abs(record), where=voltages, initial=0.0)))
    allowed = _STILL * np.abs(record) + np.where(voltages, _ROUNDING * largest, _STILL**2)
    return np.where(currents, 0.0, np.abs(record - last) - allowed)
