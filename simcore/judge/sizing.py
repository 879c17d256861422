"""The value of a let that just meets a requirement: a scan for where the verdict turns, then a root search in between.

It is given a function that judges the design at a value, and knows no designs, files or texts.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from simcore.judge.held import Verdict
from simcore.judge.outcome import State
from simcore.judge.preferred import Series

POINTS = 13
"""Values of the scan: a verdict that turns twice between two of them is not seen."""
RESOLUTION = 1e-4
"""Relative width to which a turn is narrowed down."""
MOST_STEPS = 60
TRIES = 3
"""Preferred values that are tried beyond a turn: the first can lie within the bound of the verdict."""


@dataclass(frozen=True)
class Judged:
    """The design at a value: its verdicts, none with a reason where it has no solution there."""

    value: float
    verdicts: Sequence[Verdict]
    failure: str = ""

    @property
    def holds(self) -> bool:
        """Whether everything required holds for certain."""
        return bool(self.verdicts) and all(verdict.state is State.HOLDS for verdict in self.verdicts)

    @property
    def share(self) -> float:
        """The smallest margin as a share of its limit: from 0 up the requirement is met; 1 or -1 where there is no
        margin but a verdict."""
        return min((_share(verdict) for verdict in self.verdicts), default=-1.0)


def _share(verdict: Verdict) -> float:
    margin, limits = verdict.margin, [part for part in (verdict.limit, verdict.upper, verdict.figure) if part]
    sizes = [abs(part.value) for part in limits if math.isfinite(part.value) and part.value != 0.0]
    if margin is None or not margin.defined or not sizes:
        return 1.0 if verdict.state is State.HOLDS else -1.0
    return margin.value / sizes[0]


@dataclass(frozen=True)
class Turn:
    """Where the requirement begins to be met: value; above: whether it is met above it, else below; preferred: the
    first preferred value on that side at which it holds, None where there is none in the range."""

    value: float
    above: bool
    preferred: Judged | None


@dataclass(frozen=True)
class Sizing:
    """tried: every value that was judged, rising; turns: where the requirement begins or ceases to be met, rising."""

    tried: Sequence[Judged]
    turns: Sequence[Turn]

    @property
    def met_throughout(self) -> bool:
        """Whether no turn was found and every value of the scan meets the requirement."""
        return not self.turns and all(each.share >= 0.0 for each in self.tried)

    @property
    def solved(self) -> bool:
        """Whether some preferred value was found, or any value will do."""
        return self.met_throughout or any(turn.preferred is not None for turn in self.turns)


def size(judge: Callable[[float], Judged], low: float, high: float, series: Series) -> Sizing:
    """Find where the requirement begins to be met between two values above zero.

    The scan is even on a logarithmic scale; each change of sign of the margin between two neighbours is narrowed down
    by Brent's method (R. P. Brent, Algorithms for Minimization without Derivatives, 1973), which needs no slope and so
    also finds a jump. So a requirement that is met in the middle only has two turns.
    """
    from scipy.optimize import brentq

    tried: dict[float, Judged] = {}

    def at(value: float) -> Judged:
        if value not in tried:
            tried[value] = judge(value)
        return tried[value]

    ratio = high / low
    scan = [low, *(low * ratio ** (place / (POINTS - 1)) for place in range(1, POINTS - 1)), high]
    met = [at(value).share >= 0.0 for value in scan]
    exact = {math.log(value): value for value in scan}

    def share(exponent: float) -> float:
        return at(exact.get(exponent, math.exp(exponent))).share

    turns = []
    for (left, before), (right, after) in pairwise(zip(scan, met, strict=True)):
        if before != after:
            ends = math.log(left), math.log(right)
            found, _ = brentq(share, *ends, xtol=RESOLUTION, maxiter=MOST_STEPS, full_output=True, disp=False)
            value = min(max(math.exp(found), left), right)
            turns.append(Turn(value, after, _preferred(at, value, after, low, high, series)))
    return Sizing([tried[value] for value in sorted(tried)], turns)


def _preferred(
    at: Callable[[float], Judged], turn: float, above: bool, low: float, high: float, series: Series
) -> Judged | None:
    """The first preferred value beyond a turn at which the requirement holds for certain."""
    value = turn
    for _ in range(TRIES):
        value = series.up(value) if above else series.down(value)
        if not low <= value <= high:
            return None
        judged = at(value)
        if judged.holds:
            return judged
        value *= 1.0 + RESOLUTION if above else 1.0 - RESOLUTION
    return None
