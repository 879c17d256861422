"""One backward-Euler step of a circuit as a graph of scalars: companion conductances, elimination, new states.

Modified nodal analysis with companion models. Inputs of the graph: p0, p1 ... parameters; h the step; t the time at its
end; y0, y1 ... the states before it; v0, v1 ... the nonlinear branches' voltages at the last Newton iterate.
"""

from __future__ import annotations

import math
from collections.abc import Hashable, Sequence
from dataclasses import dataclass, field
from functools import cached_property

from simcore.components.frame import (
    Branch,
    Carried,
    CurrentBranch,
    Frame,
    NonlinearBranch,
    Sensed,
    SeriesBranch,
    Threshold,
)
from simcore.equations.eliminate import Elimination, Guard
from simcore.equations.reduce import Form, Reduction, forces_voltage
from simcore.equations.values import Level, Value, changes, derivative

CARRYING = 0.03
"""Agreement of a branch that carries a quantity, over that of one that does not."""


@dataclass(frozen=True)
class State:
    """What a branch carries from step to step: its "current", its "voltage" or what a nonlinear branch says.

    before: the input of its value before; small: the size of it that needs no accuracy
    """

    branch: int
    quantity: str
    initial: Value
    before: Value
    new: Value
    small: Value


@dataclass(frozen=True)
class Junction:
    """A nonlinear branch's Newton iterate: the voltage put in, and the one that the linearised circuit gives back.

    slope: conductance of the law there; agreement: share of the usual agreement that the two need: what is left of it
    in a charge is a current over a step; flattens: see NonlinearBranch
    """

    branch: int
    variable: Value
    new: Value
    scale: Value
    critical: Value
    straight: Value
    slope: Value
    agreement: float
    flattens: bool


@dataclass(frozen=True)
class Column:
    """What a run records: a free unknown or the current of a branch."""

    unknown: Hashable | None
    branch: int | None
    value: Value


@dataclass
class System:
    """A circuit's equations, ready to be emitted or evaluated."""

    frame: Frame
    reduction: Reduction
    states: list[State] = field(default_factory=list)
    junctions: list[Junction] = field(default_factory=list)
    columns: list[Column] = field(default_factory=list)
    guards: list[Guard] = field(default_factory=list)
    thresholds: list[Value] = field(default_factory=list)
    companions: list[Companion] = field(default_factory=list)

    @cached_property
    def branches_of_element(self) -> dict[str, list[int]]:
        """Positions of the branches of each element."""
        found: dict[str, list[int]] = {}
        for index, branch in enumerate(self.frame.branches):
            found.setdefault(branch.element, []).append(index)
        return found

    @cached_property
    def branches_of(self) -> dict[tuple[str, str], list[int]]:
        """Positions of the branches of each element's port."""
        found: dict[tuple[str, str], list[int]] = {}
        for index, branch in enumerate(self.frame.branches):
            found.setdefault((branch.element, branch.port), []).append(index)
        return found

    @cached_property
    def responses(self) -> list[Value]:
        """How the states after a step change with those before it, along a direction given by the inputs e0, e1 ...;
        the nonlinear branches' slopes are those of the last iteration, so this is exact once Newton has converged."""
        graph = self.frame.graph
        seeds = {state.before.index: graph.input(f"e{i}", Level.RESPONSE) for i, state in enumerate(self.states)}
        return changes([state.new for state in self.states], seeds)


@dataclass(frozen=True)
class Companion:
    """i = conductance * v + offset, v without the known part of its form."""

    form: Form
    conductance: Value
    offset: Value


def assemble(
    frame: Frame, references: Sequence[Hashable], eliminate: bool = True, most: float = math.inf
) -> System:
    """The equations of one step; without elimination the free unknowns are inputs s0, s1 ... of what follows from them.

    Raises reduce.ContradictoryLoop where ideal voltages close a loop, eliminate.TooLarge where the elimination takes
    the graph beyond `most` values.
    """
    return _Assembly(frame, references, eliminate, most).system


