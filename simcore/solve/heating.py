"""Junctions that their own loss heats: the temperature at which what a study dissipates is what it was solved with.

It wraps the solving of a study and knows elements by their keys only. A settled state and an operating point are in
thermal balance too; a transient runs at the temperatures it starts from, ambient or those of the study before.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from simcore.components.part import temperature_of
from simcore.design.circuit import Change, Circuit, Element, PlannedStudy
from simcore.equations.kernel import KernelCache
from simcore.solve.course import Course, Reached, Variant, Watch
from simcore.solve.failure import NoSolution, Reason
from simcore.solve.solution import Solution

_ROUNDS, _PATIENCE = 40, 12
"""Rounds in all, and those after which what the steps of a run make of a loss may hide the balance: ten times as far
from it will do then."""
_SHARE, _LEAST, _STILL = 0.3, 1e-6, 1e-9
"""How far from balance is near enough, as a share of the rise: of the step tolerance, at least, and where nothing moves
(then in K too)."""

_HOTTEST = 1000.0
"""K: no junction lives there, and the law means nothing."""

_GAUSS = 0.5 + 0.5 * np.array([-np.sqrt(0.6), 0.0, np.sqrt(0.6)])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 18.0


def solve_warm(
    study: PlannedStudy,
    variant: Variant,
    before: Reached | None,
    tolerance: float,
    kernels: KernelCache,
    watch: Watch | None = None,
) -> tuple[Solution, Reached]:
    """A study's solution and where it left the circuit, in thermal balance where the study stands still or repeats;
    watch: who wants to know how far it is.

    Fixed point of T = ambient + thermal resistance * mean loss(T) for each junction, by secant steps one by one
    (Steffensen 1933). Raises NoSolution, with Reason.RUNAWAY where the loss grows faster than it is carried away.
    """
    earlier = before.changes if before is not None else ()
    balance = _Balance(variant(earlier + study.changes), dict(before.temperatures) if before is not None else {})
    enough = _STILL if study.kind == "operating_point" else max(_LEAST, _SHARE * tolerance)
    for round_ in range(_ROUNDS):
        if round_ == _PATIENCE:
            enough *= 10.0
        warm = _Warm(variant, dict(balance.temperatures))
        course = Course(study, warm, before, tolerance, kernels)
        course.watch = watch
        solution, left = course.solve()
        left = replace(left, temperatures=dict(balance.temperatures))
        if study.kind == "transient" or not balance.update(solution, enough):
            return solution, left
        hottest = max(balance.temperatures, key=lambda name: balance.temperatures[name])
        if not balance.temperatures[hottest] < _HOTTEST:
            raise NoSolution(study.name, Reason.RUNAWAY, detail=hottest)
        if study.kind == "settled":
            before = replace(left, changes=earlier)
    raise NoSolution(study.name, Reason.RUNAWAY, detail=hottest)


class _Warm:
    """A variant function whose circuits run at given temperatures."""

    def __init__(self, variant: Variant, temperatures: Mapping[str, float]):
        self._variant, self._temperatures = variant, temperatures
        self._known: dict[tuple[Change, ...], Circuit] = {}

    def __call__(self, changes: tuple[Change, ...]) -> Circuit:
        if changes not in self._known:
            self._known[changes] = self._warmed(self._variant(changes))
        return self._known[changes]

    def _warmed(self, circuit: Circuit) -> Circuit:
        warm = {
            name: replace(element, given={**element.given, "temperature": self._temperatures[name]})
            for name, element in circuit.elements.items()
            if name in self._temperatures and _heats(element)
        }
        return replace(circuit, elements={**circuit.elements, **warm}) if warm else circuit


def _heats(element: Element) -> bool:
    """Whether an element's temperature follows from its loss."""
    return bool(element.given.get("thermal_resistance")) and element.given.get("temperature") is None


@dataclass
class _Balance:
    """Temperatures in K by element of a circuit, and what they and the balance were a round before."""

    circuit: Circuit
    temperatures: dict[str, float]

    def __post_init__(self) -> None:
        self._before: dict[str, tuple[float, float]] = {}

    def update(self, solution: Solution, enough: float) -> bool:
        """Move the temperatures towards the balance; whether any was off by more than a share of its rise."""
        off = False
        for name, element in self.circuit.elements.items():
            if not _heats(element):
                continue
            ambient = temperature_of(element, self.circuit.ambient)
            now = self.temperatures.get(name, ambient)
            rise = element.given["thermal_resistance"] * _loss(solution, element)
            excess = ambient + rise - now
            off = off or abs(excess) > max(_STILL, enough * abs(rise))
            self.temperatures[name] = now + self._step(name, now, excess)
        return off

    def _step(self, name: str, now: float, excess: float) -> float:
        """The secant step to a balance, or the plain one where there is no secant or it points away."""
        last, self._before[name] = self._before.get(name), (now, excess)
        if last is None or last[0] == now:
            return excess
        slope = (excess - last[1]) / (now - last[0])
        return -excess / slope if slope < -0.05 else excess


def _loss(solution: Solution, element: Element) -> float:
    """Mean loss in W of one device of an element over the study, exact for quadratic pieces."""
    port = element.ports[0]
    voltage, current = solution.voltage(port.a, port.b), solution.current(element.name, port.name)
    shares = np.stack([_at(values) for values in (voltage, current)]).prod(axis=0) @ _WEIGHTS
    spans = np.diff(solution.times)
    devices = (element.given.get("in_series") or 1.0) * (element.given.get("in_parallel") or 1.0)
    return float(shares @ spans / np.sum(spans)) / devices


def _at(values: np.ndarray) -> np.ndarray:
    """Quadratics through start, middle and end, at the Gauss points; shape (n, 3)."""
    x = _GAUSS
    basis = np.stack([(1.0 - x) * (1.0 - 2.0 * x), 4.0 * x * (1.0 - x), x * (2.0 * x - 1.0)])
    return values @ basis
