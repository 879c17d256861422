"""Corners of piecewise linear waveforms: the line that holds from an instant on, and the next instant it changes."""

from __future__ import annotations

import bisect
import math

from simcore.components.frame import Waveform


def line(waveform: Waveform, time: float) -> tuple[float, float]:
    """Value at t = 0 and slope of the line that holds from a time on."""
    shift = 0.0
    if waveform.period is not None:
        shift = math.floor(_local(waveform, time)[1]) * waveform.period
    local = time - shift
    points = waveform.points
    after = bisect.bisect_right([instant for instant, _ in points], local * (1.0 + 1e-12))
    if after == 0:
        return points[0][1], 0.0
    if after == len(points):
        return points[-1][1], 0.0
    (t0, v0), (t1, v1) = points[after - 1], points[after]
    slope = (v1 - v0) / (t1 - t0)
    return v0 - slope * (t0 + shift), slope


def _local(waveform: Waveform, time: float) -> tuple[float, float]:
    """A time within the period and the count of periods before it; a time a rounding before a period's end is its
    end."""
    assert waveform.period is not None
    cycles = time / waveform.period
    nearest = round(cycles)
    if abs(cycles - nearest) < 1e-9:
        cycles = float(nearest)
    return time - math.floor(cycles) * waveform.period, cycles


def corner(waveform: Waveform, time: float) -> float:
    """The next instant after a time at which the waveform's line changes."""
    instants = [instant for instant, _ in waveform.points]
    if waveform.period is None:
        return next((instant for instant in instants if instant > time * (1.0 + 1e-12)), math.inf)
    local, cycles = _local(waveform, time)
    shift = math.floor(cycles) * waveform.period
    margin = 1e-9 * waveform.period
    candidates = [instant for instant in (*instants, waveform.period) if instant > local + margin]
    return shift + min(candidates)
