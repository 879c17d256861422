"""What a call of the tool ends with: the exit statuses, a sentence and the cure for each, in this one place.

It must stay light: no numerics are imported here.
"""

from __future__ import annotations

from collections.abc import Iterable
from enum import Enum, StrEnum


class State(StrEnum):
    """What a requirement came to."""

    HOLDS = "holds"
    FAILS = "fails"
    UNDECIDED = "undecided"
    NOT_JUDGED = "not judged"


class Outcome(Enum):
    """Exit status, what it means and what to do."""

    ALL_HOLD = (0, "All requirements hold.", "")
    NOT_ALL_HOLD = (
        1,
        "Not all requirements hold.",
        "See the verdicts: a failed one names its margin, an undecided one says what is missing (often a tighter "
        "`accuracy`), and one that was not judged says why.",
    )
    INPUT_WRONG = (2, "The input is wrong: nothing was solved or written.", "Correct the places that are named above.")
    NO_SOLUTION = (
        3,
        "A study has no solution that could be found.",
        "The message names the study and the instant: look for a short, an open end or a value out of proportion.",
    )
    INTERRUPTED = (
        130,
        "Interrupted before all was solved.",
        "What had been solved is there; run again for the rest.",
    )
    """128 + the number of the signal, as shells have it."""

    def __init__(self, status: int, sentence: str, cure: str):
        self.status = status
        self.sentence = sentence
        self.cure = cure


def outcome_of(states: Iterable[State]) -> Outcome:
    """All that is judged must hold; what is undecided or not judged does not count as holding."""
    return Outcome.ALL_HOLD if all(state is State.HOLDS for state in states) else Outcome.NOT_ALL_HOLD


def worst(outcomes: Iterable[Outcome]) -> Outcome:
    """The outcome of several files together: the one with the highest status."""
    return max(outcomes, key=lambda outcome: outcome.status, default=Outcome.ALL_HOLD)
