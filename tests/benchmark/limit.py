"""The limit for compiled runs: the same arithmetic of the bridge, written by hand for it alone and compiled.

Backward-Euler steps of one size, the Newton iteration on its four junctions with the same rules as ours (log-domain
limiting, the same test of convergence), its three nodes eliminated by hand without subtraction. What it spares is all
that a general run has to carry: choice of step and order, extrapolation, events, flags and records.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable

from tests.benchmark.circuits import SATURATION_CURRENT, Bridge
from tests.benchmark.equations import LEAK, SCALE

_STEPS_A_PERIOD = 500
_PERIODS = 200


def _junction(v: float, saturation: float, scale: float, leak: float) -> tuple[float, float]:
    """Conductance and current at zero voltage of a junction's tangent."""
    if v < -40.0 * scale:
        return leak, -saturation
    current = saturation * math.exp(v / scale)
    slope = current / scale + leak
    return slope, current - saturation + leak * v - slope * v


def _limited(new: float, old: float, critical: float, scale: float) -> tuple[float, bool]:
    """The next junction voltage, and whether it has converged."""
    change = new - old
    if new < -6.0 * scale and old < -6.0 * scale:
        return new, True
    if new > critical and change > 0.0:
        new = old + scale * math.log(1.0 + change / scale) if old > 0.0 else scale * math.log(new / scale)
    return new, abs(change) <= 1e-3 * scale


def _bridge_run() -> Callable:
    """The run, compiled at its first call."""
    from numba import njit

    junction, limited = njit(_junction, inline="always"), njit(_limited, inline="always")

    def run(spec: tuple[float, ...], step: float, steps: int) -> tuple[int, float]:
        """Newton iterations of so many steps from rest, and the output in V at their end."""
        crest, resistance, capacitance, load, frequency, saturation, scale, leak = spec
        critical = scale * math.log(scale / (math.sqrt(2.0) * saturation))
        tie, hold, drain = 1.0 / resistance, capacitance / step, 1.0 / load
        v1 = v2 = v3 = v4 = a = 0.0
        iterations = 0
        for index in range(1, steps + 1):
            push = tie * crest * math.sin(2.0 * math.pi * frequency * index * step)
            kept = hold * a
            for _ in range(50):
                iterations += 1
                g1, j1 = junction(v1, saturation, scale, leak)
                g2, j2 = junction(v2, saturation, scale, leak)
                g3, j3 = junction(v3, saturation, scale, leak)
                g4, j4 = junction(v4, saturation, scale, leak)
                bx, by, ba = push - j1 + j3, j4 - j2 - push, kept + j1 + j2
                sum_x = tie + g1 + g3
                share = tie / sum_x
                gya, cy = g2 + share * g1, g4 + share * g3
                by += share * bx
                share = g1 / sum_x
                ca = hold + drain + share * g3
                ba += share * bx
                sum_y = gya + cy
                share = gya / sum_y
                a = (ba + share * by) / (ca + share * cy)
                y = (by + gya * a) / sum_y
                x = (bx + tie * y + g1 * a) / sum_x
                done = True
                n1, ok = limited(x - a, v1, critical, scale)
                done = done and ok
                n2, ok = limited(y - a, v2, critical, scale)
                done = done and ok
                n3, ok = limited(-x, v3, critical, scale)
                done = done and ok
                n4, ok = limited(-y, v4, critical, scale)
                done = done and ok
                v1, v2, v3, v4 = n1, n2, n3, n4
                if done:
                    break
        return iterations, a

    return njit(run)


def seconds_an_iteration(spec: Bridge) -> float:
    """CPU time of a Newton iteration, the steps around it included; the fastest of some runs."""
    run = _bridge_run()
    numbers = (spec.crest, spec.source_resistance, spec.capacitance, spec.load, spec.frequency)
    given = (*numbers, SATURATION_CURRENT, SCALE, LEAK)
    step, steps = 1.0 / spec.frequency / _STEPS_A_PERIOD, _STEPS_A_PERIOD * _PERIODS
    _, output = run(given, step, steps)
    if not 0.6 * spec.crest < output < spec.crest:
        raise RuntimeError(f"the hand-written bridge settles at {output} V")
    found = []
    for _ in range(5):
        start = time.process_time()
        iterations, _ = run(given, step, steps)
        found.append((time.process_time() - start) / iterations)
    return min(found)
