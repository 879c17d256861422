"""A recorded stretch of a solution: one form of the equations, its numbers, and the values at start, middle and end of
each step.

Gives the voltage of any weighted sum of unknowns and the current of any branch; what was not recorded follows linearly
or by Kirchhoff's current law. Knows no component kind.
"""

from __future__ import annotations

from collections.abc import Hashable, Iterable
from functools import cached_property

import numpy as np

from simcore.components.frame import Branch, CurrentBranch, SeriesBranch, Weights
from simcore.equations.assemble import System, is_resistor
from simcore.equations.plain import evaluate
from simcore.equations.reduce import forces_voltage
from simcore.equations.values import Level, Value

_INSTANTS = np.array([0.0, 1.0 / 3.0, 0.5, 2.0 / 3.0, 1.0])
"""Where in a step known functions of time are evaluated, as shares of it."""

_TOLD = 1e3 * 64.0 * float(np.finfo(float).eps)
"""A thousand roundings of a current's two voltages, each several times half a digit: the extrapolated middle of a step
is a sum of values whose weights have magnitudes of up to 14 together."""

_MEANS = {
    1: np.array([0.0, 0.0, 0.0, 0.0, 1.0]),
    2: np.array([0.0, 0.0, 1.0, 0.0, 0.0]),
    3: np.array([0.0, 1.5, -2.0, 1.5, 0.0]),
}
"""By extrapolation order, the weights at these instants of the mean that the run's extrapolated sums give."""


