"""A switch: a small resistance while closed, a large one while open; by time, or by a signal with hysteresis.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from grammar.quantities import AMPERE, NONE, OHM, SECOND, VOLT
from simcore.components.frame import Flag, Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part

_LEVELS = ("closes_above", "opens_below")


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    if "opens_at" in given and given.get("opens_at") == given.get("closes_at"):
        return [("closes_at", "it opens and closes at the same time", "Give the two times apart.")]
    levels = [key for key in _LEVELS if key in given]
    if "control" not in given:
        wrong = [key for key in (*levels, "delay") if key in given]
        return [(key, f"{key} is given without a control", "Add `control = voltage(a -> b)`.") for key in wrong]
    if not levels:
        return [("control", "its control has no level", "Add `closes_above` or `opens_below`, or both.")]
    timed = [key for key in ("opens_at", "closes_at") if key in given]
    if timed:
        return [(timed[0], f"{timed[0]} is given beside a control", "Leave one of the two out.")]
    above, below = (given.get(key) for key in _LEVELS)
    if isinstance(above, float) and isinstance(below, float) and not below < above:
        return [("opens_below", "it opens at the level it closes at, or above", "Put `opens_below` under it.")]
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
    weights = part.across(part.ports[0])
    if part.given("control") is None:
        key = "closed_resistance" if _closed(part) else "open_resistance"
        frame.series(part, weights, resistance=part.value(key))
        return
    contact = frame.flag(part, "contact", part.given("initially") == "closed")
    resistance = contact.choose(part.value("closed_resistance"), part.value("open_resistance"))
    frame.series(part, weights, resistance=resistance)
    called = frame.flag(part, "called", part.given("initially") == "closed")
    for key, up, sign in ((_LEVELS[0], True, 1.0), (_LEVELS[1], False, -1.0)):
        if part.given(key) is not None:
            _level(frame, part, (called, contact), key, up, sign)


def _level(frame: Frame, part: Part, flags: tuple[Flag, Flag], key: str, up: bool, sign: float) -> None:
    called, contact = flags
    terms = [term.times(sign) for term in frame.sense(part.given("control"))]
    frame.threshold(
        part,
        terms,
        sign * frame.parameter(part.given(key)),
        armed=[(called, not up)],
        sets=[(called, up), (contact, up)],
        delay=part.given("delay"),
        tells="is told to close" if up else "is told to open",
    )


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
        Key("control", "signal that closes and opens it", VOLT, form="expression", alternatives=(AMPERE,)),
        Key("closes_above", "control above which it closes", VOLT, alternatives=(AMPERE,)),
        Key("opens_below", "control below which it opens", VOLT, alternatives=(AMPERE,)),
        Key("delay", "time from the control to the contact", SECOND, default=0.0, low=0.0),
    ),
    check=_check,
    build=_build,
    instants=_instants,
)
