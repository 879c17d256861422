"""The periodic steady state by following periods until the distance to it, not only the change from one to the next, is small.

The distance is estimated from the change d and its ratio r to the change before: d r / (1 - r), the rest of a geometric series
(Aitken, Proc. Royal Society of Edinburgh 46, 1926).
"""

from __future__ import annotations

from collections.abc import Sequence

from simcore.solve.engine import Engine, Interrupted, Stepping
from simcore.solve.failure import Reason

_AGREEMENT = 1e-6
_MOST_PERIODS = 20_000
_SPAN = 4
_STANDING = 100


def settle(engine: Engine, clock: float, period: float, stepping: Stepping) -> tuple[str, int]:
    """Bring an engine to its periodic state at a phase of the sources (clock, in s).

    Returns how it was reached, in words, and the periods it took. Raises Interrupted where it is not reached.
    """
    quantities = [state.quantity for state in engine.kernel.system.states]
    goal = max(_AGREEMENT, 0.05 * stepping.tolerance)
    changes: list[float] = []
    for count in range(1, _MOST_PERIODS + 1):
        before = engine.states()
        engine.saved[0] = clock
        engine.advance(clock + period, stepping, record=False)
        changes.append(largest_change(before, engine.states(), quantities))
        distance, ratio = _distance(changes)
        if max(changes[-1], distance) <= goal:
            engine.saved[0] = clock
            return f"settled by following {count} periods; from one to the next the rest shrinks to {ratio:.3g}", count
        if _stands_still(changes, stepping.tolerance):
            engine.saved[0] = clock
            note = f"after {count} periods a state that nothing in the circuit fixes still moves by {changes[-1]:.1g} a period"
            return f"{note}; it is as reached from rest", count
    raise Interrupted(Reason.NOT_SETTLED, clock, f"after {_MOST_PERIODS} periods {changes[-1]:.2g} of change a period is left")


def _stands_still(changes: list[float], tolerance: float) -> bool:
    """Whether what is left does not shrink at all over many periods and lies within the steps' own error: then it belongs to a
    state without any restoring loss (a multiplier of 1), whose value is as good as any."""
    if len(changes) <= _STANDING or max(changes[-_STANDING:]) > 3.0 * tolerance:
        return False
    half = _STANDING // 2
    return sum(changes[-half:]) > 0.95 * sum(changes[-2 * half : -half])


def largest_change(before: Sequence[float], after: Sequence[float], quantities: Sequence[str]) -> float:
    """The largest change of a state relative to its size, or to a hundredth of the largest of its quantity."""
    largest = {quantity: 0.0 for quantity in quantities}
    for value, quantity in zip(after, quantities, strict=True):
        largest[quantity] = max(largest[quantity], abs(value))
    result = 0.0
    for old, new, quantity in zip(before, after, quantities, strict=True):
        size = max(abs(new), 0.01 * largest[quantity])
        if size > 0.0:
            result = max(result, abs(new - old) / size)
    return result


def _distance(changes: list[float]) -> tuple[float, float]:
    """The distance still to go and the ratio of successive changes, both from the last few periods."""
    if changes[-1] == 0.0:
        return 0.0, 0.0
    if len(changes) <= _SPAN:
        return changes[-1] if len(changes) > 1 else 1.0, 1.0
    ratio = (changes[-1] / changes[-1 - _SPAN]) ** (1.0 / _SPAN) if changes[-1 - _SPAN] > 0.0 else 0.0
    if ratio >= 1.0:
        return changes[-1] * _MOST_PERIODS, ratio
    return changes[-1] * ratio / (1.0 - ratio), ratio
