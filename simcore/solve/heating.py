"""Elements that their own loss heats: the temperature at which what a study dissipates is what it was solved with.

It wraps the solving of a study and knows elements by their keys only. A settled state and an operating point are in
thermal balance too; a transient runs at the temperatures it starts from, ambient or those of the study before. Where a
temperature changes no equation, such as that of a capacitor's core, it follows from the solution at once.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from grammar.quantities import WATT, show
from simcore.components import KINDS
from simcore.components.part import temperature_of
from simcore.design.circuit import Change, Circuit, Element, PlannedStudy
from simcore.design.overview import celsius
from simcore.design.study_kinds import Nature
from simcore.equations.kernel import KernelCache
from simcore.solve.course import Course, Reached, Variant, Watch
from simcore.solve.engine import Counts
from simcore.solve.failure import NoSolution, Reason
from simcore.solve.solution import Solution

_ROUNDS, _PATIENCE, _LOOSEST = 40, 3, 1e-2
"""Rounds in all, and those after which what the steps of a run make of a loss may hide the balance: with each round
more, twice as far from it will do, up to a share of the rise that no temperature is known to."""
_SHARE, _LEAST, _STILL = 3.0, 1e-6, 1e-9
"""How far from balance is near enough, as a share of the rise: over the step tolerance (as near as a loss is known that
comes from short overlaps), at least, and where nothing moves (then in K too)."""

_HOTTEST = 1000.0
"""K: no junction lives there, and the law means nothing."""

_STRIDE = 10.0
"""K of a step at most that no secant tells the length of: a leakage that doubles in it must not be stepped past its
runaway."""
_GROWTHS, _FAR = 3, 0.05
"""Rounds in a row in which a junction that gets warmer moves away from its balance, and faster each time, which make a
runaway (one that takes current from a few others moves away too, but slower as it has most of it); and how far from it,
as a share of its rise, a round must be for that: near it, what is left is what steps make of a loss."""

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
    (Steffensen 1933). They start at ambient, and the loss in reverse is convex in T, so that they stay below the first
    balance there is; beyond it, what they move to is none that the junction would live to see. Raises NoSolution, with
    Reason.RUNAWAY where the loss grows faster than it is carried away.
    """
    earlier = before.changes if before is not None else ()
    balance = _Balance(variant(earlier + study.changes), dict(before.temperatures) if before is not None else {})
    enough = _STILL if study.nature is Nature.REST else max(_LEAST, _SHARE * tolerance)
    counts, periods = Counts(), {"periods": 0.0, "periods with derivatives": 0.0}
    for round_ in range(_ROUNDS):
        if round_ >= _PATIENCE:
            enough = max(enough, min(2.0 * enough, _LOOSEST))
        warm = _Warm(variant, dict(balance.temperatures))
        solution, left = Course(study, warm, before, tolerance, kernels, counts, watch=watch).solve()
        for name in periods.keys() & solution.statistics:
            periods[name] += solution.statistics[name]
            solution.statistics[name] = periods[name]
        left = replace(left, temperatures=dict(balance.temperatures))
        if study.nature is Nature.COURSE:
            return solution, left
        if not balance.update(solution, enough):
            return _with_cores(solution, left, balance.cores)
        hottest = max(balance.temperatures, key=lambda name: balance.temperatures[name])
        if balance.runaway or not balance.temperatures[hottest] < _HOTTEST:
            raise NoSolution(study.name, Reason.RUNAWAY, detail=balance.runaway or hottest)
        if study.nature is Nature.PERIOD:
            before = replace(left, changes=earlier)
    raise NoSolution(study.name, Reason.RUNAWAY, detail=hottest)


def _with_cores(solution: Solution, left: Reached, cores: Mapping[str, float]) -> tuple[Solution, Reached]:
    """The same with the temperatures in K of what is heated without changing an equation."""
    if cores:
        solution.valued = [_warmed(circuit, cores) for circuit in solution.valued]
        left = replace(left, temperatures={**left.temperatures, **cores})
    return solution, left


class _Warm:
    """A variant function whose circuits run at given temperatures."""

    def __init__(self, variant: Variant, temperatures: Mapping[str, float]):
        self._variant, self._temperatures = variant, temperatures
        self._known: dict[tuple[Change, ...], Circuit] = {}

    def __call__(self, changes: tuple[Change, ...]) -> Circuit:
        if changes not in self._known:
            circuit = self._variant(changes)
            heated = [name for name, element in circuit.elements.items() if _heats(element)]
            warm = {name: self._temperatures[name] for name in heated if name in self._temperatures}
            self._known[changes] = _warmed(circuit, warm)
        return self._known[changes]


