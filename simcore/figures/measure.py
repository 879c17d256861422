"""Figures of signals: definite integrals, extrema, crossings and harmonics of piecewise polynomials.

Each takes signals that run over the judged window and returns a Figure. Circuits and solutions are not known here.
Source of mean, rms value, form, crest and ripple factor: IEC 60050-103; of the others: as their docstrings say.
"""

from __future__ import annotations

import math

import numpy as np

from grammar.quantities import ANGLE, NONE, SECOND
from simcore.figures import polynomials
from simcore.figures.figure import Figure, undefined
from simcore.figures.signal import Signal

NEGLIGIBLE = 1e-9
"""A mean (or a fundamental) below this share of the rms value counts as zero: no factor over it has a meaning."""

CONDUCTING = 1e-3
"""A diode counts as conducting while its current is above this share of its peak."""

ROUNDING = 1e-9
"""Share of a length below which what is left of it counts as none."""

_POINTS, _WEIGHTS = np.polynomial.legendre.leggauss(24)


def _rms(signal: Signal) -> float:
    return math.sqrt(max(0.0, signal.inner(signal) / signal.span))


def _mean(signal: Signal) -> float:
    return signal.integral() / signal.span


def mean(signal: Signal) -> Figure:
    """Integral over the window over its length; the signal's unit."""
    return Figure(_mean(signal), signal.dimension, scale=_rms(signal))


def rms(signal: Signal) -> Figure:
    """Square root of the mean square; the signal's unit."""
    return Figure(_rms(signal), signal.dimension)


def peak(signal: Signal) -> Figure:
    """Largest magnitude; the signal's unit."""
    return Figure(signal.largest_magnitude(), signal.dimension)


def valley(signal: Signal) -> Figure:
    """Lowest value; the signal's unit."""
    return Figure(signal.lowest(), signal.dimension, scale=signal.largest_magnitude())


def ripple(signal: Signal) -> Figure:
    """Highest minus lowest value; the signal's unit."""
    highest, lowest = signal.highest(), signal.lowest()
    return Figure(highest - lowest, signal.dimension, scale=max(abs(highest), abs(lowest)))


def ripple_factor(signal: Signal) -> Figure:
    """Rms value of the alternating part over the magnitude of the mean; no unit."""
    average, effective = abs(_mean(signal)), _rms(signal)
    if average <= NEGLIGIBLE * effective:
        return undefined(NONE, "the mean is zero")
    return Figure(_rms(signal - _mean(signal)) / average, NONE, scale=effective / average)


def form_factor(signal: Signal) -> Figure:
    """Rms value over the mean of the magnitude, which for a current or voltage of one sign is the mean; no unit."""
    rectified = _mean(abs(signal))
    if rectified == 0.0:
        return undefined(NONE, "the signal is zero throughout")
    return Figure(_rms(signal) / rectified, NONE)


def crest_factor(signal: Signal) -> Figure:
    """Largest magnitude over rms value; no unit."""
    effective = _rms(signal)
    if effective == 0.0:
        return undefined(NONE, "the signal is zero throughout")
    return Figure(signal.largest_magnitude() / effective, NONE)


def i2t(signal: Signal) -> Figure:
    """Integral of the square over the window; unit squared times s."""
    return Figure(signal.inner(signal), signal.dimension * signal.dimension * SECOND)


def largest_i2t(current: Signal, length: float, repeats: bool) -> float:
    """The largest integral of the square over any stretch of a length (s) within the window; unit squared times s.

    repeats: the window is a period of what goes on for ever; else a window that is shorter than the stretch counts
    whole. Exact: the running integral is a polynomial too, and the largest difference over the length its extremum.
    """
    square = current * current
    whole = square.integral()
    if not repeats:
        return whole if square.span <= length else _largest_sum(square, length)
    periods = math.floor(length / square.span)
    rest = length - periods * square.span
    twice = Signal(
        np.concatenate([square.times, square.times[1:] + square.span]),
        np.concatenate([square.coefficients, square.coefficients]),
        square.dimension,
    )
    return periods * whole + (_largest_sum(twice, rest) if rest > ROUNDING * length else 0.0)


def _largest_sum(signal: Signal, length: float) -> float:
    """The largest integral over a stretch of a length that lies inside the span."""
    running = signal.running()
    later = Signal(running.times + length, running.coefficients, running.dimension)
    return (running.restrict(signal.start + length, signal.end) - later).highest()


