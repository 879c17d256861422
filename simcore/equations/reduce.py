"""Branches that force a voltage go first: they express unknowns by others, so that only conductances are left to
eliminate.

In the terms of modified nodal analysis (Ho, Ruehli and Brennan, IEEE Trans. Circuits and Systems 22, 1975) these are
its branch
rows: sources without impedance merge nodes to supernodes, ideal windings tie them by their turns. Their currents do no
work on the reduced equations and follow from Kirchhoff's current law afterwards.
"""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Sequence
from dataclasses import dataclass, field

from simcore.components.frame import Branch, SeriesBranch, Weights
from simcore.equations.values import Graph, Value


class ContradictoryLoop(ValueError):
    """A loop of forced voltages; `element` closes it."""

    def __init__(self, element: str):
        super().__init__(f"{element} closes a loop of ideal voltage sources or windings")
        self.element = element


@dataclass
class Form:
    """A weighted sum of free unknowns plus a known part."""

    weights: dict[Hashable, Value] = field(default_factory=dict)
    known: Value | None = None


def forces_voltage(branch: Branch) -> bool:
    """Whether a branch has no impedance at all."""
    return (
        isinstance(branch, SeriesBranch)
        and branch.resistance.constant == 0.0
        and branch.inductance.constant == 0.0
        and branch.capacitance is None
    )


class Reduction:
    """The free unknowns of a set of branches and how every other unknown follows from them.

    free: unknowns left, in order of first mention; constraints: positions of the branches that force a voltage
    Raises ContradictoryLoop where forced voltages close a loop.
    """

    def __init__(self, graph: Graph, branches: Sequence[Branch], references: Iterable[Hashable]):
        self._graph = graph
        self._fixed = set(references)
        self._forms: dict[Hashable, Form] = {}
        self._told: dict[Weights, Form] = {}
        self.constraints = [index for index, branch in enumerate(branches) if forces_voltage(branch)]
        for index in self.constraints:
            self._eliminate(branches[index])
        mentioned = dict.fromkeys(unknown for branch in branches for unknown, _ in branch.weights)
        self.unknowns = [unknown for unknown in mentioned if unknown not in self._fixed]
        self._known = frozenset(self.unknowns)
        self.free = [unknown for unknown in self.unknowns if unknown not in self._forms]

    def knows(self, unknown: Hashable) -> bool:
        """Whether an unknown is one of these branches' and no reference."""
        return unknown in self._known

    def form(self, weights: Weights) -> Form:
        """A branch voltage as a sum of free unknowns and a known part; not to be changed."""
        if weights not in self._told:
            self._told[weights] = self._form(weights)
        return self._told[weights]

    def _form(self, weights: Weights) -> Form:
        result = Form(known=self._graph.zero)
        for unknown, weight in weights:
            if unknown in self._fixed:
                continue
            known = self._forms.get(unknown)
            if known is None:
                _accumulate(result.weights, unknown, weight)
                continue
            for other, factor in known.weights.items():
                _accumulate(result.weights, other, weight * factor)
            result.known = result.known + weight * known.known
        result.weights = {unknown: weight for unknown, weight in result.weights.items() if weight.constant != 0.0}
        return result

    def _eliminate(self, branch: SeriesBranch) -> None:
        form = self._form(branch.weights)
        if not form.weights:
            raise ContradictoryLoop(branch.element)
        pivot = min(form.weights, key=lambda unknown: _pivot_rank(unknown, form.weights[unknown]))
        factor = form.weights.pop(pivot)
        solved = Form({other: -weight / factor for other, weight in form.weights.items()})
        solved.known = (branch.source - form.known) / factor
        for unknown, earlier in self._forms.items():
            self._forms[unknown] = self._substituted(earlier, pivot, solved)
        self._forms[pivot] = solved

    def _substituted(self, form: Form, pivot: Hashable, solved: Form) -> Form:
        if pivot not in form.weights:
            return form
        weights = dict(form.weights)
        factor = weights.pop(pivot)
        for other, weight in solved.weights.items():
            _accumulate(weights, other, factor * weight)
        return Form(weights, form.known + factor * solved.known)


def _accumulate(weights: dict[Hashable, Value], unknown: Hashable, weight: Value) -> None:
    weights[unknown] = weights[unknown] + weight if unknown in weights else weight


def _pivot_rank(unknown: Hashable, weight: Value) -> tuple[bool, bool]:
    """Prefer nodes with a weight of one: dividing by turns is left to where nothing else remains."""
    return (weight.constant not in (1.0, -1.0), not isinstance(unknown, str))
