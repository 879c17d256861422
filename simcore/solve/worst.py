"""The phase at which a figure is highest: a round of trials, then a search between the neighbours of the best ones.

Knows functions of an angle and nothing of studies or figures.
"""

from __future__ import annotations

import math
from collections.abc import Callable

_TRIALS = 24
_BEST = 3
_CLOSE = math.radians(0.05)
_ALIKE = 1e-4
"""Share of the highest within which two peaks count as one, as half a period apart they often are."""


def worst_angle(figure: Callable[[float], float]) -> float:
    """The angle in rad, 0 to 2 pi, at which a figure is highest.

    The best of 24 even trials are each improved between their neighbours by Brent's bounded search (Brent, Algorithms
    for Minimization without Derivatives, 1973) to 0.05 deg; of several alike the first counts. A peak narrower than
    15 deg that no trial touches is missed.
    """
    from scipy.optimize import minimize_scalar

    spacing = 2.0 * math.pi / _TRIALS
    values = [figure(index * spacing) for index in range(_TRIALS)]
    peaks = [i for i in range(_TRIALS) if values[i] >= max(values[i - 1], values[(i + 1) % _TRIALS])]
    found = [(values[index], index * spacing) for index in peaks]
    for index in sorted(peaks, key=lambda index: -values[index])[:_BEST]:
        bounds = ((index - 1) * spacing, (index + 1) * spacing)
        search = minimize_scalar(
            lambda angle: -figure(angle), bounds=bounds, options={"xatol": _CLOSE}, method="bounded"
        )
        found.append((-float(search.fun), float(search.x)))
    highest = max(value for value, _ in found)
    alike = [angle % (2.0 * math.pi) for value, angle in found if value >= highest - _ALIKE * abs(highest)]
    return min(alike)
