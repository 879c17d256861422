"""Where components put their equations: branches between nodes, written with graph values.

A frame knows three forms and no component kind: a series branch (resistance, inductance, capacitance and source voltage
in series, any of them absent), a current source, and a nonlinear branch whose current is a law of its voltage. A
branch's voltage is a weighted sum of unknowns, which covers two nodes (+1, -1) as well as a winding (+1, -1, -turns of
its core).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from simcore.design.sensing import SensedTerm
from simcore.equations.values import Graph, Level, Value, derivative, sin, where

if TYPE_CHECKING:
    from simcore.components.part import Part
    from simcore.design.circuit import Port

Weights = tuple[tuple[Hashable, Value], ...]
UNLIMITED = 1e30
"""Critical voltage (V) of a law that is not steep."""


@dataclass(frozen=True)
class SeriesBranch:
    """v = resistance i + inductance di/dt + (1/capacitance) integral of i + source.

    A constant zero (capacitance: None) leaves that part out; with all left out the branch forces its voltage.
    """

    element: str
    port: str
    weights: Weights
    resistance: Value
    inductance: Value
    capacitance: Value | None
    source: Value
    initial_current: Value
    initial_voltage: Value


@dataclass(frozen=True)
class CurrentBranch:
    """i = current, whatever the voltage."""

    element: str
    port: str
    weights: Weights
    current: Value


@dataclass(frozen=True)
class Carried:
    """What a nonlinear branch carries from step to step, such as a charge (C), a flux (V s) or a temperature (K).

    initial: at the start of a transient; before: the input of its value before a step; after: its value after it, an
    expression of the branch's variable; small: the size of it that needs no accuracy; shown: what of it a solution
    records, such as its "temperature" (K) or its "energy" (J)
    """

    quantity: str
    initial: Value
    before: Value
    after: Value
    small: Value
    shown: tuple[tuple[str, Value], ...]


@dataclass(frozen=True)
class NonlinearBranch:
    """i = current, an expression of the input `variable`, the branch voltage less the offset, that is iterated on, and
    what the leak, a conductance in S, adds.

    scale: voltage over which the law changes by a factor e (V); critical: voltage above which steps are limited (V);
    straight: above zero while the law is a straight line, so that nothing is left to iterate; slope: of the law, or
    what Newton takes for it: never below zero, so that elimination only adds; flattens: whether the law is steepest at
    0 V and flattens on both sides, so that it blocks on neither, and an iterate that would cross 0 V stops there: from
    the flat parts it would leap from one to the other for ever
    """

    element: str
    port: str
    weights: Weights
    offset: Value
    variable: Value
    current: Value
    leak: Value
    scale: Value
    critical: Value
    straight: Value
    slope: Value
    carried: Carried | None
    flattens: bool = False


Branch = SeriesBranch | CurrentBranch | NonlinearBranch
_KINDS_OF_BRANCH = (SeriesBranch, CurrentBranch, NonlinearBranch)


@dataclass(frozen=True)
class Waveform:
    """A piecewise linear function of time whose present straight line the run is given as two numbers.

    points: (time in s, value) in rising time, a repeated time being a jump; period in s repeats them, else the ends
    hold
    base, slope: positions in the parameter list of the line's value at t = 0 and its slope
    """

    points: tuple[tuple[float, float], ...]
    period: float | None
    base: int
    slope: int


@dataclass(frozen=True)
class Flag:
    """A number that is 1 or 0 and that thresholds change during a run; position: in the parameter list."""

    element: str
    name: str
    position: int
    value: Value

    def choose(self, up: Value | float, down: Value | float) -> Value:
        """One value while the flag is 1, another while it is 0."""
        return where(self.value - 0.5, up, down)


@dataclass(frozen=True)
class Sensed:
    """A term of a threshold's signal: factor times the voltage by weights (V), what a branch carries, or the current
    into an element's port at its node (A)."""

    factor: float
    weights: Weights = ()
    branch: int = -1
    element: str = ""
    port: str = ""
    node: str = ""

    def times(self, factor: float) -> Sensed:
        """The term multiplied."""
        return replace(self, factor=self.factor * factor)


@dataclass(frozen=True)
class Threshold:
    """Flags change when the sum of the terms passes the level upwards while other flags stand as said.

    armed, sets: (flag, value); delay: in s from there; turns: further delay in periods of the first sine; tells: what
    has happened then, for the reader ("" where it is not worth telling)
    """

    element: str
    terms: tuple[Sensed, ...]
    level: Value
    armed: tuple[tuple[Flag, bool], ...]
    sets: tuple[tuple[Flag, bool], ...]
    delay: float
    turns: float
    tells: str


