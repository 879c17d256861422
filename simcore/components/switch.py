"""A switch: a small resistance while closed, a large one while open.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, NONE, OHM, SECOND, VOLT
from simcore.components.frame import Frame, Part
from simcore.components.kind import Key, Kind


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    if "opens_at" in given and given.get("opens_at") == given.get("closes_at"):
        return [("closes_at", "it opens and closes at the same time", "Give the two times apart.")]
    return []


def _instants(given: dict[str, object]) -> list[float]:
    return [float(given[key]) for key in ("opens_at", "closes_at") if isinstance(given.get(key), float)]


def _closed(part: Part) -> bool:
    """Whether its contact is closed at the frame's moment: the last of its times that has passed decides."""
    passed = [
        (time, closes)
        for time, closes in ((part.given("opens_at"), False), (part.given("closes_at"), True))
        if time is not None and time <= part.moment
    ]
    return max(passed)[1] if passed else part.given("initially") == "closed"


def _build(frame: Frame, part: Part) -> None:
    key = "closed_resistance" if _closed(part) else "open_resistance"
    frame.series(part, part.across(part.ports[0]), resistance=part.value(key))


SWITCH = Kind(
    "switch",
    "switch with a resistance in either state",
    "branch",
    (
        Key("closed_resistance", "resistance while closed", OHM, default=1e-3, low=0.0, open_low=True),
        Key("open_resistance", "resistance while open", OHM, default=1e9, low=0.0, open_low=True),
        Key(
            "initially",
            "state at the start",
            NONE,
            form="word",
            words=("open", "closed"),
            default="open",
        ),
        Key("opens_at", "time at which it opens", SECOND, low=0.0),
        Key("closes_at", "time at which it closes", SECOND, low=0.0),
        Key(
            "control",
            "signal that closes and opens it",
            VOLT,
            form="expression",
            alternatives=(AMPERE,),
            available=False,
        ),
        Key("closes_above", "control above which it closes", VOLT, alternatives=(AMPERE,), available=False),
        Key("opens_below", "control below which it opens", VOLT, alternatives=(AMPERE,), available=False),
        Key("delay", "time from the control to the contact", SECOND, default=0.0, low=0.0, available=False),
    ),
    check=_check,
    build=_build,
    instants=_instants,
)
