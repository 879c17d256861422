"""The order of the columns of a circuit diagram: groups stay in order, within one what shortens the wires.

Knows columns, the nodes that they join and levels; no elements.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

MOST_WORK = 400_000
"""Comparisons of a column with a node's line, after which an order counts as good enough."""
CROSSING = 2
"""Columns that a crossing of wires counts as."""


@dataclass(eq=False)
class Column:
    """Branches one on top of the other; group: columns of a smaller one stand left; joined: their nodes, and between
    which levels each stands."""

    group: tuple[int, int]
    names: list[str] = field(default_factory=list)
    joined: list[tuple[str, str]] = field(default_factory=list)
    spans: list[tuple[int, int]] = field(default_factory=list)

    def add(self, name: str, nodes: tuple[str, str], span: tuple[int, int]) -> None:
        """One more branch."""
        self.names.append(name)
        self.joined.append(nodes)
        self.spans.append(span)

    def free(self, low: int, high: int) -> bool:
        """Whether nothing stands between two levels."""
        return all(high <= first or low >= last for first, last in self.spans)


def ordered(columns: Sequence[Column], level: Mapping[str, int]) -> list[Column]:
    """The columns by group, within one moved or exchanged until wires are shortest and cross least; those that do no
    better elsewhere stay in the order given."""
    order = sorted(columns, key=lambda column: column.group)
    nodes = {node for column in order for pair in column.joined for node in pair}
    tries = MOST_WORK // (len(order) * len(nodes))
    best, better = _cost(order, level), True
    while better and tries > 0:
        better = False
        for column in list(order):
            at = order.index(column)
            for to, other in enumerate(order):
                if other.group != column.group or to == at or tries <= 0:
                    continue
                for trial in (_moved(order, column, to), _exchanged(order, at, to)):
                    tries -= 1
                    cost = _cost(trial, level)
                    if cost < best:
                        order, best, better, at = trial, cost, True, to
    return order


def _moved(order: Sequence[Column], column: Column, to: int) -> list[Column]:
    rest = [each for each in order if each is not column]
    return [*rest[:to], column, *rest[to:]]


def _exchanged(order: Sequence[Column], at: int, to: int) -> list[Column]:
    found = list(order)
    found[at], found[to] = found[to], found[at]
    return found


def _cost(order: Sequence[Column], level: Mapping[str, int]) -> int:
    """Columns that the lines of nodes pass, and the crossings of those lines with branches that stand."""
    reach: dict[str, tuple[int, int]] = {}
    for at, column in enumerate(order):
        for pair in column.joined:
            for node in pair:
                first = reach.get(node, (at, at))[0]
                reach[node] = first, at
    length = sum(last - first for first, last in reach.values())
    crossings = 0
    for at, column in enumerate(order):
        for low, high in column.spans:
            crossings += sum(first < at < last and low < level[node] < high for node, (first, last) in reach.items())
    return length + CROSSING * crossings