class Stretch:
    """times: breakpoints on the sources' clock in s, shape (n + 1,); values: shape (n, 3, columns), in V and A; order:
    of the extrapolation that gave them; smooth: shape (n,), whether no kink or jump lies inside a step; shortest: step
    in s that the values come from, at least; held: the sources stood still at the first time."""

    def __init__(
        self,
        system: System,
        numbers: list[float],
        times: np.ndarray,
        values: np.ndarray,
        order: int,
        smooth: np.ndarray,
        shortest: float,
        held: bool = False,
    ):
        self.system = system
        self.times = times
        self.smooth = smooth
        self._steps = (shortest, max(shortest, float(np.max(np.diff(times)))))
        self._values = values
        self._mean = _MEANS[order]
        self._inputs = {f"p{index}": number for index, number in enumerate(numbers)}
        spans = np.zeros(len(times) - 1) if held else np.diff(times)
        self._inputs["t"] = times[:1] if held else times[:-1]
        self._inputs["t"] = self._inputs["t"][:, None] + spans[:, None] * _INSTANTS
        self._columns = {
            (column.unknown if column.branch is None else column.branch): index
            for index, column in enumerate(system.columns)
        }
        self._currents: dict[int, np.ndarray] = {}
        self._known: dict[int, np.ndarray] = {}
        self._numbers: dict[int, float] = {}

    @property
    def shape(self) -> tuple[int, int]:
        return (len(self.times) - 1, 3)

    def _evaluate(self, value: Value) -> np.ndarray:
        """A known function of time at start, middle and end, worked out once."""
        if value.index not in self._known:
            self._known[value.index] = self._instants(value)
        return self._known[value.index]

    def _instants(self, value: Value) -> np.ndarray:
        """The middle is formed as the run forms that of its columns: sums of what is known and what was solved then
        stay exact."""
        if value.level < Level.TIME:
            return np.broadcast_to(self._number(value), self.shape)
        known = np.asarray(evaluate([value], self._inputs)[0], dtype=float)
        ends = known[:, 0] + known[:, -1]
        return np.stack([known[:, 0], 1.5 * known @ self._mean - 0.25 * ends, known[:, -1]], axis=1)

    def voltage(self, weights: Weights) -> np.ndarray:
        """The weighted sum of unknowns, shape (n, 3), in V."""
        form = self.system.reduction.form(weights)
        result = self._evaluate(form.known).copy()
        for unknown, weight in form.weights.items():
            values = self._values[:, :, self._columns[unknown]]
            result += values if weight.constant == 1.0 else self._evaluate(weight) * values
        return result

    def node(self, name: Hashable) -> np.ndarray:
        """A node's voltage to its reference, shape (n, 3); zero where the node is not part of the circuit."""
        if not self.system.reduction.knows(name):
            return np.zeros(self.shape)
        return self.voltage(((name, self.system.frame.graph.one),))

    def current(self, branch: int) -> np.ndarray:
        """A branch's current, shape (n, 3), in A."""
        if branch not in self._currents:
            self._currents[branch] = self._branch_current(branch)
        return self._currents[branch]

    def _branch_current(self, index: int) -> np.ndarray:
        if index in self._columns:
            return self._values[:, :, self._columns[index]]
        branch = self.system.frame.branches[index]
        if isinstance(branch, CurrentBranch):
            return self._evaluate(branch.current)
        if is_resistor(branch):
            assert isinstance(branch, SeriesBranch)
            behind = self.voltage(branch.weights) - self._evaluate(branch.source)
            return behind / self._evaluate(branch.resistance)
        return self._forced[self.system.reduction.constraints.index(index)]

    def shown(self, element: str, name: str) -> np.ndarray | None:
        """What an element's branches show of what they carry, added up, shape (n, 3); None where they show no such."""
        found = [
            self._values[:, :, index]
            for key, index in self._columns.items()
            if isinstance(key, tuple) and len(key) == 3 and (key[0], key[2]) == (element, name)
        ]
        return sum(found[1:], found[0]) if found else None

    def series(self, branch: int) -> np.ndarray:
        """Resistance, inductance, capacitance (zero where there is none), current, voltage less that of the source.

        Of a series branch, in SI units; shape (5, n, 3).
        """
        part = self.system.frame.branches[branch]
        assert isinstance(part, SeriesBranch)
        capacitance = self.system.frame.graph.zero if part.capacitance is None else part.capacitance
        numbers = [self._evaluate(value) for value in (part.resistance, part.inductance, capacitance, part.source)]
        return np.stack([*numbers[:3], self.current(branch), self.voltage(part.weights) - numbers[3]])

    @cached_property
    def _free_sums(self) -> dict[Hashable, np.ndarray]:
        """What all branches with an impedance take out of each unknown, in A."""
        sums = {unknown: np.zeros(self.shape) for unknown in self.system.reduction.unknowns}
        for index, branch in enumerate(self.system.frame.branches):
            if not forces_voltage(branch):
                self._add(sums, branch.weights, self.current(index))
        return sums

    def _add(
        self, sums: dict[Hashable, np.ndarray], weights: Iterable[tuple[Hashable, Value]], current: np.ndarray
    ) -> None:
        for unknown, weight in weights:
            if unknown in sums:
                sums[unknown] += self._number(weight) * current

    @cached_property
    def _forced(self) -> list[np.ndarray]:
        """Currents of the branches that force a voltage, from Kirchhoff's current law at all unknowns."""
        reduction = self.system.reduction
        if not reduction.constraints:
            return []
        weights = [dict(self.system.frame.branches[index].weights) for index in reduction.constraints]
        touched = [unknown for unknown in reduction.unknowns if any(unknown in row for row in weights)]
        zero = self.system.frame.graph.zero
        matrix = np.array([[self._number(row.get(unknown, zero)) for row in weights] for unknown in touched])
        right = -np.stack([self._free_sums[unknown].ravel() for unknown in touched])
        currents = np.linalg.lstsq(matrix, right, rcond=None)[0]
        return [row.reshape(self.shape) for row in currents]

    def _number(self, value: Value) -> float:
        """What does not depend on time, worked out once."""
        if value.constant is not None:
            return value.constant
        if value.index not in self._numbers:
            self._numbers[value.index] = float(evaluate([value], self._inputs)[0])
        return self._numbers[value.index]

    def _conductance(self, branch: Branch) -> float:
        """The largest conductance in S that a series branch has to the steps taken, zero for any other."""
        if not isinstance(branch, SeriesBranch) or forces_voltage(branch):
            return 0.0
        elastance = 0.0 if branch.capacitance is None else 1.0 / self._number(branch.capacitance)
        resistance, inductance = float(np.min(self._evaluate(branch.resistance))), self._number(branch.inductance)
        return max(1.0 / (resistance + inductance / step + step * elastance) for step in self._steps)

    def kirchhoff(self) -> dict[Hashable, tuple[float, float]]:
        """At each unknown the worst sum of currents, and the largest current or, where that is less, the least that the
        rounding of voltages lets be told to a thousandth; both in A."""
        sums = {unknown: total.copy() for unknown, total in self._free_sums.items()}
        largest = {unknown: 0.0 for unknown in sums}
        voltage = max((float(np.max(np.abs(self.node(unknown)))) for unknown in sums), default=0.0)
        for index, branch in enumerate(self.system.frame.branches):
            peak = float(np.max(np.abs(self.current(index)), initial=0.0))
            told = _TOLD * voltage * self._conductance(branch)
            for unknown, weight in branch.weights:
                if unknown in largest:
                    largest[unknown] = max(largest[unknown], max(peak, told) * abs(self._number(weight)))
        for position, index in enumerate(self.system.reduction.constraints):
            self._add(sums, self.system.frame.branches[index].weights, self._forced[position])
        return {key: (float(np.max(np.abs(total), initial=0.0)), largest[key]) for key, total in sums.items()}
