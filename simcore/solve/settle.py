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

from simcore.solve.engine import Engine, Interrupted, Stepping
from simcore.solve.failure import Reason

_AGREEMENT = 1e-6
"""Newton's correction, over the states' sizes, at which the state is settled."""
_ROUNDS = 30
_FIRST = 4.0
_SHORTEST = 0.25
_GROWTH = 4.0
_LARGEST_GROWTH = 100.0
_FREE = 1e-9
_SMALL_SHARE = 0.01
_MOST_PERIODS = 4_000
_SPAN = 4
_LEAVES = 1.0 + 1e-3
_LONGEST_REPEAT = 8
_LOOK_EVERY = 50
_STANDING = 4


@dataclass(frozen=True)
class Settled:
    """How a settled state was reached: words for the report, periods followed (those that carry derivatives counted
    apart), and the largest multiplier, the share of a disturbance that is left after a period."""

    how: str
    periods: int
    responding: int
    multiplier: float


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

    def finish(self, states: np.ndarray) -> None:
        """Leave the engine in the settled state, at the start of a period."""
        self._start(states)

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


def settle(engine: Engine, clock: float, period: float, stepping: Stepping) -> Settled:
    """Bring an engine to its periodic state at a phase of the sources (clock, in s).

    Raises Interrupted where it is not reached.
    """
    way = _Map(engine, clock, period, stepping)
    start = np.array(engine.states())
    if len(start) == 0:
        way.follow(start)
        way.finish(start)
        return Settled("settled at once, since it has no states", 1, 0, 0.0)
    try:
        found = _by_newton(way, start)
    except Interrupted:
        found = None
    return found or _by_following(way, start)


@dataclass(frozen=True)
class _Point:
    """States, what a period adds to them (residual), its derivative (slope) and what Newton would add (rest), all but
    the states over their scale."""

    states: np.ndarray
    scale: np.ndarray
    residual: np.ndarray
    slope: np.ndarray
    rest: np.ndarray

    @property
    def size(self) -> float:
        """The largest residual."""
        return float(np.max(np.abs(self.residual)))

    @property
    def distance(self) -> float:
        """How far Newton takes the settled state to be."""
        return float(np.max(np.abs(self.rest)))

    def corrected(self, pseudo: float = np.inf) -> np.ndarray:
        """The states after a correction with a pseudo time in periods; without one, Newton's."""
        damped = (1.0 + 1.0 / pseudo) * np.eye(len(self.states)) - self.slope
        return self.states + _solved(damped, self.residual) * self.scale


def _point(way: _Map, states: np.ndarray) -> _Point | None:
    answer = way.respond(states)
    if answer is None:
        return None
    after, derivative = answer
    scale = way.scale(after)
    residual, slope = (after - states) / scale, derivative * scale / scale[:, None]
    return _Point(states, scale, residual, slope, _solved(np.eye(len(states)) - slope, residual))


def _by_newton(way: _Map, start: np.ndarray) -> Settled | None:
    """Pseudo-transient continuation; None where it stalls.

    A correction that makes the residual grow is taken back and made shorter. The steps of a run make its map rough by
    about their tolerance: where residuals of that size no longer shrink, the best state is as good as can be told.
    """
    states = way.follow(start)
    pseudo, since = _FIRST, 0
    base = best = _point(way, states)
    for _ in range(_ROUNDS):
        if base is None or best is None:
            return None
        rough = since >= _STANDING and best.size <= 3.0 * way.stepping.tolerance
        if best.distance <= _AGREEMENT or rough:
            way.finish(best.corrected())
            return _described(way, best)
        point = _point(way, way.follow(base.corrected(pseudo)))
        if point is None:
            return None
        if point.size > 1.5 * base.size and pseudo > _SHORTEST:
            pseudo /= 8.0
        else:
            pseudo *= min(_GROWTH * max(base.size / max(point.size, 1e-300), 1.0), _LARGEST_GROWTH)
            base = point
        since = since + 1 if point.distance > 0.5 * best.distance else 0
        best = point if point.distance < best.distance else best
    return None


def _solved(matrix: np.ndarray, right: np.ndarray) -> np.ndarray:
    """The least-squares solution of least size: what no equation fixes (a multiplier of 1) stays as it is."""
    left, sizes, across = np.linalg.svd(matrix)
    shares = np.where(sizes > _FREE, left.T @ right / np.where(sizes > _FREE, sizes, 1.0), 0.0)
    return across.T @ shares


def _described(way: _Map, point: _Point) -> Settled | None:
    """The words for a state found by Newton; None where it is one that the circuit leaves by itself."""
    largest = float(np.max(np.abs(np.linalg.eigvals(point.slope))))
    if largest > _LEAVES:
        return None
    reached = max(point.distance, _AGREEMENT)
    how = f"settled by Newton on the period map to {reached:.0e} of its states; {_left(largest)}"
    if 1.0 - largest < _FREE:
        how += "; what nothing in the circuit fixes (a multiplier of 1) is as reached from rest"
    return Settled(how, way.plain, way.responding, largest)


def _left(multiplier: float) -> str:
    """What the largest multiplier says."""
    return f"largest multiplier {multiplier:.3g}, the share of a disturbance that is left after a period"


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
            way.finish(states)
            how = f"settled by following {way.plain} periods to {goal:.0e} of its states; {_left(ratio)}"
            return Settled(how, way.plain, way.responding, ratio)
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
