"""Harmonics of a current held against a table of limits: one verdict, with the order that decides.

It reads the records of solved studies and a table that came with the requirement.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from grammar.description import Call, Name
from grammar.quantities import AMPERE
from simcore.design.circuit import Requirement
from simcore.design.limits import LimitTable
from simcore.figures import element_figures, measure
from simcore.figures.evaluate import Records
from simcore.figures.expressions import name_text
from simcore.figures.figure import Figure, plain
from simcore.figures.record import DELIVERING, Record
from simcore.judge.held import ORDER, Pair, Verdict, side
from simcore.judge.outcome import State

LARGEST_CURRENT = 16.0
"""A a phase: the standard's scope ends there."""


@dataclass(frozen=True)
class Harmonic:
    """One order: rms value and limit in A with their bounds, what it came to, and the margin."""

    order: int
    figure: Figure
    limit: Figure
    state: State
    margin: Figure | None
    reason: str

    @property
    def rank(self) -> tuple[int, float]:
        """The worse state first, then the smaller margin as a share of the limit."""
        return ORDER.index(self.state), math.inf if self.margin is None else self.margin.value / self.limit.value


def judge_harmonics(requirement: Requirement, coarse: Records, fine: Records) -> Verdict:
    """Hold every order of a table; the one that is worst, or nearest to its limit, is shown."""
    study, table = requirement.study, requirement.limits
    assert isinstance(table, LimitTable)
    if study not in fine:
        return Verdict(requirement, State.UNDECIDED, reason=f"study {study} was not solved")
    name = tabled_element(requirement)
    why = unfit(name, table, fine[study])
    if why:
        return Verdict(requirement, State.NOT_JUDGED, reason=why)
    rows = harmonics(name, table, coarse[study], fine[study])
    decides = min(rows, key=lambda row: row.rank)
    failed = ", ".join(str(row.order) for row in rows if row.state is State.FAILS)
    notes = [f"order {decides.order} decides", f"above the limit: {failed}" if failed else "", decides.reason]
    notes += [*_cautions(name, table, fine[study]), table.scope]
    reason = "; ".join(note for note in notes if note)
    return Verdict(requirement, decides.state, decides.figure, decides.limit, margin=decides.margin, reason=reason)


def tabled_element(requirement: Requirement) -> str:
    """The element that a requirement with a table is about."""
    call = requirement.figure
    assert isinstance(call, Call) and isinstance(call.arguments[0], Name)
    return name_text(call.arguments[0])


def harmonics(name: str, table: LimitTable, coarse: Record, fine: Record) -> list[Harmonic]:
    """Every order of a table with its limit, on solutions that hold whole periods."""
    powers = [_input_power(name, record) for record in (coarse, fine)]
    limits = [table.at(power) for power in powers]
    pairs = [_rms_values(name, list(limits[0]), record) for record in (coarse, fine)]
    rows = []
    for order in limits[0]:
        figure = Pair(pairs[0][order], pairs[1][order])
        limit = Pair(plain(limits[0][order], AMPERE), plain(limits[1][order], AMPERE))
        state, margin, reason = side(figure, limit, 1.0, False)
        rows.append(Harmonic(order, figure.bounded, limit.bounded, state, margin, reason))
    return rows


def _rms_values(name: str, orders: list[int], record: Record) -> dict[int, Figure]:
    span = record.whole_periods()
    assert span is not None
    current = record.current(name).restrict(*span)
    frequency = _fundamental(name, record)
    return {order: measure.harmonic(current, order, frequency) for order in orders}


def _fundamental(name: str, record: Record) -> float:
    """Frequency in Hz that orders count from: that of the source itself, since a state may repeat less often."""
    own = record.part(name).element.given.get("frequency")
    return record.frequency if own is None else float(own)


def _input_power(name: str, record: Record) -> float:
    """Active power in W that comes in through an element."""
    return abs(element_figures.mean_power(record, name).value)


def unfit(name: str, table: LimitTable, record: Record) -> str:
    """Why the harmonics of an element can't be held against a table; "" where they can."""
    span = record.whole_periods()
    if span is None:
        return "the study has no whole period: harmonics need one"
    periods = (span[1] - span[0]) * _fundamental(name, record)
    if abs(periods - round(periods)) > 1e-6 or round(periods) < 1:
        return "the period of the study is no multiple of the source's"
    element = record.part(name).element
    if table.per_watt and element.kind not in (*DELIVERING, "transformer"):
        return f"{table.name} needs the active input power: name the source or the winding that it comes through"
    return ""


def _cautions(name: str, table: LimitTable, record: Record) -> list[str]:
    """What puts a design outside a published table's scope."""
    found = []
    power = _input_power(name, record)
    if table.power is not None and not table.power[0] <= power <= table.power[1]:
        found.append(f"made for {table.power[0]:g} W to {table.power[1]:g} W, and {power:.4g} W come in")
    current = measure.rms(record.window(record.current(name))).value
    if table.scope and current > LARGEST_CURRENT:
        found.append(f"made for up to {LARGEST_CURRENT:g} A a phase, and {current:.4g} A flow")
    return found
