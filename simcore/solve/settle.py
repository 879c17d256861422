"""The periodic steady state as the solution of an equation: the states a period later equal those now.

Newton on the period map (shooting; Aprille and Trick, Proc. IEEE 60, 1972) by pseudo-transient continuation (Kelley and
Keyes, SIAM J. Numer. Anal. 35, 1998) counted in periods, with one plain period after each update: it begins as
following the circuit and ends as Newton. Where it stalls, periods are followed until the estimated distance to the
settled state is small (Aitken 1926).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from grammar.quantities import AMPERE, COULOMB, KELVIN, SECOND, VOLT, show
from simcore.solve.engine import Engine, Interrupted, Stepping
from simcore.solve.failure import Reason
from simcore.solve.stretch import Stretch

_AGREEMENT = 1e-7
"""Newton's correction, over the states' sizes, at which the state is settled; Newton's next would be far smaller."""
_OF_TOLERANCE = 0.01
"""Or this share of the tolerance of a step, where that is more."""
_NEAR, _FAR = 1e-2, 0.1
"""Newton's correction below which the derivative at hand will do, and above which a plain period follows it."""
_LITTLE = 1e-5
"""What a period adds, below which Newton's whole correction is tried however far it goes: states that forget within
thousands of periods change so little in one that following them would take as many."""
_SHRINKS = 0.25
"""Least shrinking of a correction by a derivative at hand."""
_ROUNDS = 30
_FIRST = 4.0
_SHORTEST = 0.25
_GROWTH = 4.0
_LARGEST_GROWTH = 100.0
_FREE = 1e-9
_UNMET = 0.3
"""Most that a period may add to what nothing takes back, over the tolerance of a step: more is drift."""
_LONG = 1e3
"""Periods ahead after which what still grows as at first is said to drift."""
_SMALL_SHARE = 0.01
_MOST_PERIODS = 4_000
_SPAN = 4
_LEAVES = 1.0 + 1e-3
_LONGEST_REPEAT = 8
_LOOK_EVERY = 50
_STANDING = 4


_DRIFTS = {"voltage": VOLT, "current": AMPERE, "charge": COULOMB, "temperature": KELVIN, "flux": VOLT * SECOND}
"""Units of what a state may hold."""


@dataclass(frozen=True)
class Settled:
    """How a settled state was reached: words for the report, periods followed with the settled one (those that carry
    derivatives counted apart), the largest multiplier, which is the share of a disturbance that is left after a period,
    the settled period, and the derivative of the states at its end by those at its start, None where it was not found.
    """

    how: str
    periods: int
    responding: int
    multiplier: float
    stretches: list[Stretch]
    slope: np.ndarray | None = None


class _Map:
    """The period map of an engine, from a phase of the sources (clock, in s) on."""

    def __init__(self, engine: Engine, clock: float, period: float, stepping: Stepping):
        self.engine, self.clock, self.period, self.stepping = engine, clock, period, stepping
        self.quantities = [state.quantity for state in engine.kernel.system.states]
        self.plain = self.responding = 0

    def follow(self, states: np.ndarray) -> np.ndarray:
        """The states a period later."""
        self._start(states)
        self.engine.advance(self.clock + self.period, self.stepping, record=False)
        self.plain += 1
        return np.array(self.engine.states())

    def record(self, states: np.ndarray) -> tuple[np.ndarray, list[Stretch]]:
        """The states a period later, and the period."""
        self._start(states)
        self.engine.flags.told.clear()
        stretches = self.engine.advance(self.clock + self.period, self.stepping, record=True)
        self.plain += 1
        return np.array(self.engine.states()), stretches

    def respond(self, states: np.ndarray) -> tuple[np.ndarray, np.ndarray] | None:
        """The states a period later and their derivative by those now; None where the engine has no derivative."""
        self._start(states)
        derivative = self.engine.respond(self.clock + self.period, self.stepping)
        if derivative is None:
            return None
        self.responding += 1
        return np.array(self.engine.states()), derivative

    def _start(self, states: np.ndarray) -> None:
        self.engine.set_states(states.tolist())
        self.engine.move(self.clock)

    def owner(self, state: int) -> str:
        """A state in words."""
        system = self.engine.kernel.system
        return f"{self.quantities[state]} of {system.frame.branches[system.states[state].branch].element}"

    def scale(self, states: np.ndarray) -> np.ndarray:
        """The size of each state: its peak of late, at least a hundredth of the largest of its quantity."""
        sizes = np.maximum(np.abs(states), self.engine.peaks())
        for quantity in dict.fromkeys(self.quantities):
            own = np.array([each == quantity for each in self.quantities])
            sizes[own] = np.maximum(sizes[own], _SMALL_SHARE * np.max(sizes[own], initial=0.0))
        return np.where(sizes > 0.0, sizes, 1.0)