class Frame:
    """Collects the branches of a circuit and the numbers they depend on."""

    def __init__(self, moment: float = 0.0) -> None:
        """moment: the time in the study, in s, from which the frame holds (a switch then stands as it does at that
        time)"""
        self.moment = moment
        self.graph = Graph()
        self.time = self.graph.input("t", Level.TIME)
        self.step = self.graph.input("h", Level.STEP, positive=True)
        self.small_voltage = self.graph.input("floor_voltage", Level.VARIANT, positive=True)
        self.small_current = self.graph.input("floor_current", Level.VARIANT, positive=True)
        self.sines: list[tuple[float, float]] = []
        self.branches: list[Branch] = []
        self.numbers: list[float] = []
        self.waveforms: list[Waveform] = []
        self.flags: list[Flag] = []
        self.thresholds: list[Threshold] = []

    def flag(self, part: Part, name: str, up: bool) -> Flag:
        """A flag and where it stands before anything is known of the circuit."""
        position = len(self.numbers)
        self.numbers.append(1.0 if up else 0.0)
        self.flags.append(Flag(part.name, name, position, self.graph.input(f"p{position}", Level.VARIANT)))
        return self.flags[-1]

    def threshold(
        self,
        part: Part,
        terms: Sequence[Sensed],
        level: Value | float,
        *,
        armed: Sequence[tuple[Flag, bool]],
        sets: Sequence[tuple[Flag, bool]],
        delay: float = 0.0,
        turns: float = 0.0,
        tells: str = "",
    ) -> None:
        """Add a threshold; see Threshold. What it sets must disarm it."""
        self.thresholds.append(
            Threshold(part.name, tuple(terms), self.graph.lift(level), tuple(armed), tuple(sets), delay, turns, tells)
        )

    def sensed_voltage(self, weights: Mapping[Hashable, Value | float], factor: float = 1.0) -> Sensed:
        """A voltage as a term of a threshold."""
        return Sensed(factor, weights=self._weights(weights))

    def sensed_port(self, part: Part, port: Port) -> Sensed:
        """The current into a port as a term of a threshold."""
        return Sensed(1.0, element=part.name, port=port.name, node=port.a)

    def sensed_quantity(self) -> Sensed:
        """What the branch added last carries as a term of a threshold."""
        return Sensed(1.0, branch=len(self.branches) - 1)

    def sense(self, terms: Sequence[SensedTerm]) -> list[Sensed]:
        """The terms of a signal that a description names."""
        found = []
        for term in terms:
            if term.element:
                found.append(Sensed(term.factor, element=term.element, port=term.port, node=term.a))
            else:
                weights = {term.a: 1.0} if term.b is None else {term.a: 1.0, term.b: -1.0}
                found.append(self.sensed_voltage(weights, term.factor))
        return found

    def parameter(self, number: float, positive: bool = False) -> Value:
        """A number that may change without a change of the equations' form; zero is a form of its own."""
        if number == 0.0:
            return self.graph.zero
        self.numbers.append(float(number))
        return self.graph.input(f"p{len(self.numbers) - 1}", Level.VARIANT, positive)

    def series(
        self,
        part: Part,
        weights: Mapping[Hashable, Value | float],
        *,
        port: str = "",
        resistance: Value | float = 0.0,
        inductance: Value | float = 0.0,
        capacitance: Value | None = None,
        source: Value | float = 0.0,
        initial_current: Value | float = 0.0,
        initial_voltage: Value | float = 0.0,
    ) -> None:
        """Add a series branch; see SeriesBranch."""
        lift = self.graph.lift
        self.branches.append(
            SeriesBranch(
                part.name,
                port,
                self._weights(weights),
                lift(resistance),
                lift(inductance),
                capacitance,
                lift(source),
                lift(initial_current),
                lift(initial_voltage),
            )
        )

    def current(self, part: Part, weights: Mapping[Hashable, Value | float], value: Value, *, port: str = "") -> None:
        """Add a current source."""
        self.branches.append(CurrentBranch(part.name, port, self._weights(weights), value))

    def nonlinear(
        self,
        part: Part,
        weights: Mapping[Hashable, Value | float],
        law: Callable[[Value], Value],
        *,
        scale: Value,
        critical: Value | float = UNLIMITED,
        straight: Value | float = 0.0,
        offset: Value | float = 0.0,
        leak: Value | float = 0.0,
        slope: Callable[[Value], Value] | None = None,
        flattens: bool = False,
        port: str = "",
    ) -> None:
        """Add a branch whose current is law(branch voltage - offset) and that through its leak; slope: of the law, or
        what Newton should take for it, where its derivative is not known to rise; flattens: on both sides of 0 V (see
        NonlinearBranch)."""
        variable = self._variable()
        current = law(variable)
        rise = derivative(current, variable) if slope is None else slope(variable)
        manner = (leak, scale, critical, straight, rise)
        self._nonlinear(part, port, weights, offset, variable, current, manner, None, flattens)

    def carrying(
        self,
        part: Part,
        weights: Mapping[Hashable, Value | float],
        law: Callable[[Value, Value], tuple[Value, Value, dict[str, Value]]],
        *,
        quantity: str,
        small: Value,
        initial: Value | float = 0.0,
        scale: Value,
        critical: Value | float = UNLIMITED,
        straight: Value | float = 0.0,
        leak: Value | float = 0.0,
        slope: Callable[[Value, Value], Value] | None = None,
        port: str = "",
    ) -> None:
        """Add a branch that carries a quantity: law(branch voltage, quantity before the step) gives its current, the
        quantity after the step and what is shown of it (see Carried); slope: as of a nonlinear branch."""
        count = sum(isinstance(branch, NonlinearBranch) and branch.carried is not None for branch in self.branches)
        before, variable = self.graph.input(f"y{count}", Level.TIME), self._variable()
        current, after, shown = law(variable, before)
        carried = Carried(quantity, self.graph.lift(initial), before, after, small, tuple(shown.items()))
        rise = derivative(current, variable) if slope is None else slope(variable, before)
        manner = (leak, scale, critical, straight, rise)
        self._nonlinear(part, port, weights, 0.0, variable, current, manner, carried)

    def _variable(self) -> Value:
        count = sum(isinstance(branch, NonlinearBranch) for branch in self.branches)
        return self.graph.input(f"v{count}", Level.ITERATION)

    def _nonlinear(
        self,
        part: Part,
        port: str,
        weights: Mapping[Hashable, Value | float],
        offset: Value | float,
        variable: Value,
        current: Value,
        manner: tuple[Value | float, ...],
        carried: Carried | None,
        flattens: bool = False,
    ) -> None:
        lift = self.graph.lift
        ends, numbers = self._weights(weights), (lift(value) for value in manner)
        self.branches.append(
            NonlinearBranch(part.name, port, ends, lift(offset), variable, current, *numbers, carried, flattens)
        )

    def sine(self, frequency: float, phase: float) -> Value:
        """A sine of unit amplitude; frequency in Hz, phase at t = 0 in rad. The first one counts as the circuit's
        phase."""
        self.sines.append((frequency, phase))
        return sin(self.parameter(2.0 * math.pi * frequency) * self.time + self.parameter(phase))

    def waveform(self, points: Sequence[tuple[float, float]], period: float | None) -> Value:
        """The value over time of straight lines through points."""
        base = len(self.numbers)
        self.numbers += [0.0, 0.0]
        self.waveforms.append(Waveform(tuple(points), period, base, base + 1))
        line = [self.graph.input(f"p{index}", Level.VARIANT) for index in (base, base + 1)]
        return line[0] + line[1] * self.time

    def _weights(self, weights: Mapping[Hashable, Value | float]) -> Weights:
        return tuple((unknown, self.graph.lift(weight)) for unknown, weight in weights.items())

    def signature(self) -> tuple:
        """Equal for frames whose equations differ in numbers only."""
        operations = tuple(
            (value.operation, *(a.index if isinstance(a, Value) else a for a in value.arguments), value.positive)
            for value in self.graph.values
        )
        return (operations, _plain(tuple(self.branches)), _plain(tuple(self.thresholds)))


def _plain(field: Any) -> Any:
    """Branches and thresholds with their values replaced by their numbers in the graph."""
    if isinstance(field, Value):
        return field.index
    if isinstance(field, tuple):
        return tuple(_plain(item) for item in field)
    if isinstance(field, (*_KINDS_OF_BRANCH, Carried, Flag, Sensed, Threshold)):
        return (type(field).__name__, *(_plain(getattr(field, name)) for name in field.__dataclass_fields__))
    return field
