"""The circuit as understood, in words and numbers with units: what `look` shows.

It gathers and words; it knows circuits and lays nothing out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from grammar.axes import ExtremesAxis, FaultsAxis, OverAxis, RangeAxis, SamplesAxis
from grammar.description import Expression, Name, Negative, Sweep
from grammar.quantities import AMPERE, ANGLE, KELVIN, SECOND, Dimension, Quantity, show
from grammar.writer import write_expression
from simcore.components import KINDS
from simcore.components.kind import Key
from simcore.design.circuit import Change, Circuit, Element, LetValue, PlannedStudy
from simcore.design.graph import port_name
from simcore.design.sensing import write_sensed
from simcore.design.soundness import parts_of
from simcore.design.study_kinds import STUDY_KINDS, Nature

TEMPERATURES = ("temperature", "data_temperature", "ambient", "rated_junction_temperature", "rated_temperature")
"""Keys that hold a temperature; other values in K are differences or constants."""


@dataclass(frozen=True)
class BranchShown:
    """A port of an element: its full name, kind, two ends, and the values it was given (on its first port only)."""

    name: str
    kind: str
    a: str
    b: str
    values: tuple[str, ...]
    label: str


@dataclass(frozen=True)
class PartShown:
    """A part of the circuit that only windings join to the rest, if anything does."""

    reference: str
    nodes: tuple[str, ...]
    branches: int
    loops: int


@dataclass(frozen=True)
class LetShown:
    """A let with its value and tolerance in words; tolerance "" where it has none."""

    name: str
    value: str
    tolerance: str
    label: str


@dataclass(frozen=True)
class Overview:
    """Everything that was understood. sheets: data sheet -> elements that have it; blocks: copy -> block; worked_out:
    elements alike -> lines on what their keys came to; studies and sweeps: name -> what it will do; requirements: study
    and claim, with the label where there is one."""

    name: str
    purpose: str
    ambient: str
    nodes: tuple[str, ...]
    branches: tuple[BranchShown, ...]
    parts: tuple[PartShown, ...]
    sheets: dict[str, tuple[str, ...]]
    blocks: dict[str, str]
    worked_out: dict[str, list[str]]
    warnings: tuple[str, ...]
    lets: tuple[LetShown, ...]
    observes: dict[str, str]
    studies: dict[str, str]
    requirements: tuple[tuple[str, str, str], ...]
    sweeps: dict[str, str]


def describe(circuit: Circuit) -> Overview:
    """The circuit in words."""
    sheets: dict[str, tuple[str, ...]] = {}
    for element in circuit.elements.values():
        if element.sheet:
            sheets[element.sheet] = (*sheets.get(element.sheet, ()), element.name)
    return Overview(
        circuit.name,
        circuit.purpose,
        celsius(circuit.ambient),
        tuple(circuit.nodes()),
        tuple(branch for element in circuit.elements.values() for branch in _branches(element)),
        _parts(circuit),
        sheets,
        dict(circuit.blocks),
        _worked_out(circuit),
        tuple(warnings_of(circuit)),
        tuple(_let(let) for let in circuit.lets.values()),
        {name: f"{write_expression(seen.value)} [{seen.unit}]" for name, seen in circuit.observes.items()},
        {name: sentence(study) for name, study in circuit.studies.items()},
        tuple((each.study, each.wording, each.label or "") for each in circuit.requirements),
        {sweep.name: in_words(sweep.written) for sweep in circuit.sweeps if sweep.written is not None},
    )


def _branches(element: Element) -> list[BranchShown]:
    found = []
    for port in element.ports:
        values = tuple(_values(element)) if port is element.ports[0] else ()
        name = port_name(element, port)
        found.append(BranchShown(name, element.kind, port.a, port.b, values, element.label or ""))
    return found


def _parts(circuit: Circuit) -> tuple[PartShown, ...]:
    found = []
    for nodes in parts_of(circuit):
        inside = dict.fromkeys(nodes)
        branches = sum(port.a in inside for element in circuit.elements.values() for port in element.ports)
        reference = next((node for node in circuit.references if node in inside), "")
        found.append(PartShown(reference, tuple(nodes), branches, branches - len(nodes) + 1))
    return tuple(found)


def _values(element: Element) -> list[str]:
    """What it was given; of a data sheet's keys, those that enter the equations."""
    keys = [key for key in KINDS[element.kind].keys if element.given.get(key.name) is not None]
    shown = [f"data sheet {element.sheet}"] if element.sheet else []
    return shown + [
        f"{key.name} = {value_text(key, element.given[key.name], element.unit)}"
        for key in keys
        if not (element.sheet and key.rating)
    ]


def _worked_out(circuit: Circuit) -> dict[str, list[str]]:
    """What the keys of elements came to, said once for those alike."""
    alike: dict[tuple[str, ...], list[str]] = {}
    for element in circuit.elements.values():
        describe = KINDS[element.kind].describe
        found = () if describe is None else tuple(describe(element.given))
        if found:
            alike.setdefault(found, []).append(element.name)
    return {", ".join(names): list(found) for found, names in alike.items()}


