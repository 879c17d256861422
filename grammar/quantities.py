"""Quantities: numbers with a dimension, the units they are written in, and how they are shown to people.

Values are held in SI units. Knows nothing of texts, circuits or physics.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache

_BASE = ("V", "A", "s", "K", "rad")


@dataclass(frozen=True)
class Dimension:
    """Powers of volt, ampere, second, kelvin and radian."""

    powers: tuple[float, ...]

    def __mul__(self, other: Dimension) -> Dimension:
        return Dimension(tuple(a + b for a, b in zip(self.powers, other.powers, strict=True)))

    def __truediv__(self, other: Dimension) -> Dimension:
        return Dimension(tuple(a - b for a, b in zip(self.powers, other.powers, strict=True)))

    def __pow__(self, exponent: float) -> Dimension:
        return Dimension(tuple(round(power * exponent, 9) for power in self.powers))


@dataclass(frozen=True)
class Quantity:
    """A value in the SI unit of its dimension."""

    value: float
    dimension: Dimension


NONE = Dimension((0.0, 0.0, 0.0, 0.0, 0.0))
VOLT = Dimension((1.0, 0.0, 0.0, 0.0, 0.0))
AMPERE = Dimension((0.0, 1.0, 0.0, 0.0, 0.0))
SECOND = Dimension((0.0, 0.0, 1.0, 0.0, 0.0))
KELVIN = Dimension((0.0, 0.0, 0.0, 1.0, 0.0))
ANGLE = Dimension((0.0, 0.0, 0.0, 0.0, 1.0))
WATT = VOLT * AMPERE
OHM = VOLT / AMPERE
COULOMB = AMPERE * SECOND
FARAD = COULOMB / VOLT
HENRY = OHM * SECOND
JOULE = WATT * SECOND
HERTZ = NONE / SECOND
I2T = AMPERE**2 * SECOND
VOLT_PER_SECOND = VOLT / SECOND
KELVIN_PER_WATT = KELVIN / WATT
WATT_PER_KELVIN = WATT / KELVIN
JOULE_PER_KELVIN = JOULE / KELVIN

PREFIXES = {
    "f": 1e-15,
    "p": 1e-12,
    "n": 1e-9,
    "u": 1e-6,
    "m": 1e-3,
    "": 1.0,
    "k": 1e3,
    "M": 1e6,
    "G": 1e9,
    "T": 1e12,
}
UNITS = {
    "V": VOLT,
    "A": AMPERE,
    "W": WATT,
    "VA": WATT,
    "Ohm": OHM,
    "F": FARAD,
    "H": HENRY,
    "C": COULOMB,
    "J": JOULE,
    "Hz": HERTZ,
    "s": SECOND,
    "K": KELVIN,
}
_PLAIN_UNITS = {
    "1": (1.0, NONE),
    "min": (60.0, SECOND),
    "h": (3600.0, SECOND),
    "deg": (math.pi / 180.0, ANGLE),
    "degC": (1.0, KELVIN),
    "%": (0.01, NONE),
}
_ZERO_CELSIUS = 273.15
_SAME = {"\u00b5": "u", "\u03bc": "u", "\u03a9": "Ohm", "\u2126": "Ohm"}
_FACTOR = re.compile(r"(?P<unit>.+?)(?:\^(?P<power>-?[0-9]))?")
_COMPOUND = {I2T: "A^2 s"}
_COMPOUND |= {KELVIN_PER_WATT: "K/W", WATT_PER_KELVIN: "W/K", JOULE_PER_KELVIN: "J/K", VOLT_PER_SECOND: "V/s"}
_NAMES = {dimension: name for name, dimension in UNITS.items() if name != "VA"} | _COMPOUND
_SHOWN_DIGITS = 5
_HOURS = 36_000.0
"""s: a time is shown in hours from here on."""
_LONGEST_UNIT = 40


def quantity(number: float, unit: str = "") -> Quantity:
    """A number as written with its unit ("" for none). ValueError for a unit there is not."""
    if not unit:
        return Quantity(number, NONE)
    if unit == "degC":
        return Quantity(round(number + _ZERO_CELSIUS, 10), KELVIN)
    scale, dimension = _unit(unit)
    return Quantity(_scaled(number, scale), dimension)


def _scaled(number: float, scale: float) -> float:
    """number * scale, dividing where the scale is a negative power of ten, so that 4.7 m is the double nearest
    0.0047."""
    inverse = 1.0 / scale
    exact = scale < 1.0 and inverse <= 1e15 and abs(inverse - round(inverse)) <= 1e-12 * inverse
    return number / round(inverse) if exact else number * scale


@lru_cache(maxsize=1024)
def _unit(text: str) -> tuple[float, Dimension]:
    if len(text) > _LONGEST_UNIT:
        raise ValueError(f"a unit has up to {_LONGEST_UNIT} characters")
    scale, dimension, over = 1.0, NONE, False
    for piece in re.split(r"([/ ])", text):
        if piece in ("/", " "):
            over = piece == "/"
            continue
        factor, part = _factor(piece)
        scale = scale / factor if over else scale * factor
        dimension = dimension / part if over else dimension * part
    if not 1e-200 < scale < 1e200:
        raise ValueError(f"{text} is too small or too large a unit")
    return scale, dimension


def _factor(text: str) -> tuple[float, Dimension]:
    for code, plain in _SAME.items():
        text = text.replace(code, plain)
    match = _FACTOR.fullmatch(text)
    if match is None:
        raise ValueError(f"{text} is no unit")
    name, power = match["unit"], int(match["power"] or 1)
    scale, dimension = _named(name)
    return scale**power, dimension**power


def _named(name: str) -> tuple[float, Dimension]:
    if name in _PLAIN_UNITS:
        return _PLAIN_UNITS[name]
    if name in UNITS:
        return 1.0, UNITS[name]
    if name[:1] in PREFIXES and name[1:] in UNITS:
        return PREFIXES[name[0]], UNITS[name[1:]]
    raise ValueError(f"{name} is no unit")


def unit_of(dimension: Dimension) -> str:
    """The SI unit of a dimension as a description would write it; "" for a plain number, deg for an angle."""
    if dimension == NONE:
        return ""
    if dimension == ANGLE:
        return "deg"
    if dimension in _NAMES:
        return _NAMES[dimension]
    over = [_power(name, power) for name, power in zip(_BASE, dimension.powers, strict=True) if power > 0]
    under = [_power(name, -power) for name, power in zip(_BASE, dimension.powers, strict=True) if power < 0]
    return " ".join(over or ["1"]) + "".join(f"/{name}" for name in under)


def _power(name: str, power: float) -> str:
    return name if power == 1 else f"{name}^{power:g}"


def show(value: float, dimension: Dimension, digits: int = _SHOWN_DIGITS) -> str:
    """A value for people: rounded, with the SI prefix that brings it to 1 to 999 where its unit takes one."""
    if dimension == ANGLE:
        return f"{math.degrees(value):.{digits}g} deg"
    if dimension == SECOND and abs(value) >= _HOURS:
        return f"{_plain(value / 3600.0, digits)} h"
    unit = unit_of(dimension)
    if not unit:
        return _plain(value, digits)
    prefix = _prefix(value, dimension, digits) if unit in UNITS else ""
    return f"{_plain(value / PREFIXES[prefix], digits)} {prefix}{unit}"


def _plain(value: float, digits: int) -> str:
    """Rounded to digits, without an exponent for the sizes that a prefix leaves."""
    rounded = float(f"{value:.{digits}g}") + 0.0
    whole = 10.0 ** (digits - 1) <= abs(rounded) < 1e6
    return f"{rounded:.0f}" if whole else f"{rounded:.{digits}g}"


def _prefix(value: float, dimension: Dimension, digits: int) -> str:
    if value == 0.0 or not math.isfinite(value):
        return ""
    rounded = abs(float(f"{value:.{digits}g}"))
    sizes = [item for item in PREFIXES.items() if item[1] <= 1.0 or dimension not in (SECOND, KELVIN)]
    if dimension == KELVIN:
        return ""
    fitting = [name for name, size in sizes if rounded >= size * (1.0 - 1e-12)]
    return fitting[-1] if fitting else "f"
