"""A sweep's axes as lists of points, and their combinations as numbered variants.

It knows axes and values, and neither circuits' equations nor how variants are solved.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import prod

from grammar.mistakes import DescriptionError, Mistake
from grammar.quantities import Dimension, Quantity
from simcore.campaign.draws import CORNERS_OF_AT_MOST, corners, drawn, fraction_sentence, fractional_corners
from simcore.campaign.exact import writable
from simcore.design.circuit import (
    Change,
    LetValue,
    PlannedAxis,
    PlannedExtremes,
    PlannedFaults,
    PlannedList,
    PlannedRange,
    PlannedSweep,
)
from simcore.design.sweeps import MOST_VARIANTS

Cell = float | str | None
"""A let's value at a point: a number in its SI unit, a data sheet's name, or None where it keeps its own."""


@dataclass(frozen=True)
class Variant:
    """One combination: its number, counted from 1, the values that lets take, the faults, and the name of the design
    that takes them, "" for the one that is swept."""

    number: int
    values: dict[str, Quantity | str]
    faults: tuple[Change, ...] = ()
    design: str = ""


@dataclass(frozen=True)
class Points:
    """The points of one axis.

    lets: what it gives values; dimensions: of each, None for data sheets; rows: the values of each point
    faults: of each point, () where the axis has none; designs: of each point the name of one, likewise; drawn: whether
    the points are random draws; note: what the report must say of how they were chosen
    """

    lets: tuple[str, ...]
    dimensions: tuple[Dimension | None, ...]
    rows: Sequence[tuple[Cell, ...]]
    faults: Sequence[Change | None] = ()
    drawn: bool = False
    note: str = ""
    designs: Sequence[str] = ()

    def __len__(self) -> int:
        return len(self.faults or self.designs or self.rows)


@dataclass(frozen=True)
class Plan:
    """Every combination of the points of a sweep's axes, the last axis changing fastest. sentence: what it varies."""

    name: str
    axes: tuple[Points, ...]
    sentence: str = ""

    def __len__(self) -> int:
        return prod(len(axis) for axis in self.axes)

    @cached_property
    def lets(self) -> dict[str, Dimension | None]:
        """The lets that take values, with their dimension."""
        return {let: dimension for axis in self.axes for let, dimension in zip(axis.lets, axis.dimensions, strict=True)}

    @property
    def faulted(self) -> bool:
        """Whether any axis has faults."""
        return any(axis.faults for axis in self.axes)

    @property
    def of_designs(self) -> bool:
        """Whether any axis has designs."""
        return any(axis.designs for axis in self.axes)

    @property
    def alike(self) -> int:
        """How many variants have the same design and faults: those that may share emitted equations."""
        return prod(len(axis) for axis in self.axes if not axis.faults and not axis.designs)

    def place(self, index: int) -> tuple[int, ...]:
        """The point of each axis at which the variant of an index, counted from 0, lies."""
        found = []
        for axis in reversed(self.axes):
            index, point = divmod(index, len(axis))
            found.append(point)
        return tuple(reversed(found))

    def variant(self, index: int) -> Variant:
        """The variant of an index, counted from 0."""
        values: dict[str, Quantity | str] = {}
        faults: list[Change] = []
        design = ""
        for axis, point in zip(self.axes, self.place(index), strict=True):
            if axis.faults:
                fault = axis.faults[point]
                faults += [] if fault is None else [fault]
                continue
            if axis.designs:
                design = axis.designs[point]
                continue
            for let, dimension, cell in zip(axis.lets, axis.dimensions, axis.rows[point], strict=True):
                if isinstance(cell, str):
                    values[let] = cell
                elif cell is not None:
                    assert dimension is not None
                    values[let] = Quantity(writable(cell, dimension), dimension)
        return Variant(index + 1, values, tuple(faults), design)

    def lines(self) -> Iterator[str]:
        """Everything that makes the plan what it is, line by line."""
        for axis in self.axes:
            yield repr((axis.lets, axis.dimensions))
            yield from map(repr, axis.rows)
            yield from map(repr, axis.faults)
            yield repr(axis.designs)


def plan_of(sweep: PlannedSweep, lets: Mapping[str, LetValue], sentence: str = "") -> Plan:
    """The plan of a sweep of a design with these lets. Raises DescriptionError where it has too many variants."""
    seed = 0 if sweep.seed is None else sweep.seed
    axes = tuple(_points(axis, lets, [seed, place]) for place, axis in enumerate(sweep.axes))
    plan = Plan(sweep.name, axes, sentence)
    if len(plan) > MOST_VARIANTS:
        what = f"sweep {sweep.name} has {len(plan)} variants"
        raise DescriptionError([Mistake(what, f"At most {MOST_VARIANTS}: give its axes fewer points.", sweep.span)])
    return plan


def _points(axis: PlannedAxis, lets: Mapping[str, LetValue], seed: list[int]) -> Points:
    if isinstance(axis, PlannedRange):
        return Points((axis.let,), (axis.first.dimension,), [(value,) for value in _steps(axis)])
    if isinstance(axis, PlannedList):
        first = axis.values[0]
        dimension = first.dimension if isinstance(first, Quantity) else None
        cells = [value.value if isinstance(value, Quantity) else value for value in axis.values]
        return Points((axis.let,), (dimension,), [(cell,) for cell in cells])
    if isinstance(axis, PlannedFaults):
        faults = [Change(fault, element) for element in axis.elements for fault in axis.faults]
        return Points((), (), (), [None, *faults])
    spread = [lets[name] for name in axis.lets]
    dimensions = tuple(_quantity(let).dimension for let in spread)
    if not isinstance(axis, PlannedExtremes):
        return Points(axis.lets, dimensions, drawn(spread, axis.count, seed), drawn=True)
    nominal = tuple(_quantity(let).value for let in spread)
    if len(spread) <= CORNERS_OF_AT_MOST:
        return Points(axis.lets, dimensions, [nominal, *corners(spread)])
    chosen = fractional_corners(spread)
    note = fraction_sentence(len(chosen), len(spread))
    return Points(axis.lets, dimensions, [nominal, *chosen], note=note)


def _quantity(let: LetValue) -> Quantity:
    assert isinstance(let.value, Quantity)
    return let.value


def _steps(axis: PlannedRange) -> Iterable[float]:
    """The values of a range, its ends exactly as given."""
    first, last, spaces = axis.first.value, axis.last.value, axis.count - 1
    for step in range(axis.count):
        if step in (0, spaces):
            yield first if step == 0 else last
        elif axis.logarithmic:
            yield first * (last / first) ** (step / spaces)
        else:
            yield first + (last - first) * step / spaces