class _Assembly:
    def __init__(self, frame: Frame, references: Sequence[Hashable], eliminate: bool, most: float):
        self.graph = frame.graph
        self._most = most
        self.step = frame.step
        self.rate = 1.0 / self.step
        reduction = Reduction(self.graph, frame.branches, references)
        self.system = System(frame, reduction)
        self._histories: dict[tuple[int, str], Value] = {}
        self._carried: list[State] = []
        self._currents: dict[int, Value] = {}
        companions = [self._companion(index, branch) for index, branch in enumerate(frame.branches)]
        self.system.companions = [companion for companion in companions if companion is not None]
        solution = self._eliminated() if eliminate else self._inputs()
        self.system.columns = [Column(unknown, None, solution[unknown]) for unknown in reduction.free]
        for index, branch in enumerate(frame.branches):
            companion = companions[index]
            if companion is not None and not isinstance(branch, CurrentBranch):
                self._results(index, branch, companion, solution)
        self.system.states[:0] = self._carried
        self.system.thresholds = [self._sensed(threshold, solution) for threshold in frame.thresholds]

    def _eliminated(self) -> dict[Hashable, Value]:
        elimination = Elimination(self.graph, list(self.system.reduction.free), self._most)
        for companion in self.system.companions:
            elimination.stamp(companion.form.weights, companion.conductance, companion.offset)
        solution = elimination.solve()
        self.system.guards = elimination.guards
        return solution

    def _inputs(self) -> dict[Hashable, Value]:
        free = self.system.reduction.free
        return {unknown: self.graph.input(f"s{index}", Level.ITERATION) for index, unknown in enumerate(free)}

    def _companion(self, index: int, branch: Branch) -> Companion | None:
        if forces_voltage(branch):
            return None
        form = self.system.reduction.form(branch.weights)
        if isinstance(branch, CurrentBranch):
            return Companion(form, self.graph.zero, branch.current)
        if isinstance(branch, NonlinearBranch):
            slope = branch.slope
            behind = branch.current - slope * branch.variable + slope * (form.known - branch.offset)
            return Companion(form, slope + branch.leak, behind + branch.leak * form.known)
        return self._series(index, branch, form)

    def _series(self, index: int, branch: SeriesBranch, form: Form) -> Companion:
        impedance, behind = branch.resistance, branch.source - form.known
        if branch.inductance.constant != 0.0:
            reactance = branch.inductance * self.rate
            impedance = impedance + reactance
            behind = behind - reactance * self._history(index, "current")
        if branch.capacitance is not None:
            behind = behind + self._history(index, "voltage")
            conductance = self._with_capacitance(impedance, branch.capacitance)
        else:
            conductance = 1.0 / impedance
        return Companion(form, conductance, -(conductance * behind))

    def _with_capacitance(self, impedance: Value, capacitance: Value) -> Value:
        """The conductance of an impedance in series with h / C, written so that no part of it may vanish."""
        if impedance.constant == 0.0:
            return capacitance * self.rate
        return capacitance / (self.step + impedance * capacitance)

    def _history(self, branch: int, quantity: str) -> Value:
        key = (branch, quantity)
        if key not in self._histories:
            first = sum(isinstance(b, NonlinearBranch) and b.carried is not None for b in self.system.frame.branches)
            self._histories[key] = self.graph.input(f"y{first + len(self._histories)}", Level.TIME)
        return self._histories[key]

    def _results(self, index: int, branch: Branch, companion: Companion, solution: dict[Hashable, Value]) -> None:
        terms = [weight * solution[unknown] for unknown, weight in companion.form.weights.items()]
        voltage = self.graph.total(terms)
        current = self._currents[index] = companion.conductance * voltage + companion.offset
        if isinstance(branch, NonlinearBranch):
            new = voltage + companion.form.known - branch.offset
            agreement = 1.0 if branch.carried is None else CARRYING
            self.system.junctions.append(
                Junction(
                    index,
                    branch.variable,
                    new,
                    branch.scale,
                    branch.critical,
                    branch.straight,
                    companion.conductance,
                    agreement,
                    branch.flattens,
                )
            )
            if branch.carried is not None:
                self._carry(index, branch.carried, branch.variable, new)
        elif isinstance(branch, SeriesBranch):
            self._states(index, branch, voltage + companion.form.known, current)
        if not is_resistor(branch):
            self.system.columns.append(Column(None, index, current))

    def _sensed(self, threshold: Threshold, solution: dict[Hashable, Value]) -> Value:
        """How far a threshold's signal is above its level."""
        terms = [-threshold.level]
        for term in threshold.terms:
            if term.element:
                value = self._port_current(term)
            elif term.branch >= 0:
                value = next(state.new for state in self._carried if state.branch == term.branch)
            else:
                form = self.system.reduction.form(term.weights)
                known = form.known or self.graph.zero
                value = self.graph.total([known, *(w * solution[unknown] for unknown, w in form.weights.items())])
            terms.append(term.factor * value)
        return self.graph.total(terms)

    def _port_current(self, term: Sensed) -> Value:
        """The current into a port at its node; none while its element is taken out."""
        found = [self.graph.zero]
        for index, branch in enumerate(self.system.frame.branches):
            weight = dict(branch.weights).get(term.node)
            if branch.element == term.element and branch.port == term.port and weight is not None:
                current = branch.current if isinstance(branch, CurrentBranch) else self._currents[index]
                found.append(weight * current)
        return self.graph.total(found)

    def _carry(self, index: int, carried: Carried, variable: Value, new: Value) -> None:
        """The carried quantity by the same straight line as the current, so that nothing of it is lost or made."""
        after = carried.after + derivative(carried.after, variable) * (new - variable)
        state = State(index, carried.quantity, carried.initial, carried.before, after, carried.small)
        self._carried.append(state)
        branch = self.system.frame.branches[index]
        for name, shown in carried.shown:
            value = shown + derivative(shown, variable) * (new - variable)
            self.system.columns.append(Column((branch.element, branch.port, name), None, value))

    def _states(self, index: int, branch: SeriesBranch, voltage: Value, current: Value) -> None:
        if (index, "current") in self._histories:
            before = self._history(index, "current")
            small = self.system.frame.small_current
            self.system.states.append(State(index, "current", branch.initial_current, before, current, small))
        if branch.capacitance is not None:
            alone = branch.resistance.constant == 0.0 and branch.inductance.constant == 0.0
            before = self._history(index, "voltage")
            new = voltage - branch.source if alone else before + self.step / branch.capacitance * current
            small = self.system.frame.small_voltage
            self.system.states.append(State(index, "voltage", branch.initial_voltage, before, new, small))


def is_resistor(branch: Branch) -> bool:
    """Whether a branch's current is its voltage, less that of a source, over a resistance: it need not be recorded."""
    return (
        isinstance(branch, SeriesBranch)
        and branch.resistance.constant != 0.0
        and branch.inductance.constant == 0.0
        and branch.capacitance is None
    )
