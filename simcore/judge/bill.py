"""The bill of ratings: the worst that each element has to stand in any study, beside the rating that it was given.

It reads solved studies; it lays nothing out.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from grammar.quantities import KELVIN
from simcore.components import KINDS
from simcore.design.circuit import Circuit, Element
from simcore.figures.figure import Figure, bounded
from simcore.figures.record import Record
from simcore.figures.stresses import STRESSES, Stress, rated_elements, rated_stresses, stress_names
from simcore.judge.preferred import SERIES
from simcore.judge.ratings import base_of, knows_temperature, rating_text, unused
from simcore.proof import Proof

USUAL_MARGIN = 0.2
"""Share of a rating that a suggestion leaves unused, where no requirement says how much."""

SUGGESTED = SERIES["E12"]


@dataclass(frozen=True)
class BillLine:
    """What an element, winding or phase has to stand.

    stress: its title; study: where it is worst; figure: how much, with its bound
    rating: what was given, in SI units, and in words; unused: the share of it that is left, None without a rating
    margin, suggested: the next preferred rating that leaves this share unused, None where no rating is given by a data
    sheet or a preferred number means nothing
    """

    name: str
    kind: str
    stress: str
    study: str
    figure: Figure
    rating: float | None
    rating_text: str
    unused: float | None
    margin: float
    suggested: float | None


def bill_of(proof: Proof) -> list[BillLine]:
    """All lines, element by element; what has no value in any study is left out."""
    margins = _margins(proof.circuit)
    found = []
    for element in proof.circuit.elements.values():
        ratings = {stress.rating: value for stress, value, _ in rated_stresses(element)}
        for stress in STRESSES[element.kind]:
            if KINDS[element.kind].key.get(stress.rating) is not None and not _means_something(element, stress):
                continue
            for name in stress_names(element, stress):
                worst = max(_everywhere(proof, element, stress, name), key=lambda pair: pair[1].value, default=None)
                if worst is not None:
                    margin = margins.get(element.name, USUAL_MARGIN)
                    found.append(_line(proof, element, stress, name, worst, ratings.get(stress.rating), margin))
    return found


def _means_something(element: Element, stress: Stress) -> bool:
    """A temperature that nothing was said of is only that of the air."""
    return KINDS[element.kind].key[stress.rating].dimension != KELVIN or knows_temperature(element)


def _margins(circuit: Circuit) -> dict[str, float]:
    """Element -> the largest margin that is required of its ratings."""
    found: dict[str, float] = {}
    for requirement in circuit.requirements:
        if requirement.relation == "ratings":
            for element in rated_elements(circuit, requirement):
                found[element.name] = max(found.get(element.name, 0.0), requirement.margin)
    return found


def _everywhere(proof: Proof, element: Element, stress: Stress, name: str) -> Iterator[tuple[str, Figure]]:
    for study, solved in proof.studies.items():
        figure = _bounded(proof.coarse[study], solved.record, element, stress, name)
        if figure.defined:
            yield study, figure


def _bounded(coarse: Record, fine: Record, element: Element, stress: Stress, name: str) -> Figure:
    return bounded(stress.of(coarse, element, name), stress.of(fine, element, name))


def _line(
    proof: Proof,
    element: Element,
    stress: Stress,
    name: str,
    worst: tuple[str, Figure],
    rating: float | None,
    margin: float,
) -> BillLine:
    study, figure = worst
    key = KINDS[element.kind].key.get(stress.rating)
    text, left, suggested = "", None, None
    if key is not None:
        if rating is not None:
            text = rating_text(key, element).removeprefix("rated ")
            left = unused(figure, rating, base_of(key, element, proof.circuit))
        if key.dimension != KELVIN and figure.value > 0.0:
            suggested = SUGGESTED.up(figure.value / (1.0 - margin))
    return BillLine(name, element.kind, stress.title, study, figure, rating, text, left, margin, suggested)
