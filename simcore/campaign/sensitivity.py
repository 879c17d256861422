"""How far each required figure follows each let: relative sensitivities by central differences.

It plans variants around the design as described and reads their rows; how they are solved is not known here.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass

from grammar.quantities import Quantity
from simcore.campaign.plan import Plan, Points
from simcore.campaign.rows import Claim, Found, Row
from simcore.design.circuit import LetValue

STEPS = (0.01, 0.05)
"""Shares of its value by which a let is moved both ways; the larger where the smaller drowns in the bounds."""
CLEAR = 0.05
"""Share of a sensitivity that its bound must not exceed for a step to do."""


@dataclass(frozen=True)
class Sensitivity:
    """The change of a claim's figure over the change of a let, each as a share of its value.

    value: nan where there is none, reason then says why; bound: what the figures' bounds leave open of it; step: share
    of the let's value it was moved both ways
    """

    claim: Claim
    let: str
    value: float
    bound: float
    step: float
    reason: str = ""

    @property
    def clear(self) -> bool:
        """Whether the bounds leave little of it open."""
        return not math.isnan(self.value) and self.bound <= CLEAR * abs(self.value)


Solve = Callable[[Plan], Sequence[Row]]
"""Solves the variants of a plan, in their order."""


def sensitivities(lets: Mapping[str, LetValue], solve: Solve) -> tuple[Row, list[Sensitivity]]:
    """The design as described, and the relative sensitivity of each of its figures to each let that has a value, the
    largest first for each figure.

    S = (x / F) dF/dx, from F at x (1 + h) and x (1 - h): its error is of the second order in h. The step h is the first
    of STEPS at which what the figures' error bounds leave open is small against S.
    Source: common practice, no source.
    """
    values = {name: let.value for name, let in lets.items() if isinstance(let.value, Quantity) and let.value.value}
    (nominal,) = solve(Plan("sensitivity", (Points((), (), [()]),)))
    figures = {each.claim.key[:2]: each for each in nominal.found if each.claim.figure}
    best: dict[tuple, Sensitivity] = {}
    open_lets = list(values) if figures else []
    for step in STEPS:
        rows = solve(Plan("sensitivity", (_moved(values, open_lets, step),))) if open_lets else []
        for place, let in enumerate(open_lets):
            pair = rows[2 * place], rows[2 * place + 1]
            for key, base in figures.items():
                found = _difference(base, let, step, pair)
                known = best.get((*key, let))
                if known is None or (not known.clear and found.bound < known.bound):
                    best[*key, let] = found
        open_lets = [let for let in open_lets if any(_open(best[*key, let]) for key in figures)]
    return nominal, [each for key in figures for each in _sorted(best[*key, let] for let in values)]


def _open(found: Sensitivity) -> bool:
    return not found.clear and not found.reason


def _moved(values: Mapping[str, Quantity], lets: Sequence[str], step: float) -> Points:
    """Each let above and below its value, the others as they are."""
    rows = []
    for let in lets:
        for factor in (1.0 + step, 1.0 - step):
            rows.append(tuple(values[let].value * factor if other == let else None for other in lets))
    return Points(tuple(lets), tuple(values[let].dimension for let in lets), rows)


def _difference(base: Found, let: str, step: float, pair: tuple[Row, Row]) -> Sensitivity:
    sides: list[Found] = []
    for row in pair:
        side = next((each for each in row.found if each.claim.key == base.claim.key), None)
        if side is None or not math.isfinite(side.value):
            reason = row.ended if not row.solved else "the figure has no value beside it"
            return Sensitivity(base.claim, let, math.nan, math.nan, step, reason)
        sides.append(side)
    if not math.isfinite(base.value) or base.value == 0.0:
        return Sensitivity(base.claim, let, math.nan, math.nan, step, "the figure is zero, or has no value")
    span = 2.0 * step * base.value
    bound = sum(0.0 if math.isnan(side.bound) else side.bound for side in sides) / abs(span)
    return Sensitivity(base.claim, let, (sides[0].value - sides[1].value) / span, bound, step)


def _sorted(found: Iterable[Sensitivity]) -> list[Sensitivity]:
    """The largest first; those without a value last."""
    return sorted(found, key=lambda each: math.inf if math.isnan(each.value) else -abs(each.value))
