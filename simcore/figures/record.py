"""A solution as signals: voltages, currents and powers by name, cut to the judged window and kept once formed.

It reads a solution and its circuit, and knows neither the language nor what figures are made of the signals.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Protocol

import numpy as np

from grammar.quantities import AMPERE, I2T, KELVIN, VOLT
from simcore.design.circuit import Circuit, Element, PlannedStudy, Port
from simcore.figures.figure import CHANCE, CHANCE_OF_STEPS, Figure
from simcore.figures.polynomials import Array
from simcore.figures.signal import Signal

DELIVERING = ("source", "three_phase")
"""Kinds whose factors and efficiency count what they deliver, not what they take."""


class Solved(Protocol):
    """What figures need of a solution; arrays hold values at start, middle and end of each step."""

    circuit: Circuit
    study: PlannedStudy
    times: Array
    period: float | None
    window: tuple[float, float]
    tolerance: float
    first_event: float | None

    @property
    def smooth(self) -> Array: ...

    def voltage(self, a: str, b: str) -> Array: ...

    def current(self, element: str, port: str = "") -> Array: ...

    def series(self, element: str) -> list[Array]:
        """Each series branch of an element: resistance, inductance, capacitance, current, voltage; shape (5, n, 3)."""
        ...

    def shown(self, element: str, name: str) -> Array | None: ...

    def temperature(self, element: str) -> Array: ...


class UnknownName(Exception):
    """A name that stands for nothing in the circuit, or for something else than is asked; the text says which."""


@dataclass(frozen=True)
class Part:
    """An element, or one port of it where `port` is not None."""

    element: Element
    port: Port | None

    @property
    def ports(self) -> tuple[Port, ...]:
        """The ports that count."""
        return self.element.ports if self.port is None else (self.port,)

    @property
    def delivers(self) -> bool:
        """Whether factors count what it delivers."""
        return self.element.kind in DELIVERING


class Record:
    """The signals of one solution, over the whole study; `window` and `periods` cut them. figures: those worked out,
    by what was asked."""

    def __init__(self, solution: Solved):
        self.solution = solution
        self.circuit = solution.circuit
        self.times = np.asarray(solution.times, dtype=float)
        rough = ~np.asarray(solution.smooth, dtype=bool)
        self.rough = np.stack([self.times[:-1][rough], self.times[1:][rough]], axis=1)
        self.nodes = dict.fromkeys((*self.circuit.nodes(), *self.circuit.references))
        self._kept: dict[object, Signal] = {}
        self._cuts: dict[tuple[int, float, float], tuple[Signal, Signal]] = {}
        self.figures: dict[object, Figure] = {}

    def keep(self, key: object, form: Callable[[], Signal]) -> Signal:
        """The signal kept under a key, formed at the first asking."""
        if key not in self._kept:
            self._kept[key] = form()
        return self._kept[key]

    def granted(self, figure: Figure) -> Figure:
        """A figure of this solution, granted the error that the tolerance of its steps may leave by chance."""
        return replace(figure, chance=max(CHANCE, CHANCE_OF_STEPS * self.solution.tolerance))

    # --- names -----------------------------------------------------------------------------------------------------

    def part(self, name: str) -> Part:
        """The element or the port (`T1.w2`, `grid.L1`) of that name; UnknownName where there is none."""
        elements = self.circuit.elements
        if name in elements:
            element = elements[name]
            return Part(element, element.ports[0] if len(element.ports) == 1 else None)
        owner, _, port_name = name.rpartition(".")
        if owner in elements:
            for port in elements[owner].ports:
                if port.name == port_name:
                    return Part(elements[owner], port)
            known = ", ".join(f"{owner}.{port.name}" for port in elements[owner].ports if port.name)
            raise UnknownName(f"{owner} has no {port_name}" + (f": it has {known}" if known else ""))
        raise UnknownName(f"no element is called {name}")

    def only_port(self, name: str) -> Port:
        """The port of an element that has but one, or the one that the name says."""
        part = self.part(name)
        if part.port is None:
            ports = ", ".join(f"{name}.{port.name}" for port in part.ports)
            raise UnknownName(f"{name} has several windings or phases: name one of {ports}")
        return part.port

    # --- signals over the whole study --------------------------------------------------------------------------------

    def between(self, a: str, b: str | None = None) -> Signal:
        """Voltage of node a against node b, or against the reference of its part of the circuit, V."""
        end = self.circuit.references[0] if b is None else b
        return self.keep(
            ("voltage", a, end), lambda: Signal.through(self.times, self.solution.voltage(a, end), VOLT, self.rough)
        )

    def port_current(self, element: Element, port: Port) -> Signal:
        """Current through a port from a to b, A."""
        return self.keep(
            ("current", element.name, port.name),
            lambda: Signal.through(self.times, self.solution.current(element.name, port.name), AMPERE, self.rough),
        )

    def voltage(self, name: str) -> Signal:
        """Voltage across an element or port, V."""
        port = self.only_port(name)
        return self.between(port.a, port.b)

    def current(self, name: str) -> Signal:
        """Current through an element or port, A."""
        return self.port_current(self.part(name).element, self.only_port(name))

    def power(self, name: str) -> Signal:
        """Power that an element takes, over all its ports, or that one port takes, W."""
        part = self.part(name)
        return self.keep(("power", name), lambda: self._power(part))

    def _power(self, part: Part) -> Signal:
        powers = [self.between(port.a, port.b) * self.port_current(part.element, port) for port in part.ports]
        total = powers[0]
        for power in powers[1:]:
            total = total + power
        return total

    def temperature(self, name: str) -> Signal:
        """Temperature of an element, K: constant but where a study sets it or the element heats up in it."""
        element = self.part(name).element.name
        return self.keep(
            ("temperature", element),
            lambda: Signal.through(self.times, self.solution.temperature(element), KELVIN, self.rough),
        )

    def heat(self, name: str) -> Signal:
        """Squared current that has added up in a fuse, less what it has lost, A^2 s."""
        shown = self.solution.shown(name, "heat")
        if shown is None:
            raise UnknownName(f"nothing adds up in {name}")
        return self.keep(("heat", name), lambda: Signal.through(self.times, shown, I2T, self.rough))

    # --- windows -----------------------------------------------------------------------------------------------------

    def window(self, signal: Signal) -> Signal:
        """The part of a signal in the judged window, cut once."""
        return self.cut(signal, *self.solution.window)

    def cut(self, signal: Signal, start: float, end: float) -> Signal:
        """The part of a signal from start to end in s, kept with it: what figures find in it is found once."""
        key = (id(signal), start, end)
        if key not in self._cuts:
            self._cuts[key] = (signal, signal.restrict(start, end))
        return self._cuts[key][1]

    def whole_periods(self) -> tuple[float, float] | None:
        """Start and end in s of the whole periods that end with the window; None where it holds none."""
        start, end = self.solution.window
        period = self.solution.period
        if period is None or not period > 0.0:
            return None
        count = math.floor((end - start) / period * (1.0 + 1e-9))
        return (max(start, end - count * period), end) if count >= 1 else None

    @property
    def frequency(self) -> float:
        """Fundamental frequency in Hz; only where there is a period."""
        if self.solution.period is None:
            raise ValueError("a solution without a period has no fundamental")
        return 1.0 / self.solution.period

    def begin(self) -> float:
        """The instant from which `time_until` counts, s: the first event, else the start of the study."""
        event = self.solution.first_event
        return float(self.times[0]) if event is None else event
