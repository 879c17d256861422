"""The rows of a sweep as a table and as findings: worst cases, and pass rates with their confidence.

It knows plans and rows, and lays nothing out.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from grammar.quantities import ANGLE, Quantity, unit_of
from simcore.campaign.pasting import pasted_lines, value_text
from simcore.campaign.plan import Plan, Variant
from simcore.campaign.rows import Claim, Found, Row
from simcore.design.circuit import Change
from simcore.judge.outcome import Outcome, State
from simcore.opening import Opened

CONFIDENCE = 0.95
SOURCE = "Clopper, Pearson, Biometrika 26, 1934"
AS_DESCRIBED = "as described"
"""What the design that is swept is called beside others, and a variant that changes nothing."""
_ORDER = (State.FAILS, State.UNDECIDED, State.NOT_JUDGED, State.HOLDS)


@dataclass(frozen=True)
class Worst:
    """The variant in which a requirement is furthest on the wrong side, or nearest to it.

    None where none was solved."""

    claim: Claim
    row: Row | None
    found: Found | None


@dataclass(frozen=True)
class PassRate:
    """How many of the draws pass, with the interval in which the rate lies with 95 % confidence; at: the point of the
    other axes, "" where there is none."""

    at: str
    passing: int
    drawn: int
    low: float
    high: float


class Results:
    """A sweep solved.

    plan: its variants; rows: one each, in their order; claims: what was found of them; designs: those
    that variants are of, by the name that they know them by
    """

    def __init__(
        self, plan: Plan, rows: Sequence[Row], claims: Sequence[Claim], designs: Mapping[str, Opened] | None = None
    ):
        self.plan = plan
        self.designs = designs or {}
        self.rows = list(rows)
        found = {claim.key: claim for claim in claims}
        for row in self.rows:
            for each in row.found:
                known = found.setdefault(each.claim.key, each.claim)
                if each.claim.unit and not known.unit:
                    found[each.claim.key] = each.claim
        self.claims = list(found.values())

    def __len__(self) -> int:
        return len(self.rows)

    # --- as a table ----------------------------------------------------------------------------------------------

    @cached_property
    def columns(self) -> dict[str, list[Any]]:
        """Heading with unit -> one cell a variant: a float (nan where there is none), or text."""
        table: dict[str, list[Any]] = {"variant": [row.number for row in self.rows]}
        variants = [self.plan.variant(index) for index in range(len(self.rows))]
        for let, dimension in self.plan.lets.items():
            heading = let if dimension is None else _with_unit(let, unit_of(dimension))
            table[heading] = [_cell(variant.values.get(let)) for variant in variants]
        if self.plan.of_designs:
            table["design"] = [variant.design or AS_DESCRIBED for variant in variants]
        if self.plan.faulted:
            table["fault"] = [faults_text(variant.faults) for variant in variants]
        found = [{each.claim.key: each for each in row.found} for row in self.rows]
        for claim in self._figures():
            cells = [each.get(claim.key) for each in found]
            table[_with_unit(claim.heading, claim.unit)] = [math.nan if c is None else c.value for c in cells]
            table[_with_unit(f"{claim.heading}, bound", claim.unit)] = [
                math.nan if c is None else c.bound for c in cells
            ]
        for claim in self.required:
            cells = [each.get(claim.key) for each in found]
            table[f"{claim.study}: {claim.requirement}"] = ["" if c is None else c.state for c in cells]
        table["ended"] = [row.ended for row in self.rows]
        return table

    def _figures(self) -> Iterator[Claim]:
        """One claim for each figure, however many requirements are on it."""
        seen: dict[tuple[str, str], None] = {}
        for claim in self.claims:
            if claim.figure and (claim.study, claim.figure) not in seen:
                seen[claim.study, claim.figure] = None
                yield claim

    @property
    def table(self) -> np.ndarray:
        """The columns as a structured array of numpy, shape (variants,): floats, text, and the number as an integer."""
        columns = {name: np.array(cells) for name, cells in self.columns.items()}
        found = np.empty(len(self.rows), dtype=[(name, cells.dtype) for name, cells in columns.items()])
        for name, cells in columns.items():
            found[name] = cells
        return found

    # --- as findings ---------------------------------------------------------------------------------------------

    @property
    def required(self) -> list[Claim]:
        """The claims that are requirements."""
        return [claim for claim in self.claims if claim.requirement]

    @property
    def worst(self) -> list[Worst]:
        """The worst case of each requirement, over the variants that were solved."""
        best: dict[tuple, tuple[tuple, Row, Found]] = {}
        for row in self.rows:
            for each in row.found:
                rank = _rank(each)
                if each.claim.key not in best or rank < best[each.claim.key][0]:
                    best[each.claim.key] = (rank, row, each)
        found = [(claim, best.get(claim.key)) for claim in self.required]
        return [Worst(claim, None, None) if at is None else Worst(claim, at[1], at[2]) for claim, at in found]

    def pasted(self, row: Row) -> list[str]:
        """The variant of a row as lines of its design's text, to take the place of those of the same names."""
        variant = self.plan.variant(row.number - 1)
        return pasted_lines(self.designs.get(variant.design), variant)

    @property
    def counts(self) -> tuple[int, int, int]:
        """Variants that pass, that were solved and don't, and that were not solved."""
        passing = sum(row.passes for row in self.rows)
        solved = sum(row.solved for row in self.rows)
        return passing, solved - passing, len(self.rows) - solved

    @property
    def pass_rates(self) -> list[PassRate]:
        """Where draws were made: the pass rate of all of them at each point of the other axes."""
        drawn = [axis.drawn for axis in self.plan.axes]
        if not any(drawn):
            return []
        groups: dict[tuple, list[int]] = {}
        for index in range(len(self.rows)):
            place = self.plan.place(index)
            groups.setdefault(tuple(p for p, own in zip(place, drawn, strict=True) if not own), []).append(index)
        return [self._rate(group, drawn) for group in groups.values()]

    def _rate(self, group: Sequence[int], drawn: Sequence[bool]) -> PassRate:
        passing = sum(self.rows[index].passes for index in group)
        variant = self.plan.variant(group[0])
        random = {let for axis, own in zip(self.plan.axes, drawn, strict=True) if own for let in axis.lets}
        fixed = replace(variant, values={let: each for let, each in variant.values.items() if let not in random})
        one = len(random) == len(self.plan.lets) and not self.plan.faulted and not self.plan.of_designs
        at = "" if one else ", ".join(variant_words(fixed)) or AS_DESCRIBED
        return PassRate(at, passing, len(group), *interval(passing, len(group)))

    @property
    def outcome(self) -> Outcome:
        """No solution for any variant, else whether every requirement holds in each."""
        passing, _, unsolved = self.counts
        if unsolved:
            return Outcome.NO_SOLUTION
        return Outcome.ALL_HOLD if passing == len(self.rows) else Outcome.NOT_ALL_HOLD


