"""Currents weighed as data sheets weigh them: a ripple by its frequencies, a surge by width and number of half cycles.

It knows signals and the points of a data sheet, and neither elements nor ratings.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from simcore.figures import measure
from simcore.figures.signal import Signal

Points = Sequence[tuple[float, float]]
"""Of a curve: what stands before and behind each colon, rising in the first."""

ORDERS = 40
"""Harmonics of a ripple that are weighed one by one; what is above counts with the least favourable factor there."""
SHORTEST = 1e-3
"""s: the i2t of a surge counts as constant down to this width, below which it is weighed as one of this width (common
practice of data sheets, no source)."""


def weighted_ripple(current: Signal, frequency: float | None, factors: Points, at: float | None) -> float:
    """The ripple current in A rms at the frequency of its rating that would heat as much as the one there is.

    current: over whole periods of a fundamental frequency in Hz, or any with None, when nothing is known of frequencies
    and the least factor counts for all; factors: frequency in Hz -> factor on the rated current; at: the frequency
    that the rating holds at, None where the factor there is 1
    Each harmonic counts by its own factor, taken straight between points over the logarithm of the frequency:
    I = k(f_0) sqrt(sum (I_n / k(f_n))^2). Common practice of data sheets, no source.
    """
    square = measure.rms(current - measure.mean(current).value).value ** 2
    own = 1.0 if at is None else _factor(factors, at)
    if frequency is None:
        return own * math.sqrt(square) / min(factor for _, factor in factors)
    weighed = 0.0
    for order in range(1, ORDERS + 1):
        part = measure.harmonic(current, order, frequency).value ** 2
        square -= part
        weighed += part / _factor(factors, order * frequency) ** 2
    above = (ORDERS + 1) * frequency
    least = min([_factor(factors, above), *(factor for point, factor in factors if point > above)])
    return own * math.sqrt(weighed + max(square, 0.0) / least**2)


def _factor(factors: Points, frequency: float) -> float:
    frequencies, values = zip(*factors, strict=True)
    return float(np.interp(math.log(frequency), np.log(frequencies), values))


def weighted_surge(current: Signal, width: float, rated: float, cycles: Points, repeats: bool) -> float:
    """The crest in A of the single half sine of a width in s that is as hard to stand as the current.

    rated: crest of the one that is stood; cycles: number of half cycles in a row -> crest that is stood, () where none
    is given; repeats: whether the current is a period of what goes on for ever, which no number of half cycles is
    A pulse counts as a half sine of its own peak and i2t, so that a wider one weighs more and a narrower one less:
    crest times the root of its width over the rating's. A run of n pulses counts by its root mean square over what n
    half cycles may have, and the hardest run of all is what counts. Source: that the i2t of a surge is constant
    between 1 ms and 10 ms, and ratings for several half cycles: IEC 60747-2, from memory.
    """
    crests = _crests(current, width)
    if not crests:
        return 0.0
    hardest = max(crests)
    squares = np.cumsum([0.0, *(crest * crest for crest in crests)])
    longest = 1 if repeats or not cycles else min(len(crests), int(cycles[-1][0]))
    for count in range(2, longest + 1):
        together = math.sqrt(float((squares[count:] - squares[:-count]).max()) / count)
        hardest = max(hardest, together * rated / _stood(cycles, count, rated))
    return hardest


def _crests(current: Signal, width: float) -> list[float]:
    """The crest of each forward pulse as a half sine of a width."""
    highest, found = current.highest(), []
    if highest > 0.0:
        for start, end in current.spans_above(measure.CONDUCTING * highest):
            pulse = current.restrict(float(start), float(end))
            crest = pulse.highest()
            own = 2.0 * pulse.inner(pulse) / crest**2
            found.append(crest * math.sqrt(max(own, SHORTEST) / width))
    return found


def _stood(cycles: Points, count: int, rated: float) -> float:
    """The crest that a number of half cycles may have, straight between points where both axes are logarithmic."""
    points = cycles if cycles[0][0] == 1.0 else [(1.0, rated), *cycles]
    numbers, crests = zip(*points, strict=True)
    return math.exp(float(np.interp(math.log(count), np.log(numbers), np.log(crests))))
