"""Energy stored in an element and lost in its own resistances, from its port signals and what is given of it.

Solvers and the language are not known here.
"""

from __future__ import annotations


from grammar.quantities import JOULE, VOLT, WATT
from simcore.design.circuit import Element
from simcore.figures import polynomials
from simcore.figures.record import Record
from simcore.figures.signal import Signal


def stored_energy(record: Record, element: Element) -> Signal | None:
    """Energy in the fields of an element over the whole study, J; None for an element that stores none."""
    former = _FORMERS.get(element.kind)
    return None if former is None else former(record, element)


def total_stored_energy(record: Record) -> Signal:
    """Energy stored in all elements together, J."""
    total = Signal.constant(record.times, 0.0, JOULE)
    for element in record.circuit.elements.values():
        energy = stored_energy(record, element)
        if energy is not None:
            total = total + energy
    return total


def resistive_loss(record: Record, element: Element) -> Signal:
    """Power lost in the resistances of an element that stores energy, W."""
    total = Signal.constant(record.times, 0.0, WATT)
    for port, resistance in zip(element.ports, _resistances(element), strict=True):
        current = record.port_current(element, port)
        total = total + (current * current).scaled(resistance, WATT)
    leakage = element.given.get("leakage_resistance")
    if element.kind == "capacitor" and leakage:
        inner = _inner_voltage(record, element)
        total = total + (inner * inner).scaled(1.0 / leakage, WATT)
    return total


def _resistances(element: Element) -> tuple[float, ...]:
    given = element.given
    if element.kind == "transformer":
        return tuple(given.get("resistance", (0.0,) * len(element.ports)))
    if element.kind in ("source", "three_phase"):
        return (0.0,) * len(element.ports)
    return (float(given.get("series_resistance", 0.0)),) * len(element.ports)


def _inner_voltage(record: Record, element: Element) -> Signal:
    """Voltage across a capacitance and its leakage, behind the resistance and inductance of the leads, V."""
    given, port = element.given, element.ports[0]
    inner, current = record.between(port.a, port.b), record.port_current(element, port)
    if given.get("series_resistance"):
        inner = inner - current.scaled(given["series_resistance"], VOLT)
    if given.get("series_inductance"):
        inner = inner - slope(current).scaled(given["series_inductance"], VOLT)
    return inner


def _capacitor(record: Record, element: Element) -> Signal:
    inner = _inner_voltage(record, element)
    energy = (inner * inner).scaled(0.5 * element.given["capacitance"], JOULE)
    inductance = element.given.get("series_inductance")
    if inductance:
        energy = energy + _half_square(record.port_current(element, element.ports[0]), inductance)
    return energy


def _inductor(record: Record, element: Element) -> Signal:
    return _half_square(record.port_current(element, element.ports[0]), element.given["inductance"])


def _source(record: Record, element: Element) -> Signal | None:
    inductance = element.given.get("series_inductance")
    if not inductance:
        return None
    total = Signal.constant(record.times, 0.0, JOULE)
    for port in element.ports:
        total = total + _half_square(record.port_current(element, port), inductance)
    return total


def _transformer(record: Record, element: Element) -> Signal | None:
    given = element.given
    turns = given.get("turns")
    if turns is None:
        return None
    currents = [record.port_current(element, port) for port in element.ports]
    total = Signal.constant(record.times, 0.0, JOULE)
    for current, leakage in zip(currents, given.get("leakage", (0.0,) * len(currents)), strict=True):
        total = total + _half_square(current, leakage)
    if given.get("magnetising"):
        joint = currents[0]
        for current, number in zip(currents[1:], turns[1:], strict=True):
            joint = joint + current * (number / turns[0])
        total = total + _half_square(joint, given["magnetising"])
    return total


def _half_square(current: Signal, inductance: float) -> Signal:
    return (current * current).scaled(0.5 * inductance, JOULE)


def slope(signal: Signal) -> Signal:
    """d/dt piece by piece, in the signal's unit a second; one order less accurate than the signal."""
    rows = polynomials.derivative(signal.coefficients) * (2.0 / signal.widths)[:, None]
    return Signal(signal.times, rows, signal.dimension)


_FORMERS = {
    "capacitor": _capacitor,
    "inductor": _inductor,
    "transformer": _transformer,
    "source": _source,
    "three_phase": _source,
}
