"""The kinds of study, declared once: what each means, which keys it takes and where it is solved.

Checking, help text and the language reference come from this table. It knows nothing of circuits or of how a study is
solved.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


class Nature(Enum):
    """What a study finds: a state of rest, a period that goes on for ever, or a course from a beginning to an end."""

    REST = "rest"
    PERIOD = "period"
    COURSE = "course"


@dataclass(frozen=True)
class StudyKind:
    """A kind of study.

    meaning: in words; keys: those of `studies.STUDY_KEYS` that it takes; where: module with the function `solve` that
    solves it, from a `Course` and the changes that hold from its start
    """

    name: str
    meaning: str
    nature: Nature
    keys: tuple[str, ...]
    where: str


STUDY_KINDS = {
    kind.name: kind
    for kind in (
        StudyKind(
            "operating_point",
            "the rest state, sources at their value at t = 0",
            Nature.REST,
            ("angle", "accuracy"),
            "simcore.solve.operating_point",
        ),
        StudyKind(
            "settled",
            "the periodic steady state",
            Nature.PERIOD,
            ("period", "angle", "accuracy", "record_every"),
            "simcore.solve.settled",
        ),
        StudyKind(
            "transient",
            "the course in time, from rest or from where another study ended",
            Nature.COURSE,
            ("after", "duration", "period", "angle", "last", "accuracy", "record_every"),
            "simcore.solve.transient",
        ),
    )
}
