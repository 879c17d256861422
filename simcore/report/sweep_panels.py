"""What the pictures of a sweep show, from its table: figures over the one let that it varies, or how samples spread.

Knows plans, requirements and tables; solves nothing and draws nothing.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from grammar.mistakes import DescriptionError, Mistake
from grammar.quantities import ANGLE, NONE, PREFIXES, Dimension, unit_of
from simcore.campaign.pasting import value_text
from simcore.campaign.plan import Plan
from simcore.campaign.rows import claim_of
from simcore.campaign.solver import Task
from simcore.design.circuit import Circuit, PlannedList, PlannedRange, PlannedSweep, Requirement
from simcore.figures.evaluate import figure_of
from simcore.figures.polynomials import Array
from simcore.judge.outcome import State
from simcore.judge.verdict import spread
from simcore.opening import Opened, open_project
from simcore.report.panels import prefix_of
from simcore.report.traces import heading

MOST_PANELS = 24
MOST_BYTES = 10**9


@dataclass(frozen=True)
class SweepPanel:
    """A figure in every variant, in the unit of its axis, nan where there is none; shape (variants,).

    title: study, figure and unit; fails: where a requirement on it does not hold; limits: those that no variant
    moves
    """

    title: str
    values: Array
    fails: npt.NDArray[np.bool_]
    limits: tuple[float, ...]


@dataclass(frozen=True)
class SweepPicture:
    """A sweep; over: the let's values, None for samples; over_title: the let and its unit."""

    title: str
    panels: Sequence[SweepPanel]
    over: Array | None = None
    over_title: str = ""
    logarithmic: bool = False


def sweep_picture(sweep: PlannedSweep, task: Task, path: Path) -> SweepPicture | None:
    """The picture of a sweep from its table; None where it neither varies one let alone nor draws samples alone.

    Raises DescriptionError where the table is not there, or not one of this sweep as it is described now.
    """
    plan, axis = task.plan, sweep.axes[0]
    samples = any(each.drawn for each in plan.axes)
    along = isinstance(axis, PlannedRange | PlannedList)
    if len(plan.axes) != 1 or None in plan.lets.values() or not (samples or along):
        return None
    columns = _table(path, plan, f"Run `bulkrail sweep --sweep {sweep.name}` on the description, with the same --out.")
    panels = list(_panels(task, columns))[:MOST_PANELS]
    title = f"{sweep.name}: {plan.sentence}"
    if samples:
        return SweepPicture(f"{title}; {len(plan)} variants", panels)
    let, column = next(iter(_lets(plan)))
    factor, over_title = _axis(let, plan.lets[let] or NONE, column)
    order = np.argsort(column, kind="stable")
    panels = [replace(each, values=each.values[order], fails=each.fails[order]) for each in panels]
    logarithmic = isinstance(axis, PlannedRange) and axis.logarithmic
    return SweepPicture(title, panels, factor * column[order], over_title, logarithmic)


def _axis(name: str, dimension: Dimension, column: Array) -> tuple[float, str]:
    """What brings a column to the unit of its axis, and what the axis says."""
    finite = np.abs(column[np.isfinite(column)])
    prefix = prefix_of(float(finite.max(initial=0.0)), dimension) if dimension != ANGLE else ""
    unit = prefix + unit_of(dimension)
    return 1.0 / PREFIXES[prefix], f"{name} in {unit}" if unit else name


def _lets(plan: Plan) -> Iterator[tuple[str, Array]]:
    """Each let of a plan of one axis with its values, as a table has them."""
    for place, (let, dimension) in enumerate(plan.lets.items()):
        column = np.array([row[place] for row in plan.axes[0].rows], dtype=np.float64)
        yield let, np.degrees(column) if dimension == ANGLE else column


