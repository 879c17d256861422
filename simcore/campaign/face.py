"""Sweeps from Python: one of a design's own, one over arrays of values, or any list of variants.

It puts what a caller gives into a task; how that is solved and what comes of it is found elsewhere.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Any

from grammar.description import Expression
from grammar.expressions import nearest
from grammar.mistakes import DescriptionError, Mistake
from grammar.quantities import Quantity
from grammar.reader import read_expression
from simcore.campaign.plan import Cell, Plan, Points, plan_of
from simcore.campaign.results import AS_DESCRIBED, Results
from simcore.campaign.rows import Row
from simcore.campaign.solver import Task
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import crew_of
from simcore.design.circuit import LetValue
from simcore.opening import Opened, open_project

Given = str | float
"""A let's value: text as the language has it, or a number in the let's own SI unit."""
What = str | Mapping[str, Sequence[Given] | Any] | Iterable[Mapping[str, Given]]
"""The name of a sweep, arrays of values by let (every combination), or variants one by one."""


def sweep_task(
    opened: Opened,
    what: What,
    studies: Sequence[str],
    figures: Sequence[str],
    others: Mapping[str, Opened] | None = None,
) -> Task:
    """What a sweep asked for from Python takes; others: designs beside the one that is swept, by name. Raises
    DescriptionError with what is wrong with it."""
    circuit = opened.circuit
    limits: Sequence[str] = ()
    if isinstance(what, str):
        sweep = next((each for each in circuit.sweeps if each.name == what), None)
        if sweep is None:
            raise _wrong(f"no sweep is called {what}", what, [each.name for each in circuit.sweeps], opened)
        plan, limits = plan_of(sweep, circuit.lets), sweep.studies
    else:
        plan = _own_plan(opened, what)
    names = list(studies or limits or circuit.studies)
    judged = {requirement.study for requirement in circuit.requirements}
    if not studies and not figures and judged & set(names):
        names = [name for name in names if name in judged]
    for name in names:
        if name not in circuit.studies:
            raise _wrong(f"no study is called {name}", name, list(circuit.studies), opened)
    if not names:
        raise _wrong("there is no study", "", [], opened)
    if others:
        plan = replace(plan, axes=(Points((), (), (), designs=["", *others]), *plan.axes))
        for name, other in others.items():
            _check_other(name, other, plan, names)
    chosen = tuple(name for name in circuit.studies if name in names)
    return Task(opened, plan, chosen, tuple(map(_figure, figures)), others=dict(others or {}))


def _check_other(name: str, other: Opened, plan: Plan, studies: Sequence[str]) -> None:
    """Another design has what is varied and what is judged."""
    if name in ("", AS_DESCRIBED):
        raise _wrong(f'another design can\'t be called "{name}"', "", [], other)
    for let in plan.lets:
        if let not in other.circuit.lets:
            raise _wrong(f"{name} has no let that is called {let}", let, list(other.circuit.lets), other)
    for study in studies:
        if study not in other.circuit.studies:
            raise _wrong(f"{name} has no study that is called {study}", study, list(other.circuit.studies), other)


def sweep(task: Task, workers: int | None) -> Results:
    """All rows of a task, in the order of its variants."""
    return Results(task.plan, list(rows(task, workers)), task.claims, task.designs)


def rows(task: Task, workers: int | None) -> Iterator[Row]:
    """The rows of a task, in the order of its variants, as they are solved."""
    return solved_rows(task, crew_of(workers))


def _own_plan(opened: Opened, what: Mapping[str, Any] | Iterable[Mapping[str, Given]]) -> Plan:
    if isinstance(what, Mapping):
        return Plan("sweep", tuple(_points(opened, (let,), [(value,) for value in what[let]]) for let in what))
    variants = [dict(each) for each in what]
    lets = tuple(dict.fromkeys(let for each in variants for let in each))
    return Plan("sweep", (_points(opened, lets, [tuple(each.get(let) for let in lets) for each in variants]),))


def _points(opened: Opened, lets: tuple[str, ...], rows: Sequence[tuple[Given | None, ...]]) -> Points:
    if not rows:
        raise _wrong(f"there is no value for {', '.join(lets)}", "", [], opened)
    held = opened.circuit.lets
    for let in lets:
        if let not in held:
            raise _wrong(f"no let is called {let}", let, list(held), opened)
    values = [held[let].value for let in lets]
    dimensions = tuple(value.dimension if isinstance(value, Quantity) else None for value in values)
    texts = {(let, cell): None for row in rows for let, cell in zip(lets, row, strict=True) if isinstance(cell, str)}
    read = {(let, text): _read(opened, held[let], text) for let, text in texts}
    cells = [tuple(_cell(read, let, cell) for let, cell in zip(lets, row, strict=True)) for row in rows]
    for row in cells:
        for let, cell in zip(lets, row, strict=True):
            if isinstance(cell, float) and not math.isfinite(cell):
                raise _wrong(f"{let} = {cell} is no number", "", [], opened)
    return Points(lets, dimensions, cells)


def _cell(read: Mapping[tuple[str, str], Cell], let: str, cell: Given | None) -> Cell:
    if cell is None:
        return None
    return read[let, cell] if isinstance(cell, str) else float(cell)


def _read(opened: Opened, let: LetValue, text: str) -> Cell:
    """A value as text, seen from the top file, as a cell."""
    found, mistakes = open_project(opened.project, {let.name: text})
    if mistakes:
        raise DescriptionError(mistakes)
    value = found.circuit.lets[let.name].value
    return value if isinstance(value, str) else value.value


def _figure(text: str) -> Expression:
    expression, mistakes = read_expression(text, text)
    if mistakes or expression is None:
        raise DescriptionError(mistakes)
    return expression


def _wrong(what: str, name: str, known: Sequence[str], opened: Opened) -> DescriptionError:
    near = nearest(name, known)
    cure = (
        f"Did you mean {near}?" if near else f"There are: {', '.join(known)}." if known else "Check what it is given."
    )
    return DescriptionError([Mistake(what, cure, file=opened.project.name)])