def warnings_of(circuit: Circuit) -> list[str]:
    """What a reader must be warned of in the values of elements, said once for those alike."""
    alike: dict[str, list[str]] = {}
    for element in circuit.elements.values():
        warn = KINDS[element.kind].warn
        for found in () if warn is None else warn(element.given):
            alike.setdefault(found, []).append(element.name)
    return [f"{', '.join(names)}: {found}" for found, names in alike.items()]


def value_text(key: Key, value: Any, unit: str = "") -> str:
    """A given value in words, with its unit."""
    dimension = AMPERE if key.alternatives and unit == "A" else key.dimension
    if key.form in ("text", "word") and isinstance(value, tuple):
        return f"{len(value)} points from {show(value[0][0], SECOND)} to {show(value[-1][0], SECOND)}"
    if key.form in ("text", "word"):
        return str(value)
    if key.form == "expression":
        return write_sensed(value)
    if key.form in ("ratio", "list"):
        return (" : " if key.form == "ratio" else ", ").join(show(each, dimension) for each in value)
    if key.form == "amplitude":
        values, measure, of = value
        return " ".join([" : ".join(show(each, dimension) for each in values), *([of] if of else []), measure])
    if key.form == "point":
        at = celsius(value[1]) if _at(key) == KELVIN else show(value[1], _at(key)) if value[1] is not None else ""
        return show(value[0], dimension) + (f" @ {at}" if at else "")
    if key.form == "curve":
        return ", ".join(f"{show(each, dimension)} @ {show(at, _at(key))}" for each, at in value)
    if key.form == "series":
        return f"{len(value)} points from {show(value[0][0], _at(key))} to {show(value[-1][0], _at(key))}"
    if key.form == "harmonics":
        return ", ".join(f"{order:.0f}: {share * 100.0:g} % @ {show(angle, ANGLE)}" for order, share, angle in value)
    return celsius(value) if dimension == KELVIN and key.name in TEMPERATURES else show(value, dimension)


def celsius(value: float) -> str:
    """A temperature given in K, as people read it."""
    return f"{round(value - 273.15, 6):g} degC"


def _at(key: Key) -> Dimension:
    assert key.at is not None
    return key.at


def _let(let: LetValue) -> LetShown:
    if isinstance(let.value, str):
        return LetShown(let.name, let.value, "", let.label or "")
    dimension = let.value.dimension
    tolerance = ""
    if let.low is not None and let.high is not None:
        tolerance = f"{show(let.low, dimension)} to {show(let.high, dimension)}, {let.distribution}"
    return LetShown(let.name, show(let.value.value, dimension), tolerance, let.label or "")


# --- studies and sweeps in a sentence -------------------------------------------------------------------------------


def sentence(study: PlannedStudy) -> str:
    """What a study will do."""
    text = STUDY_KINDS[study.kind].meaning
    if study.nature is Nature.COURSE:
        start = f"from the end of {study.after}" if study.after else "from rest"
        text = f"{start}, for {show(study.duration or 0.0, SECOND)}"
    if study.period is not None:
        text += f", with a period of {show(study.period, SECOND)}"
    if study.angle is not None:
        text += f", starting at {show(study.angle, ANGLE)} of the first sine"
    if study.worst is not None:
        text += f", starting at the phase of the first sine that makes {_extreme(study.worst)}"
    if study.last is not None:
        text += f", the last {study.last:.0f} periods judged"
    for change in study.changes:
        text += f"; {_action(change)}"
    for time, change in study.events:
        text += f"; at {show(time, SECOND)} {_action(change)}"
    return text


def _extreme(figure: Expression) -> str:
    """What `worst for` a figure comes to: a minus sign asks for the lowest."""
    if isinstance(figure, Negative):
        return f"{write_expression(figure.operand)} lowest"
    return f"{write_expression(figure)} highest"


def _action(change: Change) -> str:
    if change.verb == "set":
        return f"{change.target} set to {_amount(change.value)}"
    return f"{change.target} { ({'open': 'opened', 'close': 'closed', 'short': 'shorted'}[change.verb]) }"


def _amount(value: Quantity | str | None) -> str:
    return show(value.value, value.dimension) if isinstance(value, Quantity) else str(value)


def in_words(sweep: Sweep) -> str:
    """What a sweep varies."""
    return ", for each of ".join(_axis(axis) for axis in sweep.axes)


def _axis(axis: RangeAxis | OverAxis | ExtremesAxis | SamplesAxis | FaultsAxis) -> str:
    if isinstance(axis, RangeAxis):
        spacing = "logarithmic " if axis.logarithmic else ""
        ends = f"{write_expression(axis.first)} to {write_expression(axis.last)}"
        return f"{write_expression(axis.let)} from {ends} in {write_expression(axis.count)} {spacing}steps"
    if isinstance(axis, OverAxis):
        values = ", ".join(write_expression(item.value) for item in axis.values.items)
        return f"{write_expression(axis.let)} over {values}"
    if isinstance(axis, ExtremesAxis):
        return f"every corner of {_names(axis.names, 'each let with a tolerance')}, and the nominal"
    if isinstance(axis, SamplesAxis):
        return f"{write_expression(axis.count)} samples of {_names(axis.names, 'each let with a tolerance')}"
    return f"{' or '.join(axis.faults)} {_names(axis.names, f'each {axis.each}')}, one at a time"


def _names(names: tuple[Name, ...], otherwise: str) -> str:
    return ", ".join(write_expression(name) for name in names) or otherwise
