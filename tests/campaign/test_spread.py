"""A spread of capacitor-input rectifiers against their closed form, worked out for all draws at once."""

from __future__ import annotations

import math

import numpy as np
import pytest

import simcore
from simcore.campaign.results import Results

FREQUENCY, CURRENT, SLOPE = 50.0, 1e-9, 0.01 * 25.6926e-3
"""Supply; saturation current of the diode, and its n V_T at 25 degC: a drop of some millivolts beside hundreds of volts."""
LIMIT = 60.0
RECTIFIER = f"""
purpose "half-wave rectifier with reservoir"
require work: ripple(u_out) <= {LIMIT} V
require work: mean(u_out) >= 250 V
study work: settled
let V = 325 V    tolerance 10 %
let C = 100 uF   tolerance -20 % .. +50 %  triangular
let R = 1 kOhm   tolerance 20 %            normal
a -> g: source e, sine = V peak, frequency = {FREQUENCY} Hz
a -> p: diode D1, saturation_current = {CURRENT} A, ideality_factor = 0.01
p -> g: capacitor C1, C
p -> g: resistor R1, R
reference g
observe u_out = voltage(p)
sweep few:     24 samples of each let, seed = 11
sweep many:    2000 samples of each let, seed = 11
sweep corners: extremes of each let
"""


def closed_form(peak: np.ndarray, capacitance: np.ndarray, resistance: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Mean and ripple of a half-wave rectifier with an ideal diode and no source resistance, arrays of one shape.

    The diode ceases to conduct at pi - atan(w R C), where the capacitor's current and the load's cancel; from there the
    output falls as exp(-x / (w R C)) until the next period's sine meets it, found by bisection.
    Source: O. H. Schade, Analysis of rectifier operation, Proc. IRE 31, 1943, with no source resistance (from memory).
    """
    tau = 2.0 * np.pi * FREQUENCY * resistance * capacitance
    off = np.pi - np.arctan(tau)
    low, high = np.zeros_like(tau), np.full_like(tau, 0.5 * np.pi)
    for _ in range(60):
        middle = 0.5 * (low + high)
        below = np.sin(middle) < np.sin(off) * np.exp(-(2.0 * np.pi + middle - off) / tau)
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    on = 0.5 * (low + high)
    decay = tau * np.sin(off) * (1.0 - np.exp(-(2.0 * np.pi + on - off) / tau))
    mean = peak * (np.cos(on) - np.cos(off) + decay) / (2.0 * np.pi)
    return mean, peak * (1.0 - np.sin(on))


@pytest.fixture(scope="module")
def rectifier() -> simcore.Design:
    return simcore.read_text(RECTIFIER, "rectifier.rect")


def held_to_closed_form(results: Results) -> tuple[np.ndarray, np.ndarray]:
    """Every variant within its bound and the diode's drop of the closed form; what that says is returned."""
    table = results.table
    voltage, capacitance, resistance = (table[name] for name in ("V [V]", "C [F]", "R [Ohm]"))
    assert set(table["ended"]) == {"solved"}
    peak_current = 2.0 * np.pi * FREQUENCY * capacitance * voltage + voltage / resistance
    drop = SLOPE * np.log(peak_current / CURRENT + 1.0)
    assert drop.max() < 6.5e-3
    for name, expected in zip(("mean", "ripple"), closed_form(voltage, capacitance, resistance), strict=True):
        bound = table[f"work: {name}(u_out), bound [V]"]
        error = np.abs(table[f"work: {name}(u_out) [V]"] - expected)
        assert np.all(error <= bound + drop), f"{name}: {np.max(error - bound - drop)} V beyond"
        assert np.all(bound < 0.3) and np.ptp(expected) > 10.0
    return closed_form(voltage, capacitance, resistance)


@pytest.mark.parametrize("sweep", ["few", pytest.param("many", marks=pytest.mark.nightly)])
def test_a_spread_is_that_of_the_closed_form(rectifier: simcore.Design, sweep: str) -> None:
    results = rectifier.sweep(sweep)
    mean, ripple = held_to_closed_form(results)
    (rate,) = results.pass_rates
    sure = (np.abs(ripple - LIMIT) > 0.3) & (np.abs(mean - 250.0) > 0.3)
    passing = np.array([row.passes for row in results.rows])
    assert np.array_equal(passing[sure], ((ripple <= LIMIT) & (mean >= 250.0))[sure])
    assert sure.mean() > 0.9 and 0 < passing.sum() < len(passing) == rate.drawn and rate.passing == passing.sum()
    assert ripple[results.worst[0].row.number - 1] >= ripple.max() - 0.3  # type: ignore[union-attr]
    assert mean[results.worst[1].row.number - 1] <= mean.min() + 0.3  # type: ignore[union-attr]


def test_extremes_are_the_true_ones_of_a_monotone_figure(rectifier: simcore.Design) -> None:
    """Ripple grows with the voltage and falls with the capacitance and the resistance; the mean grows with all three.
    So the ends of both lie in corners, and no draw of however many is beyond them."""
    results = rectifier.sweep("corners")
    mean, ripple = held_to_closed_form(results)
    inside = np.random.default_rng(5).random((100_000, 3))
    ends = [(let.low, let.high) for let in rectifier.circuit.lets.values()]
    draws = [low + (high - low) * share for (low, high), share in zip(ends, inside.T, strict=True)]  # type: ignore[operator]
    all_means, all_ripples = closed_form(*draws)
    assert ripple.max() > all_ripples.max() > 0.9 * ripple.max() and mean.min() < all_means.min() < 1.1 * mean.min()
    high, low = results.worst
    variants = [results.plan.variant(worst.row.number - 1).values for worst in (high, low)]  # type: ignore[union-attr]
    values = [[value.value for value in variant.values()] for variant in variants]  # type: ignore[union-attr]
    (v_low, v_high), (c_low, _), (r_low, _) = ends
    assert values == [[v_high, c_low, r_low], [v_low, c_low, r_low]]
    assert math.isclose(high.found.value, ripple.max(), rel_tol=1e-3)  # type: ignore[union-attr]
