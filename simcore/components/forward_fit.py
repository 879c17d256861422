"""The junction law behind points of a forward curve.

Knows the law and arithmetic, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from simcore.components.physics import BOLTZMANN_OVER_CHARGE

_ROUNDS = 50
_POOR = 0.05


@dataclass(frozen=True)
class ForwardLaw:
    """v = n V_T ln(1 + i / I_S) + R i, and what it misses of each point (V), in the order of the points."""

    saturation_current: float
    ideality_factor: float
    series_resistance: float
    misses: tuple[float, ...]


class NoLaw(ValueError):
    """Points that no junction law goes through; the text says why, `cure` what to do."""

    def __init__(self, what: str, cure: str):
        super().__init__(what)
        self.cure = cure


def fit(
    points: Sequence[tuple[float, float]],
    temperature: float,
    ideality_factor: float | None = None,
    series_resistance: float | None = None,
) -> ForwardLaw:
    """The law that misses the points' voltages least, in the sum of squares: even weight for each point, whatever its
    current, as forward curves are read off a logarithmic scale.

    points: (V, A); temperature: in K at which they were taken; the other two: fixed where given. A negative series
    resistance is taken as none. Raises NoLaw.
    Source: linear least squares in n V_T, ln I_S and R for a given I_S inside the logarithm, repeated (common practice,
    no source).
    """
    voltages, currents = (np.array(column, dtype=float) for column in zip(*points, strict=True))
    free = (ideality_factor is None) + (series_resistance is None)
    if len(points) < 2 and ideality_factor is None:
        cure = "Give a second point at another current, or `ideality_factor` beside the one."
        raise NoLaw("one point of the forward curve does not fix its law", cure)
    if len({float(current) for current in currents}) < len(points):
        raise NoLaw("two points of the forward curve have the same current", "Leave one of them out.")
    order = np.argsort(currents)
    if np.any(np.diff(voltages[order]) <= 0.0):
        raise NoLaw("the forward voltage does not rise with the current", "Check the points: write them as V @ A.")
    thermal = BOLTZMANN_OVER_CHARGE * temperature
    with_resistance = series_resistance is None and len(points) > free
    fixed = (None if ideality_factor is None else ideality_factor * thermal, series_resistance or 0.0)
    slope, saturation, resistance = _solved(voltages, currents, fixed, with_resistance)
    if resistance < 0.0:
        slope, saturation, resistance = _solved(voltages, currents, fixed, False)
    found = slope * np.log1p(currents / saturation) + resistance * currents
    factor = slope / thermal
    if not (0.01 <= factor <= 20.0):
        cure = "Check the points and their units, or give the law itself."
        raise NoLaw(f"its forward points give an ideality factor of {factor:.3g}", cure)
    return ForwardLaw(saturation, factor, resistance, tuple(float(miss) for miss in found - voltages))


def poor(law: ForwardLaw, points: Sequence[tuple[float, float]]) -> int | None:
    """The position of the worst point where the law misses one by more than 5 % of its voltage, else None."""
    shares = [abs(miss) / voltage for miss, (voltage, _) in zip(law.misses, points, strict=True)]
    worst = max(range(len(shares)), key=shares.__getitem__)
    return worst if shares[worst] > _POOR else None


def _solved(
    voltages: np.ndarray, currents: np.ndarray, fixed: tuple[float | None, float], with_resistance: bool
) -> tuple[float, float, float]:
    """n V_T, I_S and R."""
    slope, given_resistance = fixed
    saturation, resistance = 0.0, given_resistance
    for _ in range(_ROUNDS):
        logarithms = np.log(currents + saturation)
        columns, right = [np.ones_like(currents)], voltages - given_resistance * currents
        if slope is None:
            columns.append(logarithms)
        else:
            right = right - slope * logarithms
        if with_resistance:
            columns.append(currents)
        found = np.linalg.lstsq(np.stack(columns, axis=1), right, rcond=None)[0]
        steepness = slope if slope is not None else float(found[1])
        resistance = float(found[-1]) if with_resistance else given_resistance
        if steepness <= 0.0:
            raise NoLaw("no junction law goes through its forward points", "Check the points: write them as V @ A.")
        before, saturation = saturation, math.exp(min(-float(found[0]) / steepness, 0.0))
        if abs(saturation - before) <= 1e-12 * saturation:
            break
    return steepness, saturation, resistance
