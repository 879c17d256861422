"""Ratings held against what elements have to stand: one verdict a rating.

It reads the records of solved studies. Which figure a rating is held against is said in `simcore.figures.stresses`.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from grammar.quantities import KELVIN, WATT, show
from simcore.components import KINDS
from simcore.components.kind import Key
from simcore.design.circuit import Circuit, Element, Requirement
from simcore.design.overview import celsius, value_text
from simcore.figures.evaluate import Records
from simcore.figures.figure import Figure, plain
from simcore.figures.record import Record
from simcore.figures.stresses import Stress, rated_elements, rated_stresses
from simcore.judge.held import Pair, Verdict, side
from simcore.judge.outcome import State

NO_TEMPERATURE = "nothing says how hot it gets: give its thermal_resistance, or the temperature it runs at"


@dataclass(frozen=True)
class _Claim:
    """A requirement as one of its ratings; stress: None for an element that was named and has no rating."""

    requirement: Requirement
    element: Element
    stress: Stress | None = None
    rating: float = 0.0


def _claims(circuit: Circuit, requirement: Requirement) -> list[_Claim]:
    found = []
    for element in rated_elements(circuit, requirement):
        claims = [
            _Claim(
                replace(
                    _worded(requirement, f"{element.name}: {stress.title} ({_rated(element, stress)})"),
                    dimension=KINDS[element.kind].key[stress.rating].dimension,
                    temperature=KINDS[element.kind].key[stress.rating].dimension == KELVIN,
                ),
                element,
                stress,
                value,
            )
            for stress, value, _ in rated_stresses(element)
        ]
        if not claims and requirement.elements:
            claims = [_Claim(_worded(requirement, f"{element.name}: ratings"), element)]
        found += claims
    return found


def spread_ratings(circuit: Circuit, requirement: Requirement) -> list[Requirement]:
    """The requirement as it is judged, one for each verdict: known before anything is solved."""
    return [claim.requirement for claim in _claims(circuit, requirement)] or [requirement]


def judge_ratings(requirement: Requirement, coarse: Records, fine: Records) -> list[Verdict]:
    """One verdict for each rating of each element that the requirement is about.

    Elements that were named, and a requirement that finds no rating at all, are not judged without one.
    """
    study = requirement.study
    if study not in fine:
        return [Verdict(requirement, State.UNDECIDED, reason=f"study {study} was not solved")]
    found = [_judged(claim, coarse[study], fine[study]) for claim in _claims(fine[study].circuit, requirement)]
    return found or [Verdict(requirement, State.NOT_JUDGED, reason="no element has a rating")]


def unrated(circuit: Circuit) -> list[str]:
    """Elements of which a requirement on ratings had nothing to judge, though their kind has ratings."""
    asked: dict[str, Element] = {}
    for requirement in circuit.requirements:
        if requirement.relation == "ratings":
            asked.update({element.name: element for element in rated_elements(circuit, requirement)})
    return [
        name
        for name, element in asked.items()
        if any(key.rating for key in KINDS[element.kind].keys) and not list(rated_stresses(element))
    ]


def _judged(claim: _Claim, coarse: Record, fine: Record) -> Verdict:
    element, stress, requirement = claim.element, claim.stress, claim.requirement
    if stress is None:
        return Verdict(requirement, State.NOT_JUDGED, reason="no rating is given for it")
    key = KINDS[element.kind].key[stress.rating]
    if key.dimension == KELVIN and not knows_temperature(element):
        return Verdict(requirement, State.NOT_JUDGED, reason=NO_TEMPERATURE)
    figure = Pair.of(lambda record: stress.of(record, element, element.name), coarse, fine)
    base = base_of(key, element, fine.circuit)
    limit = Pair.exact(plain(base + (1.0 - requirement.margin) * (claim.rating - base), key.dimension))
    state, margin, reason = side(figure, limit, 1.0, False)
    return Verdict(requirement, state, figure.bounded, limit.fine, margin=margin, reason=reason)


def _rated(element: Element, stress: Stress) -> str:
    return rating_text(KINDS[element.kind].key[stress.rating], element)


def _worded(requirement: Requirement, text: str) -> Requirement:
    """The requirement as one of its ratings."""
    label = f"{requirement.label}: {text}" if requirement.label else None
    return replace(requirement, relation="<=", wording=text, label=label, written=text)


def rating_text(key: Key, element: Element) -> str:
    """A rating in words: `rated 1 kV`, `rated 2 A @ 100 Hz`; a transformer's power is an apparent one."""
    text = value_text(key, element.given[key.name])
    apparent = element.kind == "transformer" and key.dimension == WATT
    return f"rated {text.removesuffix('W')}VA" if apparent else f"rated {text}"


def knows_temperature(element: Element) -> bool:
    """Whether the description says how hot an element gets, so that it does not just stand at ambient."""
    return any(element.given.get(key) is not None for key in ("temperature", "thermal_resistance"))


def base_of(key: Key, element: Element, circuit: Circuit) -> float:
    """What the unused share of a rating counts from: zero, of a temperature the ambient one (K)."""
    if key.dimension != KELVIN:
        return 0.0
    own = element.given.get("ambient")
    return circuit.ambient if own is None else float(own)


def unused(stress: Figure, rating: float, base: float) -> float:
    """The share of a rating that a stress leaves unused; negative where it is exceeded."""
    return 1.0 - (stress.value - base) / (rating - base)


def stress_text(figure: Figure) -> str:
    """A stress for people; a temperature in degC."""
    return celsius(figure.value) if figure.dimension == KELVIN else show(figure.value, figure.dimension)
