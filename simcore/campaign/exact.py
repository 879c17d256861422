"""Values as text that gives the same number when it is read, and the values that there is such a text for."""

from __future__ import annotations

import math

from grammar.quantities import ANGLE, Dimension, quantity, show, unit_of

_DIGITS = range(5, 18)


def exact(value: float, dimension: Dimension) -> str:
    """A value as a description writes it, as short as it can be for reading to give the same number.

    ValueError for an angle that no number of degrees gives; see writable.
    """
    for digits in _DIGITS:
        text = show(value, dimension, digits)
        number, _, unit = text.partition(" ")
        if quantity(float(number), unit).value == value:
            return text
    if dimension == ANGLE:
        nearest = math.degrees(value)
        for degrees in (nearest, math.nextafter(nearest, math.inf), math.nextafter(nearest, -math.inf)):
            if quantity(degrees, "deg").value == value:
                return f"{degrees!r} deg"
        raise ValueError(f"no number of degrees is {value!r} rad")
    unit = unit_of(dimension)
    return f"{value!r} {unit}" if unit else repr(value)


def writable(value: float, dimension: Dimension) -> float:
    """The value itself, or the next one that a description can say: some angles lie between the numbers of degrees."""
    if dimension == ANGLE:
        try:
            exact(value, dimension)
        except ValueError:
            return quantity(math.degrees(value), "deg").value
    return value