def _warmed(circuit: Circuit, temperatures: Mapping[str, float]) -> Circuit:
    """A circuit whose elements run at given temperatures in K, those that are not named as they are."""
    warm = {
        name: replace(circuit.elements[name], given={**circuit.elements[name].given, "temperature": temperature})
        for name, temperature in temperatures.items()
        if name in circuit.elements
    }
    return replace(circuit, elements={**circuit.elements, **warm}) if warm else circuit


def _heats(element: Element) -> bool:
    """Whether an element's temperature follows from its loss."""
    return bool(element.given.get("thermal_resistance")) and element.given.get("temperature") is None


def _acts(element: Element) -> bool:
    """Whether an element's temperature changes its equations: its values hold at one, and change with it."""
    return "data_temperature" in KINDS[element.kind].key


@dataclass
class _Balance:
    """Temperatures in K by element of a circuit, what they and the balance were a round before, and how often in a row
    the balance has moved away; cores: temperatures that change no equation; runaway: in words, once there is one."""

    circuit: Circuit
    temperatures: dict[str, float]

    def __post_init__(self) -> None:
        self._before: dict[str, tuple[float, float]] = {}
        self._slopes: dict[str, float] = {}
        self._growths: dict[str, int] = {}
        self.cores: dict[str, float] = {}
        self.runaway = ""

    def update(self, solution: Solution, enough: float) -> bool:
        """Move the temperatures towards the balance; whether any was off by more than a share of its rise."""
        off = False
        for name, element in self.circuit.elements.items():
            if not _heats(element):
                continue
            ambient, resistance = temperature_of(element, self.circuit.ambient), element.given["thermal_resistance"]
            if not _acts(element):
                self.cores[name] = ambient + resistance * _heat(solution, name)
                continue
            now, loss = self.temperatures.get(name, ambient), _loss(solution, element)
            rise = resistance * loss
            excess = ambient + rise - now
            off = off or abs(excess) > max(_STILL, enough * abs(rise))
            self.temperatures[name] = now + self._step(name, now, excess, _FAR * rise)
            if self._growths[name] == _GROWTHS:
                carried = show((now - ambient) / resistance, WATT)
                self.runaway = (
                    f"{name}, at {celsius(round(now, 1))}: of {show(loss, WATT)} {carried} are carried away"
                )
        return off

    def _step(self, name: str, now: float, excess: float, far: float) -> float:
        """The secant step to a balance, or a short plain one where there is no secant or it points away."""
        last, self._before[name] = self._before.get(name), (now, excess)
        growths, self._growths[name] = self._growths.get(name, 0), 0
        if last is None or last[0] == now:
            return min(excess, _STRIDE)
        slope = (excess - last[1]) / (now - last[0])
        if slope > max(0.0, self._slopes.get(name, 0.0)) and now > last[0] and excess > far:
            self._growths[name] = growths + 1
        self._slopes[name] = slope
        return -excess / slope if slope < -0.05 else min(excess, _STRIDE)


def _loss(solution: Solution, element: Element) -> float:
    """Mean loss in W of one device of an element over the study, exact for quadratic pieces."""
    port = element.ports[0]
    voltage, current = solution.voltage(port.a, port.b), solution.current(element.name, port.name)
    devices = (element.given.get("in_series") or 1.0) * (element.given.get("in_parallel") or 1.0)
    return _mean(solution, voltage, current) / devices


def _heat(solution: Solution, name: str) -> float:
    """Mean loss in W in an element's resistances over the study, exact for quadratic pieces."""
    total = 0.0
    for resistance, _, _, current, _ in solution.series(name):
        total += _mean(solution, resistance * current, current)
    return total


def _mean(solution: Solution, *factors: np.ndarray) -> float:
    """Mean of a product of quadratics over the study."""
    shares = np.stack([_at(values) for values in factors]).prod(axis=0) @ _WEIGHTS
    spans = np.diff(solution.times)
    return float(shares @ spans / np.sum(spans))


def _at(values: np.ndarray) -> np.ndarray:
    """Quadratics through start, middle and end, at the Gauss points; shape (n, 3)."""
    x = _GAUSS
    basis = np.stack([(1.0 - x) * (1.0 - 2.0 * x), 4.0 * x * (1.0 - x), x * (2.0 * x - 1.0)])
    return values @ basis
