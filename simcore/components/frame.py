"""Where components put their equations: branches between nodes, written with graph values.

A frame knows three forms and no component kind: a series branch (resistance, inductance, capacitance and source voltage
in series, any of them absent), a current source, and a nonlinear branch whose current is a law of its voltage. A
branch's voltage is a weighted sum of unknowns, which covers two nodes (+1, -1) as well as a winding (+1, -1, -turns of
its core).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from simcore.components.kind import Kind
from simcore.design.circuit import Element, Port
from simcore.equations.values import Graph, Level, Value, sin

Weights = tuple[tuple[Hashable, Value], ...]


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
class NonlinearBranch:
    """i = current, an expression of the input `variable`, the branch voltage that is iterated on.

    scale: voltage over which the law changes by a factor e (V); critical: voltage above which steps are limited (V)
    """

    element: str
    port: str
    weights: Weights
    variable: Value
    current: Value
    scale: Value
    critical: Value


Branch = SeriesBranch | CurrentBranch | NonlinearBranch


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


class Frame:
    """Collects the branches of a circuit and the numbers they depend on."""

    def __init__(self, moment: float = 0.0) -> None:
        """moment: the time in the study, in s, from which the frame holds (a switch then stands as it does at that
        time)"""
        self.moment = moment
        self.graph = Graph()
        self.time = self.graph.input("t", Level.TIME)
        self.sines: list[tuple[float, float]] = []
        self.branches: list[Branch] = []
        self.numbers: list[float] = []
        self.waveforms: list[Waveform] = []

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
        critical: Value,
        port: str = "",
    ) -> None:
        """Add a branch whose current is law(branch voltage)."""
        count = sum(isinstance(branch, NonlinearBranch) for branch in self.branches)
        variable = self.graph.input(f"v{count}", Level.ITERATION)
        self.branches.append(
            NonlinearBranch(part.name, port, self._weights(weights), variable, law(variable), scale, critical)
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
        return (operations, tuple(_shape(branch) for branch in self.branches))


def _shape(branch: Branch) -> tuple:
    """A branch with its values replaced by their numbers in the graph."""
    return (type(branch).__name__, *(_plain(getattr(branch, name)) for name in branch.__dataclass_fields__))


def _plain(field: Any) -> Any:
    if isinstance(field, Value):
        return field.index
    if isinstance(field, tuple):
        return tuple(_plain(item) for item in field)
    return field


def temperature_of(element: Element, ambient: float) -> float:
    """What an element runs at, in K: its own temperature, else its ambient's, else that of the circuit (ambient)."""
    for key in ("temperature", "ambient"):
        if element.given.get(key) is not None:
            return float(element.given[key])
    return ambient


class Part:
    """One element as its kind's physics sees it: given values and defaults as numbers or as parameters of the frame."""

    def __init__(self, element: Element, kind: Kind, frame: Frame, ambient: float):
        self.name = element.name
        self.ports: tuple[Port, ...] = element.ports
        self._element = element
        self._kind = kind
        self._frame = frame
        self._ambient = ambient

    def given(self, key: str) -> Any:
        """The value of a key as the circuit holds it, else the kind's default, else None."""
        value = self._element.given.get(key)
        return self._kind.key[key].default if value is None else value

    @property
    def unit(self) -> str:
        """ "V" or "A": what a source is written in."""
        return self._element.unit

    def value(self, key: str, index: int | None = None) -> Value:
        """A key as a graph value, or one of a ratio's; zero where it is neither given nor has a default."""
        number = self.given(key)
        if index is not None and number is not None:
            number = number[index]
        declared = self._kind.key[key]
        positive = declared.low is not None and declared.low >= 0.0
        return self._frame.parameter(0.0 if number is None else number, positive)

    def temperature(self) -> float:
        """What the element runs at, in K; see temperature_of."""
        return temperature_of(self._element, self._ambient)

    @property
    def moment(self) -> float:
        """The time in the study, in s, from which the equations hold."""
        return self._frame.moment

    def across(self, port: Port) -> dict[Hashable, float]:
        """The weights of a port's voltage, a minus b."""
        return {port.a: 1.0, port.b: -1.0}
