"""What each variant came to, and how a block of it is written as one line of text and read back.

It knows verdicts and figures as numbers, and neither circuits nor how they are solved.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Sequence
from dataclasses import astuple, dataclass

from grammar.description import Expression
from grammar.quantities import ANGLE, Dimension, unit_of
from grammar.writer import write_expression
from simcore.design.circuit import Requirement
from simcore.figures.figure import Figure
from simcore.judge.bill import Demand
from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict

SOLVED = "solved"
"""How a variant ended whose studies were all solved; else there stands why not."""


@dataclass(frozen=True)
class Claim:
    """What is found of every variant: the figure of a study (in `unit`, an SI unit or deg), and the requirement on it.

    figure: "" where a requirement has none; study and requirement: "" for a figure that is only asked for
    """

    study: str
    figure: str
    unit: str
    requirement: str = ""
    label: str = ""

    @property
    def heading(self) -> str:
        """The figure with its study, as reports and tables name it."""
        return f"{self.study}: {self.figure}" if self.study else self.figure

    @property
    def key(self) -> tuple[str, str, str]:
        """What tells claims apart: an undefined figure has no unit."""
        return self.study, self.figure, self.requirement

    @property
    def subject(self) -> str:
        """What a report calls the requirement."""
        return self.label or self.figure or self.requirement


@dataclass(frozen=True)
class Found:
    """What came of a claim: value and bound in its unit (nan, inf as figures have them), distance to the nearer limit,
    positive on the right side (nan where none was formed), the verdict ("" where nothing is required) and its
    reason."""

    claim: Claim
    value: float = math.nan
    bound: float = math.nan
    margin: float = math.nan
    state: str = ""
    reason: str = ""


@dataclass(frozen=True)
class Row:
    """A variant solved, or why it was not: number counted from 1; ended: SOLVED or the reason."""

    number: int
    ended: str
    found: tuple[Found, ...] = ()

    @property
    def solved(self) -> bool:
        """Whether all its studies were solved."""
        return self.ended == SOLVED

    @property
    def passes(self) -> bool:
        """Whether it was solved and every requirement holds."""
        return self.solved and all(each.state in ("", State.HOLDS) for each in self.found)


def claim_of(requirement: Requirement) -> Claim:
    """What is found of a requirement."""
    unit = unit_of(requirement.dimension)
    return Claim(requirement.study, requirement.written, unit, requirement.wording, requirement.label or "")


def found_of(verdict: Verdict) -> Found:
    """What came of a requirement."""
    margin = math.nan if verdict.margin is None else _number(verdict.margin.value, verdict.margin.dimension)
    claim = claim_of(verdict.requirement)
    return Found(claim, *_numbers(verdict.figure), margin, str(verdict.state), verdict.reason)


def found_figure(expression: Expression, figure: Figure) -> Found:
    """What came of a figure that is only asked for."""
    claim = Claim("", write_expression(expression), unit_of(figure.dimension))
    return Found(claim, *_numbers(figure), reason=figure.note)


def found_demand(demand: Demand) -> Found:
    """What came of what an element has to stand."""
    claim = Claim(demand.study, demand_text(demand.name, demand.stress), unit_of(demand.figure.dimension))
    return Found(claim, *_numbers(demand.figure))


def demand_text(name: str, stress: str) -> str:
    """How a table calls what an element, winding or phase has to stand."""
    return f"{name}: {stress}"


def _numbers(figure: Figure | None) -> tuple[float, float]:
    if figure is None:
        return math.nan, math.nan
    bound = math.nan if figure.bound is None else _number(figure.bound, figure.dimension)
    return _number(figure.value, figure.dimension), bound


def _number(value: float, dimension: Dimension) -> float:
    return float(value * math.degrees(1.0)) if dimension == ANGLE else float(value)


# --- a block as one line -------------------------------------------------------------------------------------------


def encode(rows: Iterable[Row], known: Sequence[Claim]) -> str:
    """Rows as one line of JSON, numbers in full; a claim among the known ones is its place there."""
    places = {claim: place for place, claim in enumerate(known)}
    return json.dumps(
        [[row.number, row.ended, [_encoded(each, places) for each in row.found]] for row in rows],
        separators=(",", ":"),
    )


def _encoded(found: Found, places: dict[Claim, int]) -> list[object]:
    claim: object = places.get(found.claim, astuple(found.claim))
    return [claim, found.value, found.bound, found.margin, found.state, found.reason]


def decode(line: str, known: Sequence[Claim]) -> list[Row]:
    """The rows that a line holds. ValueError where it is none of ours."""
    try:
        return [
            Row(
                number,
                ended,
                tuple(Found(known[c] if isinstance(c, int) else Claim(*c), *numbers) for c, *numbers in found),
            )
            for number, ended, found in json.loads(line)
        ]
    except (TypeError, IndexError) as fault:
        raise ValueError("no rows of variants") from fault
