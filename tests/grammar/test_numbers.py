"""Numbers at the ends of what a double holds, read, worked with and shown again."""

from __future__ import annotations

import math

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

import simcore
from grammar.quantities import AMPERE, ANGLE, FARAD, KELVIN, NONE, OHM, SECOND, VOLT, WATT, Dimension, quantity, show

FINITE = st.floats(allow_nan=False, allow_infinity=False, max_value=1e307, min_value=-1e307)
BASE = "a -> g: source e, constant = V\na -> g: resistor R, 1 Ohm\nreference g\nstudy s: operating_point\n"


@settings(deadline=None)
@given(FINITE, st.sampled_from([VOLT, AMPERE, OHM, FARAD, SECOND, WATT, KELVIN, NONE, ANGLE]), st.integers(1, 15))
@example(999.9999e-3, VOLT, 3)
@example(999.4999e-3, VOLT, 3)
@example(999.9999e-15, FARAD, 6)
@example(-999.9999e3, OHM, 5)
@example(999.5, SECOND, 3)
@example(5e-324, AMPERE, 5)
def test_what_is_shown_reads_back_within_its_digits(value: float, dimension: Dimension, digits: int) -> None:
    """Half a unit of the last digit at most, and what the rounding of a scale or an angle adds."""
    text = show(value, dimension, digits)
    number, _, unit = text.partition(" ")
    again = quantity(float(number), unit)
    assert again.dimension == dimension
    assert abs(again.value - value) <= abs(again.value) * (0.5000001 * 10.0 ** (1 - digits) + 1e-14) + 5e-323


@pytest.mark.parametrize("power", range(-15, 13, 3))
@pytest.mark.parametrize("below", [0.9999999, 0.99951, 0.9994])
def test_no_number_is_shown_as_a_thousand_of_a_smaller_unit(power: int, below: float) -> None:
    number = float(show(below * 10.0**power, VOLT, 3).split()[0])
    assert 1.0 <= number < 1000.0 or power == -15


@settings(deadline=None)
@given(st.floats(1e-200, 1e200) | st.floats(-1e200, -1e-200))
def test_a_written_double_is_read_to_the_last_bit(value: float) -> None:
    design = simcore.read_text(f"let V = {value!r} V\n{BASE}")
    assert design.circuit.lets["V"].value.value == value


@pytest.mark.parametrize(
    "value",
    ["1e999 V", "-1e999 V", "1e308 V * 10", "exp(1000) * 1 V", "1 V / 0", "sqrt(-1) * 1 V", "log(0) * 1 V", "(1e200 V)^2 / 1 V", "1e999 V - 1e999 V", "1e-999 V", "10 ^ 400 * 1 V"],
)  # fmt: skip
def test_what_is_no_finite_number_is_a_mistake(value: str) -> None:
    with pytest.raises(simcore.DescriptionError, match="cure:"):
        _ = simcore.read_text(f"let V = {value}\n{BASE}").circuit


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf, "1e999 V", "-nothing", "nothing * 2"])
def test_nor_is_it_taken_from_outside(value: float | str) -> None:
    design = simcore.read_text(f"let V = 1 V\n{BASE}")
    with pytest.raises(simcore.DescriptionError, match="cure:"):
        _ = design.variant(V=value).circuit


@pytest.mark.parametrize("value", ["5e-324 V", "1e-310 V", "2.2250738585072014e-308 V", "1e-30 V", "1e30 V"])
def test_the_smallest_and_largest_are_solved_or_told(value: str) -> None:
    try:
        figure = simcore.read_text(f"let V = {value}\n{BASE}").run("s").figure("mean(voltage(a))")
    except (simcore.DescriptionError, simcore.NoSolution) as told:
        assert "cure:" in str(told)
    else:
        assert float(figure) == pytest.approx(float(value.split()[0]), rel=1e-9)
