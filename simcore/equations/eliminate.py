"""Sparse symbolic elimination that does not subtract where physics gives positive conductances.

A row keeps its conductances to other unknowns and its conductance to the reference instead of the diagonal, which is
their sum. Eliminating an unknown then only adds products of positive numbers: no pivoting, no growth, no cancellation
(the star-mesh transformation; Grassmann, Taksar and Heyman, Operations Research 33, 1985). What is no node (a core's
voltage a turn) couples to
nodes with either sign: it stands aside of the nodes' sums, is eliminated last, keeps an explicit diagonal and is
guarded: the run checks that its pivot did not shrink to rounding. So is a node that other weights than +1 and -1 touch.
Order: nodes first, then unknowns whose row changes seldom, then fewest neighbours (Markowitz, Management Science 3,
1957).
"""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass, field
from heapq import heapify, heappop, heappush

from simcore.equations.values import Graph, Level, Value

Terms = dict[Hashable, list[Value]]


@dataclass
class _Row:
    mutual: Terms = field(default_factory=dict)
    ground: list[Value] = field(default_factory=list)
    diagonal: list[Value] = field(default_factory=list)
    right: list[Value] = field(default_factory=list)
    sums: bool = True


@dataclass
class _Step:
    unknown: Hashable
    factors: dict[Hashable, Value]
    right: Value


@dataclass(frozen=True)
class Guard:
    """A pivot and the sum it started from; their ratio tells how much cancelled."""

    pivot: Value
    start: Value


class TooLarge(Exception):
    """An elimination whose operations would be too many to be emitted."""


class Elimination:
    """Conductance stamps in, unknowns as graph values out; most: values in the graph, beyond which it is given up."""

    def __init__(self, graph: Graph, unknowns: list[Hashable], most: float = math.inf):
        self._graph, self._most = graph, most
        self._rows: dict[Hashable, _Row] = {unknown: _Row(sums=_is_node(unknown)) for unknown in unknowns}
        self.guards: list[Guard] = []

    def stamp(self, weights: dict[Hashable, Value], conductance: Value, injected: Value) -> None:
        """Add i = conductance * (sum of weights * unknowns) + injected, flowing out of the unknowns by their
        weights."""
        pairs = list(weights.items())
        nodes = [weight for unknown, weight in pairs if _is_node(unknown)]
        whole = self._graph.total(nodes)
        plain = conductance.positive and _is_plain(nodes)
        for unknown, weight in pairs:
            row = self._rows[unknown]
            row.right.append(-(weight * injected))
            if conductance.constant == 0.0:
                continue
            row.diagonal.append(conductance * weight * weight)
            row.ground.append(conductance * weight * whole)
            row.sums = row.sums and plain
            for other, other_weight in pairs:
                if other is not unknown:
                    row.mutual.setdefault(other, []).append(-(conductance * weight * other_weight))

    def solve(self) -> dict[Hashable, Value]:
        """Eliminate all unknowns and give each as a value; the stamps are used up. Raises TooLarge."""
        steps = []
        places = {unknown: place for place, unknown in enumerate(self._rows)}
        ranks = {unknown: self._rank(unknown) for unknown in places}
        queue = [(rank, places[unknown], unknown) for unknown, rank in ranks.items()]
        heapify(queue)
        while queue:
            rank, _, pivot = heappop(queue)
            if ranks.get(pivot) != rank:
                continue
            del ranks[pivot]
            neighbours = list(self._rows[pivot].mutual)
            steps.append(self._eliminate(pivot))
            if len(self._graph.values) > self._most:
                raise TooLarge
            for unknown in neighbours:
                rank = self._rank(unknown)
                if ranks[unknown] != rank:
                    ranks[unknown] = rank
                    heappush(queue, (rank, places[unknown], unknown))
        solution: dict[Hashable, Value] = {}
        for step in reversed(steps):
            terms = [factor * solution[other] for other, factor in step.factors.items()]
            solution[step.unknown] = self._graph.total([step.right, *terms])
        return solution

    def _rank(self, unknown: Hashable) -> tuple[bool, Level, int]:
        row = self._rows[unknown]
        entries = [*row.diagonal, *row.ground, *(term for terms in row.mutual.values() for term in terms)]
        level = max((entry.level for entry in entries), default=Level.DESIGN)
        return (not _is_node(unknown), level, len(row.mutual))

    def _eliminate(self, pivot: Hashable) -> _Step:
        total = self._graph.total
        row = self._rows.pop(pivot)
        mutual = {other: total(terms) for other, terms in row.mutual.items()}
        ground = total(row.ground)
        between = [conductance for other, conductance in mutual.items() if _is_node(other)]
        diagonal = total([ground, *between]) if row.sums else total(row.diagonal)
        if not row.sums:
            self.guards.append(Guard(diagonal, total([term for term in row.diagonal if term.operation != "neg"])))
        right = total(row.right)
        factors = {other: conductance / diagonal for other, conductance in mutual.items()}
        for other, factor in factors.items():
            target = self._rows[other]
            del target.mutual[pivot]
            target.right.append(factor * right)
            if target.sums and not row.sums:
                self._use_diagonal(target, mutual[other])
            if target.sums:
                target.ground.append(factor * ground)
            else:
                target.diagonal.append(-(factor * mutual[other]))
        self._fill(factors, mutual)
        return _Step(pivot, factors, right / diagonal)

    def _fill(self, factors: dict[Hashable, Value], mutual: dict[Hashable, Value]) -> None:
        others = list(mutual)
        for position, first in enumerate(others):
            for second in others[position + 1 :]:
                value = factors[first] * mutual[second]
                self._rows[first].mutual.setdefault(second, []).append(value)
                self._rows[second].mutual.setdefault(first, []).append(value)

    def _use_diagonal(self, row: _Row, lost: Value) -> None:
        """From here on the row's diagonal stands by itself: it starts from its sum, the pivot's share included."""
        row.sums = False
        between = [term for other, terms in row.mutual.items() if _is_node(other) for term in terms]
        row.diagonal = [*row.ground, *between, lost]


def _is_node(unknown: Hashable) -> bool:
    return isinstance(unknown, str)


def _is_plain(weights: list[Value]) -> bool:
    """Of nodes: a conductance between two, from one to the reference, or none."""
    constants = [weight.constant for weight in weights]
    if any(constant not in (1.0, -1.0) for constant in constants):
        return False
    return len(constants) < 2 or (len(constants) == 2 and constants[0] != constants[1])
