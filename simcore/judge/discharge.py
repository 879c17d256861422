"""The voltage that is left some time after disconnection, held against a table of limits by capacitance.

It reads the records of solved studies and a table that came with the requirement.
"""

from __future__ import annotations

import math

from grammar.quantities import FARAD, SECOND, VOLT, show
from simcore.design.accessible import DischargeTable
from simcore.design.circuit import Circuit, Requirement
from simcore.design.graph import port_name
from simcore.design.study_kinds import Nature
from simcore.figures import measure
from simcore.figures.evaluate import Records
from simcore.figures.figure import Figure, plain
from simcore.figures.record import Record
from simcore.judge.harmonics import tabled_element
from simcore.judge.held import Pair, Verdict, side
from simcore.judge.outcome import State

_DIGITS = 3


def judge_discharge(requirement: Requirement, coarse: Records, fine: Records) -> Verdict:
    """Hold the largest voltage across an element, from some time after the first event of a transient on, against what
    the capacitance across it may have; also said is when it gets there."""
    study, table = requirement.study, requirement.limits
    assert isinstance(table, DischargeTable)
    if study not in fine:
        return Verdict(requirement, State.UNDECIDED, reason=f"study {study} was not solved")
    record, name = fine[study], tabled_element(requirement)
    start = record.begin() + table.after
    if record.solution.study.nature is not Nature.COURSE or start >= float(record.times[-1]):
        why = f"only a transient that lasts {show(table.after, SECOND)} beyond its first event shows what is left then"
        return Verdict(requirement, State.NOT_JUDGED, reason=why)
    capacitance = capacitance_across(record.circuit, name)
    limit = table.at(capacitance)

    def left(record: Record) -> Figure:
        voltage = record.voltage(name)
        return record.granted(measure.peak(voltage.restrict(record.begin() + table.after, voltage.end)))

    figure, held = Pair.of(left, coarse[study], record), Pair.exact(plain(limit, VOLT))
    state, margin, reason = side(figure, held, 1.0, False)
    notes = [f"{show(capacitance, FARAD, _DIGITS)} across it", _arrival(record, name, limit), reason, table.scope]
    said = "; ".join(note for note in notes if note)
    return Verdict(requirement, state, figure.bounded, held.fine, margin=margin, reason=said)


def capacitance_across(circuit: Circuit, name: str) -> float:
    """The capacitance between the ends of an element or port, F: of the capacitors that lie right across it."""
    ports = {port_name(element, port): port for element in circuit.elements.values() for port in element.ports}
    ends = {ports[name].a, ports[name].b}
    return math.fsum(
        float(element.given["capacitance"])
        for element in circuit.elements.values()
        if element.kind == "capacitor" and {element.ports[0].a, element.ports[0].b} == ends
    )


def _arrival(record: Record, name: str, limit: float) -> str:
    """When the voltage first is at its limit, from the disconnection on."""
    voltage = record.voltage(name)
    found = measure.time_until(abs(voltage), limit, record.begin(), below=True)
    if math.isinf(found.value):
        return f"{show(limit, VOLT)} are not reached within the study"
    return f"{show(limit, VOLT)} are reached after {show(found.value, SECOND, _DIGITS)}"
