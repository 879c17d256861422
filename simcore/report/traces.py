"""Traces as columns of numbers: where a study's signals are sampled, and how the columns are headed.

A trace holds each breakpoint and the middle of each step; where a signal jumps the instant stands twice. It knows
signals and circuits, and nothing of files.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from grammar.quantities import SECOND, Dimension, unit_of
from simcore.figures.overview import shown_signals
from simcore.figures.polynomials import Array
from simcore.figures.record import Record
from simcore.figures.signal import Signal

JUMP = 1e-9
"""Of a column's largest magnitude: what counts as a jump and is not rounding."""


@dataclass(frozen=True)
class Traces:
    """Sampled signals.

    times: s, never falling; a jump has its instant twice; shape (m,)
    columns: heading -> values in the SI unit the heading names; shape (m,) each
    """

    times: Array
    columns: dict[str, Array]


def heading(name: str, dimension: Dimension) -> str:
    """How a column is headed: `u_out [V]`, a plain number by its name alone."""
    unit = unit_of(dimension)
    return f"{name} [{unit}]" if unit else name


TIME = heading("time", SECOND)


def recorded(record: Record) -> dict[str, Signal]:
    """The signals a study records: the observed ones, or all node voltages and element currents where none is
    observed."""
    return {name: form(record) for name, (form, _) in shown_signals(record).items()}


def traces(signals: dict[str, Signal], every: float | None = None) -> Traces:
    """Sample signals at their breakpoints and the middles between, or each `every` s from their start."""
    headed = {heading(name, signal.dimension): signal for name, signal in signals.items()}
    if every is not None:
        first = next(iter(signals.values()))
        count = int((first.end - first.start) / every * (1.0 + 1e-12)) + 1
        times = np.minimum(first.start + every * np.arange(count), first.end)
        return Traces(times, {name: signal.value(times) for name, signal in headed.items()})
    breakpoints = _breakpoints(list(signals.values()))
    columns = {name: _samples(signal.on(breakpoints)) for name, signal in headed.items()}
    middles = 0.5 * (breakpoints[1:] + breakpoints[:-1])
    times = np.stack([breakpoints[:-1], middles, breakpoints[1:]], axis=1).ravel()
    keep = _needed(list(columns.values()))
    keep[1::3] &= ~_rough(list(signals.values()), middles)
    return Traces(times[keep], {name: column[keep] for name, column in columns.items()})


def _rough(signals: list[Signal], middles: Array) -> np.ndarray:
    """Which steps have a kink or jump inside: their middle is made for the right integral, not to be looked at."""
    result = np.zeros(len(middles), dtype=bool)
    for start, end in max((signal.rough for signal in signals), key=len):
        result |= (middles > start) & (middles < end)
    return result


def _breakpoints(signals: list[Signal]) -> Array:
    times = signals[0].times
    for signal in signals[1:]:
        if signal.times is not times:
            times = np.union1d(times, signal.times)
    return times


def _samples(signal: Signal) -> Array:
    """Values at start, middle and end of each piece, one after another, shape (3 n,)."""
    start, end = signal.piece_ends
    return np.stack([start, signal.coefficients[:, 0], end], axis=1).ravel()


def _needed(columns: list[Array]) -> np.ndarray:
    """Which samples a trace needs: a piece's start only where some column jumps there, and the very first."""
    keep = np.ones(len(columns[0]), dtype=bool)
    keep[3::3] = False
    for column in columns:
        step = np.abs(column[3::3] - column[2:-1:3])
        keep[3::3] |= step > JUMP * np.abs(column).max()
    return keep
