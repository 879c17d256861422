"""The graphical symbols of elements, as lines and words around a point.

They are those of the trade (IEC 60617: a resistor is a rectangle, a winding a row of half circles, a fuse a rectangle
that its wire passes through, a clamp a rectangle with an inclined stroke). Each stands upright around 0, 0 with its
first terminal above, y counting downwards, and is turned or mirrored by whoever places it. Knows kinds and forms; no
circuits, files or colours.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

Point = tuple[float, float]

HALF_WIDTH = 15.0
"""What a symbol takes to each side."""
BUMP, BUMPS = 6.0, 4
"""Radius and number of a winding's half circles."""


@dataclass(frozen=True)
class Outline:
    """A line through points; closed: back to the first, white inside unless filled."""

    points: tuple[Point, ...]
    closed: bool = False
    filled: bool = False


@dataclass(frozen=True)
class Letters:
    """Words in the middle of a point."""

    middle: Point
    words: str


@dataclass(frozen=True)
class Symbol:
    """What is drawn; reach: from the middle to where the wire begins, each way; letters stay upright."""

    reach: float
    outlines: Sequence[Outline]
    letters: Sequence[Letters] = ()

    @property
    def side(self) -> float:
        """From the middle to its right edge."""
        return max(x for outline in self.outlines for x, _ in outline.points)


def symbol_of(kind: str, form: str) -> Symbol:
    """The symbol of a kind, a box with its first letters where none is drawn; form: of a source or load what tells it
    from others of its kind, see `arranging.Branch`."""
    return SYMBOLS[kind](form) if kind in SYMBOLS else _load(kind[:3])


def _circle(radius: float, middle: Point = (0.0, 0.0), first: float = 0.0, last: float = 360.0) -> tuple[Point, ...]:
    """Points of a circle or of a part of it, in degrees from the right, downwards."""
    count = max(round(abs(last - first) / 12.0), 2)
    turns = [math.radians(first + (last - first) * place / count) for place in range(count + 1)]
    return tuple((middle[0] + radius * math.cos(turn), middle[1] + radius * math.sin(turn)) for turn in turns)


def _rectangle(width: float, height: float) -> Outline:
    x, y = width / 2.0, height / 2.0
    return Outline(((-x, -y), (x, -y), (x, y), (-x, y)), True)


_BODY = _rectangle(13.0, 38.0)
_STROKE = Outline(((-13.0, 20.0), (-13.0, 13.0), (13.0, -15.0)))
"""The inclined stroke of what depends on temperature or voltage, with the foot of a law that is not linear."""
_DIODE = (Outline(((-10.0, -9.0), (10.0, -9.0), (0.0, 9.0)), True), Outline(((-10.0, 9.0), (10.0, 9.0))))
_WIRE = Outline(((0.0, -9.0), (0.0, 9.0)))
_RING = Outline(_circle(15.0), True)


def _winding() -> Outline:
    middles = [BUMP * (2 * place - BUMPS + 1) for place in range(BUMPS)]
    return Outline(tuple(point for middle in middles for point in _circle(BUMP, (0.0, middle), -90.0, 90.0)))


def _resistor(_: str) -> Symbol:
    return Symbol(19.0, [_BODY])


def _capacitor(_: str) -> Symbol:
    return Symbol(3.5, [Outline(((-13.0, side), (13.0, side))) for side in (-3.5, 3.5)])


def _inductor(_: str) -> Symbol:
    return Symbol(BUMP * BUMPS, [_winding()])


def _transformer(_: str) -> Symbol:
    """One winding, its half circles towards the core, with the dot of its first end."""
    return Symbol(BUMP * BUMPS, [_winding(), Outline(_circle(2.2, (-7.0, -BUMP * BUMPS + 2.0)), True, True)])


def _diode(_: str) -> Symbol:
    return Symbol(9.0, [*_DIODE, _WIRE])


def _thyristor(_: str) -> Symbol:
    return Symbol(9.0, [*_DIODE, _WIRE, Outline(((3.0, 9.0), (11.0, 17.0), (15.0, 17.0)))])


def _switch(_: str) -> Symbol:
    return Symbol(15.0, [Outline(((0.0, 15.0), (-11.0, -13.0)))])


def _fuse(_: str) -> Symbol:
    return Symbol(19.0, [_BODY, Outline(((0.0, -19.0), (0.0, 19.0)))])


def _limiter(_: str) -> Symbol:
    return Symbol(19.0, [_BODY, _STROKE], [Letters((-14.0, -12.0), "\u2212t\u00b0")])


def _clamp(_: str) -> Symbol:
    return Symbol(19.0, [_BODY, _STROKE], [Letters((-14.0, -12.0), "U")])


def _load(form: str) -> Symbol:
    return Symbol(14.0, [_rectangle(28.0, 28.0)], [Letters((0.0, 0.0), form)])


def _sine() -> Outline:
    steps = range(-12, 13)
    return Outline(tuple((step * 0.75, -5.0 * math.sin(math.pi * step / 12.0)) for step in steps))


def _source(form: str) -> Symbol:
    """A circle: with a sine, a pulse, the wire of a constant voltage and its plus, or the bar of a current."""
    if form == "sine":
        return Symbol(15.0, [_RING, _sine()])
    if form == "changing":
        pulse = ((-9.0, 5.0), (-4.5, 5.0), (-4.5, -5.0), (4.5, -5.0), (4.5, 5.0), (9.0, 5.0))
        return Symbol(15.0, [_RING, Outline(pulse)])
    if form == "current":
        arrow = Outline(((-4.0, 22.0), (4.0, 22.0), (0.0, 30.0)), True, True)
        return Symbol(15.0, [_RING, Outline(((-15.0, 0.0), (15.0, 0.0))), arrow])
    return Symbol(15.0, [_RING, Outline(((0.0, -15.0), (0.0, 15.0)))], [Letters((-9.0, -19.0), "+")])


SYMBOLS: dict[str, Callable[[str], Symbol]] = {
    "source": _source,
    "three_phase": _source,
    "resistor": _resistor,
    "capacitor": _capacitor,
    "inductor": _inductor,
    "transformer": _transformer,
    "diode": _diode,
    "thyristor": _thyristor,
    "switch": _switch,
    "load": _load,
    "fuse": _fuse,
    "inrush_limiter": _limiter,
    "clamp": _clamp,
}
"""Kind -> its symbol by its form. Source: IEC 60617, parts 2 to 7, from memory."""
