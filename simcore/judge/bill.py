"""The bill of ratings: the worst that each element has to stand in any study or variant, beside its own rating.

It reads solved studies; it lays nothing out.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from grammar.quantities import KELVIN
from simcore.components import KINDS
from simcore.design.circuit import Circuit, Element, PlannedStudy
from simcore.design.study_kinds import Nature
from simcore.figures.figure import Figure, bounded
from simcore.figures.record import Record
from simcore.figures.stresses import Stress, rated_elements, rated_stresses, stress_names, stresses_of
from simcore.judge.preferred import R10
from simcore.judge.ratings import base_of, knows_temperature, rating_text, unused
from simcore.proof import Proof

USUAL_MARGIN = 0.2
"""Share of a rating that a suggestion leaves unused, where no requirement says how much."""


@dataclass(frozen=True)
class Demand:
    """What an element, winding or phase (name) has to stand of a kind (stress: its title) in a study, with its bound;
    variant: of a sweep, "" for the design as described."""

    name: str
    stress: str
    study: str
    figure: Figure
    variant: str = ""


@dataclass(frozen=True)
class BillLine:
    """What an element, winding or phase has to stand.

    stress: its title; study, variant: where it is worst; figure: how much, with its bound
    rating: what was given, in SI units, and in words; unused: the share of it that is left, None without a rating
    margin, suggested: the next preferred rating that leaves this share unused, None where no rating is given by a data
    sheet or a preferred number means nothing
    """

    name: str
    kind: str
    stress: str
    study: str
    variant: str
    figure: Figure
    rating: float | None
    rating_text: str
    unused: float | None
    margin: float
    suggested: float | None


def demands(circuit: Circuit, coarse: Mapping[str, Record], fine: Mapping[str, Record]) -> Iterator[Demand]:
    """Everything that the elements of a circuit have to stand in its solved studies; what has no value is left out."""
    for element in circuit.elements.values():
        for stress in _stresses(element):
            for name in stress_names(element, stress):
                for study, record in fine.items():
                    figure = bounded(stress.of(coarse[study], element, name), stress.of(record, element, name))
                    if figure.defined:
                        yield Demand(name, stress.title, study, figure)


def bill_of(proof: Proof, variants: Iterable[Demand] = ()) -> list[BillLine]:
    """All lines, element by element; variants: what has to be stood in those of sweeps, besides.

    What heats over minutes, such as a ripple current, is taken from studies that say what lasts, where there are any:
    its mean over a switch-on is not what a rating is about.
    """
    circuit = proof.circuit
    margins = _margins(circuit)
    solved = {name: study.record for name, study in proof.studies.items()}
    found: dict[tuple[str, str], list[Demand]] = {}
    for demand in (*demands(circuit, proof.coarse, solved), *variants):
        found.setdefault((demand.name, demand.stress), []).append(demand)
    lines = []
    for element in circuit.elements.values():
        ratings = {stress.rating: value for stress, value, _ in rated_stresses(element)}
        for stress in _stresses(element):
            for name in stress_names(element, stress):
                choice = found.get((name, stress.title), [])
                if stress.lasting:
                    choice = [each for each in choice if lasts(circuit.studies[each.study])] or choice
                if choice:
                    worst = max(choice, key=lambda demand: demand.figure.value)
                    margin = margins.get(element.name, USUAL_MARGIN)
                    lines.append(_line(circuit, element, stress, worst, ratings.get(stress.rating), margin))
    return lines


def lasts(study: PlannedStudy) -> bool:
    """Whether what a study judges goes on: a state that has settled or rests, or the last periods of a transient."""
    return study.nature is not Nature.COURSE or study.last is not None


def _stresses(element: Element) -> Sequence[Stress]:
    """What an element has to stand. A temperature that nothing was said of is only that of the air."""
    known = knows_temperature(element)
    keys = KINDS[element.kind].key
    return [
        stress
        for stress in stresses_of(element.kind)
        if known or stress.rating not in keys or keys[stress.rating].dimension != KELVIN
    ]


def _margins(circuit: Circuit) -> dict[str, float]:
    """Element -> the largest margin that is required of its ratings."""
    found: dict[str, float] = {}
    for requirement in circuit.requirements:
        if requirement.relation == "ratings":
            for element in rated_elements(circuit, requirement):
                found[element.name] = max(found.get(element.name, 0.0), requirement.margin)
    return found


def _line(
    circuit: Circuit, element: Element, stress: Stress, worst: Demand, rating: float | None, margin: float
) -> BillLine:
    figure, key = worst.figure, KINDS[element.kind].key.get(stress.rating)
    text, left, suggested = "", None, None
    if key is not None:
        if rating is not None:
            text = rating_text(key, element).removeprefix("rated ")
            left = unused(figure, rating, base_of(key, element, circuit))
        if key.dimension != KELVIN and figure.value > 0.0:
            suggested = R10.up(figure.value / (1.0 - margin))
    where = worst.study, worst.variant
    return BillLine(worst.name, element.kind, stress.title, *where, figure, rating, text, left, margin, suggested)
