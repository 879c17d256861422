"""A solution made of given functions of time, for tests of what is read from solutions."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from simcore.design.circuit import Circuit, Element, Observed, PlannedStudy, Port, Requirement

Function = Callable[[np.ndarray], np.ndarray]


def three_points(times: np.ndarray, function: Function) -> np.ndarray:
    """Values of a function at start, middle and end of each piece, shape (n, 3)."""
    middle = 0.5 * (times[1:] + times[:-1])
    return np.stack([function(times[:-1]), function(middle), function(times[1:])], axis=1) + np.zeros((len(middle), 3))


@dataclass
class FakeSolution:
    """Potentials by node, currents by (element, port), and by element its series branches (resistance, inductance,
    capacitance, current, voltage), as functions of time."""

    circuit: Circuit
    times: np.ndarray
    potentials: dict[str, Function]
    currents: dict[tuple[str, str], Function]
    period: float | None = None
    window: tuple[float, float] | None = None  # type: ignore[assignment]
    tolerance: float = 0.0
    first_event: float | None = None
    study: PlannedStudy = field(default_factory=lambda: PlannedStudy("run", "transient"))
    temperatures: dict[str, float] = field(default_factory=dict)
    branches: dict[str, list[tuple[Function, ...]]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if self.window is None:
            self.window = (float(self.times[0]), float(self.times[-1]))

    @property
    def smooth(self) -> np.ndarray:
        return np.ones(len(self.times) - 1, dtype=bool)

    def voltage(self, a: str, b: str) -> np.ndarray:
        return three_points(self.times, lambda t: self.potentials[a](t) - self.potentials[b](t))

    def current(self, element: str, port: str = "") -> np.ndarray:
        return three_points(self.times, self.currents[element, port])

    def series(self, element: str) -> list[np.ndarray]:
        return [
            np.stack([three_points(self.times, function) for function in functions])
            for functions in self.branches.get(element, [])
        ]

    def shown(self, element: str, name: str) -> np.ndarray | None:
        return None

    def temperature(self, element: str) -> np.ndarray:
        return np.full((len(self.times) - 1, 3), self.temperatures.get(element, 298.15))


def circuit_of(
    elements: list[Element],
    observes: dict[str, Observed] | None = None,
    requirements: tuple[Requirement, ...] = (),
    studies: dict[str, PlannedStudy] | None = None,
) -> Circuit:
    """A circuit of elements with reference "0"."""
    return Circuit(
        name="test",
        purpose="",
        references=("0",),
        ambient=298.15,
        elements={element.name: element for element in elements},
        lets={},
        observes=observes or {},
        studies=studies or {},
        requirements=requirements,
    )


def branch(name: str, kind: str, a: str, b: str, **given: object) -> Element:
    """An element of two terminals."""
    return Element(name, kind, (Port("", a, b),), given)


def steady(value: float) -> Function:
    """The same value at any time."""
    return lambda t: value + 0.0 * t


def zero(t: np.ndarray) -> np.ndarray:
    return 0.0 * t