def _table(path: Path, plan: Plan, cure: str) -> dict[str, list[str]]:
    """The columns of a sweep's table, whose variants are those of the plan."""
    try:
        if path.stat().st_size > MOST_BYTES:
            raise ValueError("it is too large")
        with path.open(newline="", encoding="utf-8") as file:
            headings, *rows = csv.reader(file)
        columns = dict(zip(headings, map(list, zip(*rows, strict=True)), strict=True))
        for let, expected in _lets(plan):
            found = _numbers(columns[heading(let, plan.lets[let] or NONE)])
            if found.shape != expected.shape or np.any(found != expected):
                raise KeyError(let)
    except FileNotFoundError:
        raise DescriptionError([Mistake("there is no table of the sweep", cure, file=str(path))]) from None
    except (OSError, ValueError, csv.Error) as fault:
        raise DescriptionError([Mistake(f"it can't be read as a table: {fault}", cure, file=str(path))]) from None
    except KeyError:
        what = "it is not the table of this sweep as it is now described"
        raise DescriptionError([Mistake(what, cure, file=str(path))]) from None
    return columns


def _numbers(cells: Sequence[str]) -> Array:
    """Cells as numbers; an empty one is nan."""
    return np.array([float(cell) if cell else math.nan for cell in cells], dtype=np.float64)


def _panels(task: Task, columns: Mapping[str, list[str]]) -> Iterator[SweepPanel]:
    """One for each required figure that the table has."""
    circuits = [task.opened.circuit, *_others(task.opened, task.plan)]
    by_figure: dict[str, list[Requirement]] = {}
    for requirement in spread(task.opened.circuit, task.opened.circuit.requirements):
        column = heading(claim_of(requirement).heading, requirement.dimension)
        if column in columns and requirement.study in task.studies:
            by_figure.setdefault(column, []).append(requirement)
    for column, requirements in by_figure.items():
        verdicts = [columns.get(f"{each.study}: {each.wording}", []) for each in requirements]
        fails = [any(state != State.HOLDS for state in row) for row in zip(*verdicts, strict=True)]
        limits = [limit for each in requirements for limit in _limits(each, circuits)]
        values, dimension = _numbers(columns[column]), requirements[0].dimension
        factor, title = _axis(claim_of(requirements[0]).heading, dimension, values)
        yield SweepPanel(
            title,
            factor * values,
            np.array(fails, dtype=bool),
            tuple(factor * limit for limit in dict.fromkeys(limits)),
        )


def _others(opened: Opened, plan: Plan) -> Iterator[Circuit]:
    """The circuit with each let at the least and the largest value that it takes, to see what follows it."""
    for let, column in _lets(plan):
        for index in (int(column.argmin()), int(column.argmax())):
            value = plan.variant(index).values[let]
            changed, mistakes = open_project(opened.project, {let: value_text(value)})
            if not mistakes:
                yield changed.circuit


def _limits(requirement: Requirement, circuits: Sequence[Circuit]) -> Iterator[float]:
    """The limits of a requirement that are the same in every circuit and need no solution."""
    for place in range(2):
        found = [_limit(other, place) for circuit in circuits for other in _same(requirement, circuit)]
        if len(found) == len(circuits) and len(set(found)) == 1 and math.isfinite(found[0]):
            yield found[0]


def _same(requirement: Requirement, circuit: Circuit) -> list[Requirement]:
    """The requirement as it is in another circuit: where it stands among those of its study on the same figure."""
    return [
        other
        for other in circuit.requirements
        if (other.study, other.written, other.relation, other.span)
        == (requirement.study, requirement.written, requirement.relation, requirement.span)
    ][:1]


def _limit(requirement: Requirement, place: int) -> float:
    """The first or second limit of a requirement as a table has it; nan where there is none, or it needs a solution."""
    expression = (requirement.bound, requirement.upper)[place]
    if expression is None:
        return math.nan
    figure = figure_of(expression, requirement.study, {})
    value = figure.value if figure.defined else math.nan
    return math.degrees(value) if figure.dimension == ANGLE else float(value)