def energy(power: Signal) -> Figure:
    """Integral of a power over the window, J."""
    scale = power.span * _rms(power)
    return Figure(power.integral(), power.dimension * SECOND, scale=scale)


def phasor(signal: Signal, frequency: float) -> complex:
    """Amplitude and phase of the component at a frequency in Hz: (2/T) times the integral of x exp(-2 pi j f t).

    The window must hold whole periods. Pieces are cut so that none turns through more than half a period; 24 Gauss
    points then leave rounding only.
    """
    fine = _cut_finely(signal, frequency)
    local, instants = _gauss(fine)
    turned = local * np.exp(-2j * math.pi * frequency * (instants - fine.start))
    total = np.sum(0.5 * fine.widths * (turned @ _WEIGHTS))
    return complex(2.0 / fine.span * total * np.exp(-2j * math.pi * frequency * fine.start))


def _cut_finely(signal: Signal, frequency: float) -> Signal:
    count = max(1, math.ceil(2.0 * signal.span * frequency))
    marks = np.linspace(signal.start, signal.end, count + 1)
    return signal.on(np.union1d(signal.times, marks))


def _gauss(signal: Signal) -> tuple[polynomials.Array, polynomials.Array]:
    """Values and instants at the Gauss points of each piece, shape (n, 24) both."""
    points = np.tile(_POINTS, (len(signal.widths), 1))
    instants = signal.times[:-1, None] + 0.5 * (points + 1.0) * signal.widths[:, None]
    return polynomials.values(signal.coefficients, points), instants


def harmonic(signal: Signal, order: int, frequency: float) -> Figure:
    """Rms value of the component at order times the fundamental frequency (Hz); the signal's unit."""
    value = abs(phasor(signal, order * frequency)) / math.sqrt(2.0)
    return Figure(value, signal.dimension, scale=_rms(signal))


def distortion(signal: Signal, frequency: float) -> Figure:
    """Rms value of all that is neither mean nor fundamental, over the fundamental: every order counts; no unit.

    The rest is integrated as such, not as a difference of squares, so that a nearly pure sine keeps its digits.
    Source: common practice: the total harmonic distortion of a periodic signal, not cut off at an order.
    """
    fundamental, average = phasor(signal, frequency), _mean(signal)
    if abs(fundamental) <= NEGLIGIBLE * _rms(signal):
        return undefined(NONE, "the fundamental is zero")
    fine = _cut_finely(signal, 2.0 * frequency)
    local, instants = _gauss(fine)
    sine = (fundamental * np.exp(2j * math.pi * frequency * instants)).real
    squares = ((local - average - sine) ** 2) @ _WEIGHTS
    rest = math.sqrt(float(np.sum(0.5 * fine.widths * squares)) / fine.span)
    return Figure(rest * math.sqrt(2.0) / abs(fundamental), NONE, scale=1.0)


def time_until(signal: Signal, level: float, begin: float, below: bool) -> Figure:
    """Time in s from `begin` until the signal is at a level or beyond it (below, else above).

    signal: over the whole study from begin on; level in its unit
    Where that does not come the value is inf, and `beyond` the time that was seen. A signal that is beyond the level at
    the start has a time of zero, and the note says so.
    """
    seen = signal.restrict(begin, signal.end)
    found = seen.first_below(level) if below else (-seen).first_below(-level)
    if found is None:
        return Figure(math.inf, SECOND, note="does not come within the study", beyond=seen.span)
    if found <= begin:
        side = "below" if below else "above"
        return Figure(0.0, SECOND, note=f"{side} the level from the start", scale=signal.end)
    return Figure(found - begin, SECOND, scale=signal.end)


def conduction_angle(current: Signal, frequency: float) -> Figure:
    """Angle of a supply period during which a diode conducts: 2 pi f times the mean time a period, rad.

    Conducting means a current above CONDUCTING of its peak: an exponential diode has no instant at which it starts. A
    diode that never conducts has angle zero. Source: common practice for the angle; the threshold has no source.
    """
    highest = current.highest()
    if highest <= 0.0:
        return Figure(0.0, ANGLE, scale=2.0 * math.pi)
    share = current.time_above(CONDUCTING * highest) / current.span
    return Figure(2.0 * math.pi * share, ANGLE, scale=2.0 * math.pi)
