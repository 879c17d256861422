"""What every study prints without being asked: its signals, its diodes, and whether the energy books close.

It makes figures and no text; tables are laid out elsewhere.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from functools import partial

from grammar.description import Call
from grammar.quantities import JOULE, NONE, SECOND, show
from simcore.design.circuit import Element
from simcore.figures import element_figures, measure
from simcore.figures.expressions import observed
from simcore.figures.figure import Figure, bounded, undefined
from simcore.figures.record import DELIVERING, Record, UnknownName
from simcore.figures.signal import Signal, SignalError
from simcore.figures.stored import resistive_loss, stored_energy

VALVES = ("diode", "thyristor")
STORES = ("capacitor", "inductor", "transformer")

SIGNAL_COLUMNS: dict[str, Callable[[Signal], Figure]] = {
    "mean": measure.mean,
    "rms": measure.rms,
    "peak": measure.peak,
    "valley": measure.valley,
    "ripple": measure.ripple,
}

DIODE_COLUMNS: dict[str, Callable[[Record, str], Figure]] = {
    "mean": lambda record, name: measure.mean(record.window(record.current(name))),
    "rms": lambda record, name: measure.rms(record.window(record.current(name))),
    "peak": lambda record, name: measure.peak(record.window(record.current(name))),
    "reverse peak": element_figures.reverse_peak,
    "dissipation": element_figures.mean_power,
    "conduction angle": element_figures.conduction_angle,
}


@dataclass(frozen=True)
class Row:
    """One line of a table: the name as the language writes it, its wording if any, its figures by column, and whether
    they are of a temperature."""

    name: str
    label: str | None
    figures: dict[str, Figure]
    temperature: bool = False


def shown_signals(record: Record) -> dict[str, tuple[Callable[[Record], Signal], str | None]]:
    """Name -> (how to form it, label): what is observed; where nothing is, all node voltages and element currents."""
    shown: dict[str, tuple[Callable[[Record], Signal], str | None]] = {}
    for name, observe in record.circuit.observes.items():
        shown[name] = (partial(observed, name), observe.label)
    if shown:
        return shown
    for node in record.circuit.nodes():
        if node not in record.circuit.references:
            shown[f"voltage({node})"] = (partial(_node_voltage, node), None)
    for element in record.circuit.elements.values():
        for port in element.ports:
            name = element.name if len(element.ports) == 1 else f"{element.name}.{port.name}"
            shown[f"current({name})"] = (partial(_current, name), None)
    return shown


def _node_voltage(node: str, record: Record) -> Signal:
    return record.between(node)


def _current(name: str, record: Record) -> Signal:
    return record.current(name)


def signal_rows(fine: Record, coarse: Record | None = None) -> list[Row]:
    """Mean, rms, peak, valley and ripple of each shown signal over the window; coarse: the one that gives bounds."""
    rows = []
    for name, (form, label) in shown_signals(fine).items():
        figures = {}
        for column, figure in SIGNAL_COLUMNS.items():
            figures[column] = _with_bound(_of_signal(figure, form), fine, coarse)
        rows.append(Row(name, label, figures, _is_temperature(fine, name)))
    return rows


def _is_temperature(record: Record, name: str) -> bool:
    observe = record.circuit.observes.get(name)
    return observe is not None and isinstance(observe.value, Call) and observe.value.name == "temperature"


def _of_signal(figure: Callable[[Signal], Figure], form: Callable[[Record], Signal]) -> Callable[[Record], Figure]:
    return lambda record: figure(record.window(form(record)))


def diode_rows(fine: Record, coarse: Record | None = None) -> list[Row]:
    """Mean, rms and peak current (A), reverse peak (V), dissipation (W) and conduction angle (rad) of each diode."""
    rows = []
    for element in _of_kinds(fine, VALVES):
        figures = {}
        for column, figure in DIODE_COLUMNS.items():
            figures[column] = _with_bound(_of_element(figure, element.name), fine, coarse)
        rows.append(Row(element.name, element.label, figures))
    return rows


def _of_element(figure: Callable[[Record, str], Figure], name: str) -> Callable[[Record], Figure]:
    return lambda record: figure(record, name)


def _with_bound(figure: Callable[[Record], Figure], fine: Record, coarse: Record | None) -> Figure:
    try:
        value = fine.granted(figure(fine))
        return value if coarse is None else bounded(figure(coarse), value)
    except (SignalError, UnknownName) as fault:
        return undefined(NONE, str(fault))


def _of_kinds(record: Record, kinds: Iterable[str]) -> list[Element]:
    return [element for element in record.circuit.elements.values() if element.kind in kinds]


# --- energy ----------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Balance:
    """The energy books of the judged window, J: delivered = loads + diodes + windings_and_leads + stored + imbalance.

    loads: taken by all that is no source, diode or store; windings_and_leads: lost in the resistances of capacitors,
    inductors and transformers; stored: rise of the energy in their fields
    imbalance: what is missing; share: its magnitude over the energy that flowed, no unit
    note: why the books cannot close, "" where they must
    """

    delivered: Figure
    loads: Figure
    diodes: Figure
    windings_and_leads: Figure
    stored: Figure
    imbalance: Figure
    share: Figure
    note: str = ""


def balance(record: Record) -> Balance:
    """Close the books of a study over its window.

    The energy that flowed is the integral of the magnitude of the sources' power, and the change of the stored energy.
    What a source loses in its own series resistance is inside of it: its terminals count.
    """
    sources = _of_kinds(record, DELIVERING)
    flowed = sum(abs(record.window(record.power(element.name))).integral() for element in sources)
    delivered = -_taken(record, sources)
    diodes = _taken(record, _of_kinds(record, VALVES))
    stores = _of_kinds(record, STORES)
    others = [
        element for element in record.circuit.elements.values() if element.kind not in (*DELIVERING, *VALVES, *STORES)
    ]
    loads = _taken(record, others)
    losses = [record.window(resistive_loss(record, element.name)) for element in stores]
    lost = sum((loss.integral() for loss in losses), 0.0)
    stored = sum((_rise(record, element) for element in stores), 0.0)
    missing = delivered - loads - diodes - lost - stored
    flowed += abs(stored)
    share = Figure(abs(missing) / flowed, NONE) if flowed > 0.0 else undefined(NONE, "no energy flowed")
    sums = [Figure(value, JOULE, scale=flowed) for value in (delivered, loads, diodes, lost, stored, missing)]
    return Balance(sums[0], sums[1], sums[2], sums[3], sums[4], sums[5], share, _disturbance(record))


def _disturbance(record: Record) -> str:
    """An event that changes what is stored: the jump it makes is in no element's power."""
    start, end = record.solution.window
    elements = record.circuit.elements
    for time, change in record.solution.study.events:
        owner = change.target if change.target in elements else change.target.rpartition(".")[0]
        touches = change.verb == "set" or (owner in elements and elements[owner].kind in STORES)
        if touches and start <= time < end:
            return f"{change.verb} {change.target} at {show(time, SECOND)} may change what is stored without any power"
    return ""


def _taken(record: Record, elements: list[Element]) -> float:
    return sum((element_figures.energy(record, element.name).value for element in elements), 0.0)


def _rise(record: Record, element: Element) -> float:
    part = record.window(stored_energy(record, element.name))
    starts, ends = part.piece_ends
    return float(ends[-1] - starts[0])
