"""A recorded waveform as sines: what a measured supply is to the equations.

Knows points and arithmetic, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

ORDERS = 50
"""Highest harmonic taken of a recorded period (that of IEC 61000-4-7 for public supplies, from memory)."""

_GRID = 4096


@dataclass(frozen=True)
class Spectrum:
    """mean; harmonics: (order, peak, phase in rad of its sine at t = 0); missed: the largest distance of a point from
    their sum, over the largest magnitude."""

    mean: float
    harmonics: tuple[tuple[int, float, float], ...]
    missed: float


def spectrum(points: Sequence[tuple[float, float]], period: float) -> Spectrum:
    """The Fourier series of one period of a trace, up to order 50.

    points: (time in s, value), in rising time, covering the period that ends with the last of them; evenly spaced ones
    are taken as they are, others joined by straight lines first.
    """
    times, values = (np.array(column) for column in zip(*points, strict=True))
    inside = times > times[-1] - period * (1.0 - 1e-9)
    grid_times, grid = times[inside], values[inside]
    count = len(grid)
    steps = np.diff(grid_times)
    even = count > 2 * ORDERS and np.allclose(steps, period / count, rtol=1e-3)
    if not even:
        count = _GRID
        grid_times = times[-1] - period + period * np.arange(1, count + 1) / count
        grid = np.interp(grid_times, times, values)
    found = np.fft.rfft(grid) / count
    harmonics = []
    for order in range(1, min(ORDERS, (count - 1) // 2) + 1):
        peak = 2.0 * abs(found[order])
        phase = float(np.angle(found[order])) - 2.0 * np.pi * order * grid_times[0] / period + 0.5 * np.pi
        harmonics.append((order, float(peak), float(np.angle(np.exp(1j * phase)))))
    largest = float(np.max(np.abs(grid))) or 1.0
    kept = tuple(each for each in harmonics if each[1] > 1e-6 * largest)
    total = found[0].real + sum(p * np.sin(2.0 * np.pi * k * grid_times / period + a) for k, p, a in kept)
    return Spectrum(float(found[0].real), kept, float(np.max(np.abs(total - grid))) / largest)