def interval(passing: int, drawn: int, confidence: float = CONFIDENCE) -> tuple[float, float]:
    """The exact confidence interval of a share, both sides alike (Clopper, Pearson, Biometrika 26, 1934).

    For independent draws; those of a Latin hypercube are spread more evenly, which makes it a cautious one.
    """
    from scipy.stats import beta

    tail = 0.5 * (1.0 - confidence)
    low = float(beta.ppf(tail, passing, drawn - passing + 1)) if passing > 0 else 0.0
    high = float(beta.ppf(1.0 - tail, passing + 1, drawn - passing)) if passing < drawn else 1.0
    return low, high


def _rank(found: Found) -> tuple[int, float]:
    """Worse first: by verdict, then by the distance to the limit."""
    order = _ORDER.index(State(found.state)) if found.state else len(_ORDER)
    if math.isnan(found.margin):
        return order, math.inf if found.state == State.HOLDS else -math.inf
    return order, found.margin


def _with_unit(name: str, unit: str) -> str:
    return f"{name} [{unit}]" if unit else name


def _cell(value: Quantity | str | None) -> float | str:
    if isinstance(value, Quantity):
        return math.degrees(value.value) if value.dimension == ANGLE else value.value
    return math.nan if value is None else value


def faults_text(faults: Sequence[Change]) -> str:
    """Faults as a study would write them; none where the circuit is sound."""
    return ", ".join(f"{fault.verb} {fault.target}" for fault in faults) or "none"


def variant_words(variant: Variant) -> list[str]:
    """What a variant has: the name of another design, each value as `name = value`, each fault."""
    values = [f"{let} = {value_text(value)}" for let, value in variant.values.items()]
    return [*filter(None, [variant.design]), *values, *(f"{fault.verb} {fault.target}" for fault in variant.faults)]