def settle(
    engine: Engine, clock: float, period: float, stepping: Stepping, slope: np.ndarray | None = None
) -> Settled:
    """Bring an engine to its periodic state at a phase of the sources (clock, in s) and record a period of it.

    slope: the derivative of the period map, shape (states, states), where one is known from a solution close by.
    Raises Interrupted where no periodic state is reached.
    """
    way = _Map(engine, clock, period, stepping)
    start = np.array(engine.states())
    if len(start) == 0:
        _, stretches = way.record(way.follow(start))
        return Settled("settled at once, since it has no states", way.plain, 0, 0.0, stretches)
    try:
        found = _closed(way, start, slope) if slope is not None and len(slope) == len(start) else None
        found = found or _by_newton(way, start)
    except Interrupted as stop:
        if stop.reason is Reason.NOT_SETTLED:
            raise
        found = None
    return found or _by_following(way, start)


@dataclass(frozen=True)
class _Point:
    """States, the derivative of those a period later, and over the scale of the states: what a period adds (residual),
    the derivative (slope), what Newton would add (rest), what of the residual no correction meets, since nothing takes
    it back (unmet), and how much of that the roughness of the map may be (unsure)."""

    states: np.ndarray
    derivative: np.ndarray
    scale: np.ndarray
    residual: np.ndarray
    slope: np.ndarray
    rest: np.ndarray
    unmet: np.ndarray
    unsure: float

    @classmethod
    def of(cls, way: _Map, states: np.ndarray, after: np.ndarray, derivative: np.ndarray) -> _Point:
        """From the states at both ends of a period."""
        scale = way.scale(after)
        residual, slope = (after - states) / scale, derivative * scale / scale[:, None]
        matrix = np.eye(len(states)) - slope
        rest = _solved(matrix, residual)
        unmet, unsure = residual - matrix @ rest, _UNMET * way.stepping.tolerance
        return cls(states, derivative, scale, residual, slope, rest, unmet, unsure)

    @property
    def size(self) -> float:
        """The largest residual."""
        return float(np.max(np.abs(self.residual)))

    @property
    def distance(self) -> float:
        """How far Newton takes the settled state to be; without end where it drifts."""
        return np.inf if np.max(np.abs(self.unmet)) > self.unsure else float(np.max(np.abs(self.rest)))

    def corrected(self, pseudo: float = np.inf) -> np.ndarray:
        """The states after a correction with a pseudo time in periods; without one, Newton's."""
        if pseudo == np.inf:
            return self.states + self.rest * self.scale
        damped = (1.0 + 1.0 / pseudo) * np.eye(len(self.states)) - self.slope
        return self.states + _solved(damped, self.residual) * self.scale


def _point(way: _Map, states: np.ndarray) -> _Point | None:
    answer = way.respond(states)
    return None if answer is None else _Point.of(way, states, *answer)


def _by_newton(way: _Map, start: np.ndarray) -> Settled | None:
    """Pseudo-transient continuation; None where it stalls.

    A correction that makes the residual grow is taken back and made shorter. The steps of a run make its map rough by
    about their tolerance: where residuals of that size no longer shrink, the best state is as good as can be told.
    """
    pseudo, since, whole = _FIRST, 0, True
    roughness = 3.0 * way.stepping.tolerance
    base = best = first = _point(way, way.follow(start))
    for _ in range(_ROUNDS):
        if base is None or best is None or first is None:
            return None
        near = best.distance <= _NEAR and since == 0
        found = _closed(way, best.corrected(), best.derivative) if near else None
        if found is None and since >= _STANDING and best.size <= roughness and best.distance < np.inf:
            _, stretches = way.record(best.corrected())
            found = _described(way, best.derivative, best.distance, stretches)
        if found is not None:
            return found if found.multiplier <= _LEAVES else None
        little = whole and base.size <= max(_LITTLE, roughness) and base.distance < np.inf
        far = base.distance > _FAR and not little
        point = _point(way, way.follow(base.corrected(pseudo)) if far else base.corrected())
        if point is None:
            return None
        if far and pseudo >= _LONG:
            _hold_against_drift(way, first, point)
        whole = point.size <= 1.5 * base.size or pseudo <= _SHORTEST
        if not whole:
            pseudo /= 8.0
        else:
            pseudo *= min(_GROWTH * max(base.size / max(point.size, 1e-300), 1.0), _LARGEST_GROWTH)
            base = point
        since = 0 if point.distance <= 0.5 * best.distance < np.inf else since + 1
        best = point if point.distance < best.distance else best
    return None


def _hold_against_drift(way: _Map, first: _Point, later: _Point) -> None:
    """What a period adds long after at least half as fast as at first, and nothing takes back, drifts."""
    state = int(np.argmax(np.abs(first.unmet)))
    before, after = (float(point.unmet[state] * point.scale[state]) for point in (first, later))
    if abs(first.unmet[state]) > first.unsure and abs(after) >= 0.5 * abs(before):
        unit = _DRIFTS.get(way.quantities[state])
        speed = f"{after:.3g}" if unit is None else show(after, unit)
        detail = f"the {way.owner(state)} drifts by {speed} a period, and nothing takes it back"
        raise Interrupted(Reason.NOT_SETTLED, way.clock, detail)


