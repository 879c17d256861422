"""Limits and factors whose unit is an angle, or has nothing above its stroke, are the values that were written."""

from __future__ import annotations

import pytest

import simcore

TEXT = """
let k = 1 / (2 V)
a -> b: source cell, sine = 9 V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 pA, ideality_factor = 1
p -> b: resistor R, 2 kOhm
reference b
study s: settled
require s: conduction_angle(D1) <= 178 deg
require s: conduction_angle(D1) >= 180 deg
require s: k * peak(voltage(a)) between 4.49 and 4.51
"""


def test_angles_and_reciprocals() -> None:
    below, above, factor = simcore.read_text(TEXT).prove().verdicts
    assert [below.state, above.state, factor.state] == ["holds", "fails", "holds"]
    assert below.limit.value == pytest.approx(3.1066860685)
    assert factor.figure.value == pytest.approx(4.5)
