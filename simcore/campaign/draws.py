"""Points in the tolerances of lets: corners, fractions of the corners, and random draws.

It knows tolerances and nothing of circuits.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import product

import numpy as np

from simcore.design.circuit import LetValue

CORNERS_OF_AT_MOST = 12
"""Lets up to which every corner is a variant: 4096 of them."""
CUT = 3.0
"""Standard deviations from their middle at which normal draws are cut off: the limits of the tolerance."""


def _ends(lets: Sequence[LetValue]) -> list[tuple[float, float]]:
    ends = []
    for let in lets:
        assert let.low is not None and let.high is not None
        ends.append((let.low, let.high))
    return ends


def corners(lets: Sequence[LetValue]) -> list[tuple[float, ...]]:
    """Every combination of lower and upper limits, the last let changing fastest."""
    return list(product(*_ends(lets)))


def fractional_corners(lets: Sequence[LetValue]) -> list[tuple[float, ...]]:
    """A fraction of the corners in which no effect of one let is mixed with one of another or of a pair of others.

    A two-level fractional factorial design of resolution IV: a saturated one, the columns of a Hadamard matrix by
    Sylvester's doubling, and its mirror image (Box, Hunter, The 2^(k-p) Fractional Factorial Designs, Technometrics 3,
    1961).
    """
    signs = np.ones((1, 1), dtype=int)
    while len(signs) < len(lets) + 1:
        signs = np.block([[signs, signs], [signs, -signs]])
    chosen = signs[:, 1 : len(lets) + 1]
    ends = _ends(lets)
    return [
        tuple(high if sign > 0 else low for sign, (low, high) in zip(row, ends, strict=True))
        for row in np.concatenate([chosen, -chosen]).tolist()
    ]


def fraction_sentence(chosen: int, lets: int) -> str:
    """What a report must say where not every corner was solved."""
    return (
        f"{chosen} of the 2^{lets} corners were solved, a two-level fractional factorial design of resolution IV (Box, "
        "Hunter, Technometrics 3, 1961): the worst corner of all may be none of them"
    )


def drawn(lets: Sequence[LetValue], count: int, seed: Sequence[int]) -> list[tuple[float, ...]]:
    """Draws of lets from their tolerances, by Latin hypercube: each let has one draw in each of `count` equally likely
    slices (McKay, Beckman, Conover, Technometrics 21, 1979). The same seed draws the same."""
    from scipy.stats.qmc import LatinHypercube

    generator = np.random.default_rng(list(seed))
    shares = LatinHypercube(len(lets), seed=generator).random(count)
    columns = [_placed(let, shares[:, index]) for index, let in enumerate(lets)]
    return list(zip(*(column.tolist() for column in columns), strict=True))


def _placed(let: LetValue, shares: np.ndarray) -> np.ndarray:
    """The values of a let below which the given shares of its distribution lie."""
    assert let.low is not None and let.high is not None and not isinstance(let.value, str)
    low, high = let.low, let.high
    if let.distribution == "normal":
        from scipy.special import ndtr, ndtri

        tail = ndtr(-CUT)
        deviations = ndtri(tail + shares * (1.0 - 2.0 * tail))
        return np.clip(0.5 * (low + high) + deviations * (high - low) / (2.0 * CUT), low, high)
    if let.distribution == "triangular" and high > low:
        top = (let.value.value - low) / (high - low)
        rising = low + (high - low) * np.sqrt(shares * top)
        falling = high - (high - low) * np.sqrt((1.0 - shares) * (1.0 - top))
        return np.where(shares < top, rising, falling)
    return low + (high - low) * shares
