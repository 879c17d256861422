"""A design sized: the lets that were asked for varied until a requirement is just met.

It opens and proves the design at each value; it prints and writes nothing.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from grammar.description import Require
from grammar.mistakes import DescriptionError, Mistake
from grammar.quantities import ANGLE, Dimension, Quantity, unit_of
from grammar.reader import read_text
from simcore.design.files import Project
from simcore.equations.kernel import KernelCache
from simcore.judge.preferred import Series
from simcore.judge.sizing import POINTS, Judged, Sizing, Turn, size
from simcore.opening import Opened, open_project
from simcore.proof import solve_and_judge
from simcore.solve.failure import NoSolution

REACH = 30.0
"""How far from its own value a let is looked at, each way, where no range is given."""

CLAIM = "--for"
"""What the text of the requirement is called in messages."""


@dataclass(frozen=True)
class Sized:
    """A let, its dimension, and what came out."""

    let: str
    dimension: Dimension
    low: float
    high: float
    sizing: Sizing


def with_claim(project: Project, claim: str) -> tuple[Project, list[Mistake]]:
    """The design with one requirement in place of its own; claim: as behind `require`."""
    description, mistakes = read_text(f"require {claim}", CLAIM)
    statements = description.statements
    if not mistakes and not (len(statements) == 1 and isinstance(statements[0], Require)):
        cure = 'Give one, such as --for "full_load: ripple(u_out) <= 1 V".'
        mistakes = [Mistake("that is not one requirement", cure, file=CLAIM)]
    top = project.top.description
    kept = tuple(statement for statement in top.statements if not isinstance(statement, Require))
    changed = replace(project.top, description=replace(top, statements=(*kept, *statements)))
    return replace(project, top=changed), mistakes


def written(value: float, dimension: Dimension) -> str:
    """A value in SI units as a description would have it, without loss."""
    return f"{math.degrees(value) if dimension == ANGLE else value!r} {unit_of(dimension)}".rstrip()


class Sizer:
    """Sizes one design. Raises DescriptionError where a value makes it wrong."""

    def __init__(self, project: Project, settings: Mapping[str, str], series: Series):
        self.project = project
        self.settings = dict(settings)
        self.series = series
        self.kernels = KernelCache()

    def opened(self, values: Mapping[str, str]) -> Opened:
        """The design with some lets at other values, as text."""
        opened, mistakes = open_project(self.project, {**self.settings, **values})
        if mistakes:
            raise DescriptionError(mistakes)
        return opened

    def quantity(self, let: str, text: str | None = None) -> Quantity:
        """What a let is worth, as it stands or with another value as text. Raises DescriptionError where that is no
        positive number."""
        opened = self.opened({} if text is None else {let: text})
        found = opened.circuit.lets.get(let)
        if found is None:
            raise DescriptionError(open_project(self.project, {**self.settings, let: "1"})[1])
        if not isinstance(found.value, Quantity) or not found.value.value > 0.0:
            cure = "Name a let that holds a number; where it is zero, give --from and --to."
            what = f"{let} is not above zero, so it can't be sized"
            raise DescriptionError([Mistake(what, cure, file=opened.circuit.name)])
        return found.value

    def span(self, let: str, first: str | None, last: str | None) -> tuple[float, float, Dimension]:
        """The range that a let is looked at in."""
        own = self.quantity(let, first or last)
        low = self.quantity(let, first).value if first else self.quantity(let).value / REACH
        high = self.quantity(let, last).value if last else self.quantity(let).value * REACH
        if not low < high:
            cure = "Give the smaller value with --from and the larger with --to."
            raise DescriptionError([Mistake("the range is empty", cure, file=f"--from {first} --to {last}")])
        return low, high, own.dimension

    def size(
        self,
        let: str,
        first: str | None = None,
        last: str | None = None,
        fixed: Mapping[str, str] | None = None,
        near: Sequence[Turn] = (),
    ) -> Sized:
        """Size a let between two values as text; fixed: other lets at other values; near: turns to look for first."""
        low, high, dimension = self.span(let, first, last)

        def judge(value: float, sure: bool) -> Judged:
            opened = self.opened({**(fixed or {}), let: written(value, dimension)})
            names = list(dict.fromkeys(requirement.study for requirement in opened.circuit.requirements))
            try:
                return Judged(value, solve_and_judge(opened, names, kernels=self.kernels.afresh(), sure=sure).verdicts)
            except NoSolution as failure:
                return Judged(value, [], str(failure))

        return Sized(let, dimension, low, high, size(judge, low, high, self.series, near))

    def trade(self, outer: str, inner: str, first: str | None, last: str | None) -> list[tuple[float, Sized]]:
        """The inner let sized at values of the outer one, evenly spaced on a logarithmic scale.

        At the first, middle and last of them the whole range is looked through. In between, where the neighbours of
        that kind turn alike, turns are looked for where they lead to, straight between them on logarithmic scales.
        """
        low, high, dimension = self.span(outer, first, last)
        values = [low * (high / low) ** (place / (POINTS - 1)) for place in range(POINTS)]
        at = [{outer: written(value, dimension)} for value in values]
        marks = [0, POINTS // 2, POINTS - 1]
        found = {mark: self.size(inner, fixed=at[mark]) for mark in marks}
        for start, end in pairwise(marks):
            ends = found[start].sizing.turns, found[end].sizing.turns
            alike = [turn.above for turn in ends[0]] == [turn.above for turn in ends[1]]
            for place in range(start + 1, end):
                share = (place - start) / (end - start)
                near = [_between(*pair, share) for pair in zip(*ends, strict=True)] if alike else []
                found[place] = self.size(inner, fixed=at[place], near=near)
        return [(values[place], found[place]) for place in range(POINTS)]


def _between(one: Turn, other: Turn, share: float) -> Turn:
    """Where a turn is expected between two others."""
    return replace(one, value=one.value ** (1.0 - share) * other.value**share)
