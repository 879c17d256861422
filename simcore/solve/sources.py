"""What the sources of a frame say about time: their common period, the phase at t = 0, the scale of their voltages."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np

from simcore.components.frame import Frame, SeriesBranch
from simcore.equations.plain import evaluate

MOST_PERIODS = 1000
_SAMPLES = 64
_ASIDE = 1e-9
"""Share of a corner's time by which an instant lies aside of it."""
_ROUNDING = 3e-15
_LEAST_CURRENT = 1e-18
"""In A, far below what any current is told to: a scale that nothing is divided by as zero, where no resistance gives
one."""


def common_period(frame: Frame) -> float | None:
    """The shortest time in s after which all sources repeat, from the ratios of their frequencies; None where there is
    no periodic source or no common period within 1000 periods of the slowest."""
    periods = [1.0 / frequency for frequency, _ in frame.sines]
    periods += [waveform.period for waveform in frame.waveforms if waveform.period is not None]
    if not periods:
        return None
    slowest = max(periods)
    multiple = 1
    for period in periods:
        ratio = slowest / period
        fraction = Fraction(ratio).limit_denominator(MOST_PERIODS)
        if abs(float(fraction) - ratio) > 1e-9 * ratio:
            return None
        multiple = math.lcm(multiple, fraction.denominator)
    return multiple * slowest if multiple <= MOST_PERIODS else None


def clock_at_phase(frame: Frame, angle: float | None) -> float:
    """The time in s on the sources' clock at which the first sine written stands at an angle (rad); 0 without
    either."""
    if angle is None or not frame.sines:
        return 0.0
    frequency, phase = frame.sines[0]
    return (angle - phase) / (2.0 * math.pi * frequency)


def largest_voltage(frame: Frame, span: float) -> float:
    """The largest source voltage over a span of time, in V, else the largest initial voltage, else 1 V."""
    inputs = _over(frame, span)
    series = [branch for branch in frame.branches if isinstance(branch, SeriesBranch)]
    peaks = [float(np.max(np.abs(value))) for value in evaluate([branch.source for branch in series], inputs)]
    if not any(peaks):
        peaks = [abs(float(value)) for value in evaluate([branch.initial_voltage for branch in series], inputs)]
    return max(peaks, default=0.0) or 1.0


def rounding_current(frame: Frame, voltage: float) -> float:
    """What rounding may make of the current of a branch, in A: a share of the sources' largest voltage in V over the
    smallest resistance, which is what flows in and out of a node in the equations."""
    series = [branch.resistance for branch in frame.branches if isinstance(branch, SeriesBranch)]
    given = evaluate([value for value in series if value.constant != 0.0], _over(frame, 0.0))
    smallest = min((float(np.min(values)) for values in given), default=math.inf)
    return max(_ROUNDING * voltage / smallest, _LEAST_CURRENT)


def _over(frame: Frame, span: float) -> dict[str, np.ndarray]:
    """The inputs of a frame over a span of time, among them both sides of every corner of its waveforms."""
    inputs = {f"p{index}": np.array(number) for index, number in enumerate(frame.numbers)}
    points = [np.array(waveform.points).T for waveform in frame.waveforms]
    corners = np.concatenate([np.zeros(0), *(instants for instants, _ in points)])
    times = np.concatenate([np.linspace(0.0, span, _SAMPLES), (1.0 - _ASIDE) * corners, (1.0 + _ASIDE) * corners])
    for waveform, (instants, values) in zip(frame.waveforms, points, strict=True):
        local = times if waveform.period is None else times % waveform.period
        inputs[f"p{waveform.base}"] = np.interp(local, instants, values)
    return inputs | {"t": times}
