"""What solving a study gives: traces as quadratic pieces, the span to judge, and how it was reached."""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from simcore.components.frame import SeriesBranch
from simcore.components.part import temperature_of
from simcore.design.circuit import Circuit, PlannedStudy
from simcore.solve.stretch import Stretch

_SMALL_SHARE = 1e-6


@dataclass
class Solution:
    """The solved study of a circuit.

    times: breakpoints in s of the study's own clock, shape (n + 1,)
    valued: for each stretch, the circuit with the values its lets had then, nothing opened or shorted
    period: of the sources in s, None where there is none; window: (start, end) in s of what is judged
    tolerance: relative error of a step
    first_event: time in s of the study's first event, None where it has none
    notes: what a reader must know of how it was solved; statistics: steps, solves, iterations, rejected, periods
    multiplier: of a settled state the largest one, the share of a disturbance that is left after a period
    work: solved systems times their branches and columns
    """

    circuit: Circuit
    study: PlannedStudy
    times: np.ndarray
    stretches: list[Stretch]
    valued: list[Circuit]
    period: float | None
    window: tuple[float, float]
    tolerance: float
    first_event: float | None = None
    notes: list[str] = field(default_factory=list)
    statistics: dict[str, float] = field(default_factory=dict)
    multiplier: float | None = None
    work: int = 0

    def voltage(self, a: str, b: str) -> np.ndarray:
        """u of node a against node b in V, shape (n, 3): at start, middle and end of each step."""
        return np.concatenate([stretch.node(a) - stretch.node(b) for stretch in self.stretches])

    def current(self, element: str, port: str = "") -> np.ndarray:
        """The current into an element's port at its first terminal, in A, shape (n, 3); zero while it is taken out."""
        first = next(p.a for p in self.circuit.elements[element].ports if p.name == port)
        return np.concatenate([self._port_current(stretch, element, port, first) for stretch in self.stretches])

    @staticmethod
    def _port_current(stretch: Stretch, element: str, port: str, first: str) -> np.ndarray:
        total = np.zeros(stretch.shape)
        for index in stretch.system.branches_of.get((element, port), ()):
            weight = dict(stretch.system.frame.branches[index].weights).get(first)
            if weight is not None:
                total = total + weight.constant * stretch.current(index)
        return total

    def series(self, element: str) -> list[np.ndarray]:
        """An element's series branches as in Stretch.series, shape (5, n, 3) each; zero while it is taken out."""
        found: dict[tuple[str, int], list[np.ndarray]] = {}
        for place, stretch in enumerate(self.stretches):
            seen: dict[str, int] = {}
            branches = stretch.system.frame.branches
            for index in stretch.system.branches_of_element.get(element, ()):
                branch = branches[index]
                if isinstance(branch, SeriesBranch):
                    seen[branch.port] = seen.get(branch.port, 0) + 1
                    blank = [np.zeros((5, *other.shape)) for other in self.stretches]
                    found.setdefault((branch.port, seen[branch.port]), blank)[place] = stretch.series(index)
        return [np.concatenate(pieces, axis=1) for pieces in found.values()]

    @property
    def smooth(self) -> np.ndarray:
        """Whether no kink or jump lies inside a step, shape (n,). Where one does, the middle value gives the quadratic
        the right integral, and what it reaches between its ends is no extremum."""
        return np.concatenate([stretch.smooth for stretch in self.stretches])

    def shown(self, element: str, name: str) -> np.ndarray | None:
        """What an element shows of what it carries, such as its "energy" in J, shape (n, 3): zero while it is taken
        out; None where it shows no such."""
        found = [stretch.shown(element, name) for stretch in self.stretches]
        if all(each is None for each in found):
            return None
        pairs = zip(found, self.stretches, strict=True)
        return np.concatenate([np.zeros(stretch.shape) if each is None else each for each, stretch in pairs])

    def temperature(self, element: str) -> np.ndarray:
        """What an element runs at, in K, shape (n, 3); while it is taken out, what it would run at."""
        described = self.circuit.elements[element]
        found = []
        for stretch, circuit in zip(self.stretches, self.valued, strict=True):
            course = stretch.shown(element, "temperature")
            if course is None:
                steady = temperature_of(circuit.elements.get(element, described), circuit.ambient)
                course = np.full(stretch.shape, steady)
            found.append(course)
        return np.concatenate(found)

    @property
    def kirchhoff(self) -> float:
        """The worst sum of currents at any node and time, relative to the largest current there, or to a millionth of
        the circuit's where a node carries less."""
        return self.worst_node[0]

    @cached_property
    def worst_node(self) -> tuple[float, str]:
        """That sum, and the node it is at."""
        worst: dict[Hashable, float] = {}
        largest: dict[Hashable, float] = {}
        for stretch in self.stretches:
            for unknown, (total, current) in stretch.kirchhoff().items():
                worst[unknown] = float(np.maximum(total, worst.get(unknown, 0.0)))
                largest[unknown] = max(largest.get(unknown, 0.0), current)
        floor = max(1e-15, _SMALL_SHARE * max(largest.values(), default=0.0))
        shares = {unknown: total / max(largest[unknown], floor) for unknown, total in worst.items()}
        node = max(shares, key=lambda unknown: shares[unknown] if shares[unknown] >= 0.0 else math.inf, default="")
        return shares.get(node, 0.0), node if isinstance(node, str) else str(node[0])
