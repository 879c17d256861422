"""Energy stored in the fields of elements and lost in their resistances, from the series branches of a solution.

Component kinds are not known here: a branch has a resistance, an inductance and a capacitance, whatever it belongs to.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from grammar.quantities import AMPERE, FARAD, HENRY, JOULE, OHM, VOLT, WATT, Dimension
from simcore.figures import polynomials
from simcore.figures.polynomials import Array
from simcore.figures.record import Record
from simcore.figures.signal import Signal


class _Branch(NamedTuple):
    """Constants may change from piece to piece; the voltage is that across all three."""

    resistance: Signal
    inductance: Signal
    capacitance: Signal
    current: Signal
    voltage: Signal


_DIMENSIONS: tuple[Dimension, ...] = (OHM, HENRY, FARAD, AMPERE, VOLT)


def stored_energy(record: Record, element: str) -> Signal:
    """Energy in the fields of an element over the whole study, J; zero for one that stores none."""
    return record.keep(("stored", element), lambda: _stored(record, element))


def total_stored_energy(record: Record) -> Signal:
    """Energy stored in all elements together, J."""
    total = Signal.constant(record.times, 0.0, JOULE)
    for element in record.circuit.elements:
        total = total + stored_energy(record, element)
    return total


def resistive_loss(record: Record, element: str) -> Signal:
    """Power lost in the resistances of an element, W."""
    total = Signal.constant(record.times, 0.0, WATT)
    for branch in _branches(record, element):
        if np.any(branch.resistance.coefficients):
            total = total + (branch.resistance * branch.current * branch.current).scaled(1.0, WATT)
    return total


def _stored(record: Record, element: str) -> Signal:
    total = Signal.constant(record.times, 0.0, JOULE)
    carried = record.solution.shown(element, "energy")
    if carried is not None:
        total = total + Signal.through(record.times, carried, JOULE, record.rough)
    for branch in _branches(record, element):
        if np.any(branch.inductance.coefficients):
            total = total + (branch.inductance * branch.current * branch.current).scaled(0.5, JOULE)
        if np.any(branch.capacitance.coefficients):
            inner = _across_capacitance(branch)
            total = total + (branch.capacitance * inner * inner).scaled(0.5, JOULE)
    return total


def _branches(record: Record, element: str) -> list[_Branch]:
    found = []
    for rows in record.solution.series(element):
        pairs = zip(rows, _DIMENSIONS, strict=True)
        found.append(_Branch(*(_signal(record.times, values, dimension) for values, dimension in pairs)))
    return found


def _signal(times: Array, values: Array, dimension: Dimension) -> Signal:
    """Constants stay of order zero, so that products stay short."""
    if np.all(values == values[:, :1]):
        return Signal(times, values[:, :1].copy(), dimension)
    return Signal.through(times, values, dimension)


def _across_capacitance(branch: _Branch) -> Signal:
    inner = branch.voltage
    if np.any(branch.resistance.coefficients):
        inner = inner - branch.resistance * branch.current
    if np.any(branch.inductance.coefficients):
        inner = inner - (branch.inductance * slope(branch.current)).scaled(1.0, VOLT)
    return inner


def slope(signal: Signal) -> Signal:
    """d/dt piece by piece, in the signal's unit a second; one order less accurate than the signal."""
    rows = polynomials.derivative(signal.coefficients) * (2.0 / signal.widths)[:, None]
    return Signal(signal.times, rows, signal.dimension)
