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
NEARNESS, WIDENINGS = 1.1, 4
"""Ratio within which a turn that is expected is looked for, and how often it is squared."""
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


Judge = Callable[[float, bool], Judged]
"""Judges the design at a value; whether it has to be sure of its verdicts: a search only follows margins."""


def size(judge: Judge, low: float, high: float, series: Series, near: Sequence[Turn] = ()) -> Sizing:
    """Find where the requirement begins to be met between two values above zero; near: turns expected, if any.

    The scan is even on a logarithmic scale; each change of sign of the margin between two neighbours is narrowed down
    by Brent's method (R. P. Brent, Algorithms for Minimization without Derivatives, 1973), which needs no slope and so
    also finds a jump. So a requirement that is met in the middle only has two turns. Turns that are expected are looked
    for around where they are, and there is no scan where each is found.
    """
    tried: dict[tuple[float, bool], Judged] = {}

    def at(value: float, sure: bool = False) -> Judged:
        if (value, sure) not in tried:
            tried[value, sure] = judge(value, sure)
        return tried[value, sure]

    spans = _around(at, near, low, high)
    if spans is None:
        ratio = high / low
        scan = [low, *(low * ratio ** (place / (POINTS - 1)) for place in range(1, POINTS - 1)), high]
        met = [at(value).share >= 0.0 for value in scan]
        spans = [span for span, ends in zip(pairwise(scan), pairwise(met), strict=True) if ends[0] != ends[1]]
    turns = [_turn(at, span, low, high, series) for span in spans]
    sure = {value: judged for (value, sure), judged in sorted(tried.items())}
    return Sizing([sure[value] for value in sorted(sure)], turns)


def _around(
    at: Callable[[float], Judged], near: Sequence[Turn], low: float, high: float
) -> list[tuple[float, float]] | None:
    """A span around each expected turn in which the requirement does turn that way; None where one is not found, or
    none is expected."""
    found = []
    for turn in near:
        for power in range(WIDENINGS):
            ratio = NEARNESS ** (2**power)
            span = max(turn.value / ratio, low), min(turn.value * ratio, high)
            before, after = (at(value).share >= 0.0 for value in span)
            if before != after:
                break
        else:
            return None
        if after != turn.above:
            return None
        found.append(span)
    return found or None


def _turn(at: Callable[..., Judged], span: tuple[float, float], low: float, high: float, series: Series) -> Turn:
    """The turn within a span of values, narrowed down."""
    from scipy.optimize import brentq

    exact = {math.log(value): value for value in span}

    def share(exponent: float) -> float:
        return at(exact.get(exponent, math.exp(exponent))).share

    above = at(span[1]).share >= 0.0
    found, _ = brentq(share, *exact, xtol=RESOLUTION, maxiter=MOST_STEPS, full_output=True, disp=False)
    value = min(max(math.exp(found), span[0]), span[1])
    return Turn(value, above, _preferred(at, value, above, low, high, series))


def _preferred(
    at: Callable[..., Judged], turn: float, above: bool, low: float, high: float, series: Series
) -> Judged | None:
    """The first preferred value beyond a turn at which the requirement holds for certain."""
    value = turn
    for _ in range(TRIES):
        value = series.up(value) if above else series.down(value)
        if not low <= value <= high:
            return None
        judged = at(value, True)
        if judged.holds:
            return judged
        value *= 1.0 + RESOLUTION if above else 1.0 - RESOLUTION
    return None