def _closed(way: _Map, states: np.ndarray, derivative: np.ndarray) -> Settled | None:
    """Recorded periods from a state near the settled one, each correcting the next by a derivative found before (chord
    method), until one needs no correction; None where they shrink too slowly."""
    agreement = max(_AGREEMENT, _OF_TOLERANCE * way.stepping.tolerance)
    last = np.inf
    while True:
        after, stretches = way.record(states)
        point = _Point.of(way, states, after, derivative)
        if point.distance <= agreement:
            return _described(way, derivative, point.distance, stretches)
        if point.distance > _SHRINKS * last or point.distance == np.inf:
            return None
        states, last = point.corrected(), point.distance


def _solved(matrix: np.ndarray, right: np.ndarray) -> np.ndarray:
    """The least-squares solution of least size: what no equation fixes (a multiplier of 1) stays as it is."""
    left, sizes, across = np.linalg.svd(matrix)
    shares = np.where(sizes > _FREE, left.T @ right / np.where(sizes > _FREE, sizes, 1.0), 0.0)
    return across.T @ shares


def _described(way: _Map, derivative: np.ndarray, distance: float, stretches: list[Stretch]) -> Settled:
    """What was found by Newton, in words too."""
    largest = float(np.max(np.abs(np.linalg.eigvals(derivative))))
    how = f"settled by Newton on the period map to {max(distance, _AGREEMENT):.0e} of its states; {_left(largest)}"
    if abs(1.0 - largest) < _FREE:
        how += "; what nothing in the circuit fixes (a multiplier of 1) is as reached from rest"
    return Settled(how, way.plain, way.responding, largest, stretches, derivative)


def _left(multiplier: float) -> str:
    """What the largest multiplier says; of one next to 1, by how much it is less."""
    rest = 1.0 - multiplier
    shown = f"1 - {rest:.1g}" if _FREE <= rest < 5e-4 else f"{multiplier:.3g}"
    return f"largest multiplier {shown}, the share of a disturbance that is left after a period"


def _by_following(way: _Map, start: np.ndarray) -> Settled:
    """Period after period until the distance, the rest of a geometric series, is small."""
    goal = max(_AGREEMENT, 0.3 * way.stepping.tolerance)
    states, changes = start, []
    kept: list[np.ndarray] = []
    while way.plain < _MOST_PERIODS:
        after = way.follow(states)
        scale = way.scale(after)
        changes.append(float(np.max(np.abs(after - states) / scale)))
        states = after
        distance, ratio = _distance(changes)
        if max(changes[-1], distance) <= goal:
            how = f"settled by following {way.plain} periods to {goal:.0e} of its states; {_left(ratio)}"
            _, stretches = way.record(states)
            return Settled(how, way.plain, way.responding, ratio, stretches)
        kept = [*kept[-_LONGEST_REPEAT:], after]
        moves = changes[-1] > 10.0 * goal
        repeat = _repeat(kept, scale, goal) if moves and way.plain % _LOOK_EVERY == 0 else None
        if repeat is not None:
            longer = repeat * way.period
            what = way.owner(int(np.argmax(np.abs(kept[-1] - kept[-2]) / scale)))
            detail = f"the {what} repeats only every {repeat} periods of the sources; give it `period = {longer:g} s`"
            raise Interrupted(Reason.NOT_SETTLED, way.clock, detail)
    drift = "drifts by" if _distance(changes)[1] >= 1.0 else "still changes by"
    what = way.owner(int(np.argmax(np.abs(kept[-1] - kept[-2]) / scale)))
    detail = f"after {way.plain} periods the {what} {drift} {changes[-1]:.2g} of its size a period"
    raise Interrupted(Reason.NOT_SETTLED, way.clock, detail)


def _repeat(kept: Sequence[np.ndarray], scale: np.ndarray, goal: float) -> int | None:
    """After how many periods, from two on, the last states stood as they stand now; None where they did not."""
    for count in range(2, len(kept)):
        if float(np.max(np.abs(kept[-1] - kept[-1 - count]) / scale)) <= goal:
            return count
    return None


def _distance(changes: Sequence[float]) -> tuple[float, float]:
    """The distance still to go and the ratio of successive changes, both from the last few periods."""
    if changes[-1] == 0.0:
        return 0.0, 0.0
    if len(changes) <= _SPAN:
        return changes[-1] if len(changes) > 1 else np.inf, 1.0
    ratio = (changes[-1] / changes[-1 - _SPAN]) ** (1.0 / _SPAN) if changes[-1 - _SPAN] > 0.0 else 0.0
    return (np.inf if ratio >= 1.0 else changes[-1] * ratio / (1.0 - ratio)), ratio
