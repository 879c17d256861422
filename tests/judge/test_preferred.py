"""Preferred numbers against the lists of IEC 60063:2015 and its sums of a decade."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from simcore.judge.preferred import R10, SERIES, Series

# IEC 60063:2015, lists as given on public tables.
LISTED = {
    "E3": "1.0 2.2 4.7",
    "E6": "1.0 1.5 2.2 3.3 4.7 6.8",
    "E12": "1.0 1.2 1.5 1.8 2.2 2.7 3.3 3.9 4.7 5.6 6.8 8.2",
    "E24": "1.0 1.1 1.2 1.3 1.5 1.6 1.8 2.0 2.2 2.4 2.7 3.0 3.3 3.6 3.9 4.3 4.7 5.1 5.6 6.2 6.8 7.5 8.2 9.1",
    "E48": "1.00 1.05 1.10 1.15 1.21 1.27 1.33 1.40 1.47 1.54 1.62 1.69 1.78 1.87 1.96 2.05 2.15 2.26 2.37 2.49 2.61 2.74 "
    "2.87 3.01 3.16 3.32 3.48 3.65 3.83 4.02 4.22 4.42 4.64 4.87 5.11 5.36 5.62 5.90 6.19 6.49 6.81 7.15 7.50 7.87 8.25 8.66 9.09 9.53",
}
# Sums of the values of one decade, from the published lists.
SUMS = {"E3": 7.90, "E6": 19.50, "E12": 42.90, "E24": 90.10, "E48": 183.13, "E96": 370.70, "E192": 745.99}


@pytest.mark.parametrize("name", list(LISTED))
def test_values_are_those_of_the_standard(name: str) -> None:
    assert SERIES[name].values == tuple(float(value) for value in LISTED[name].split())


@pytest.mark.parametrize("name", list(SUMS))
def test_sums_of_a_decade_are_those_of_the_standard(name: str) -> None:
    assert math.fsum(SERIES[name].values) == pytest.approx(SUMS[name], abs=1e-9)


def test_ratings_are_rounded_roots_of_ten() -> None:
    """ISO 3, 4: the rounded values depart from the powers of the tenth root of ten by 1.26 % at most."""
    off = [value / 10.0 ** (place / 10.0) - 1.0 for place, value in enumerate(R10.values)]
    assert len(off) == 10 and max(map(abs, off)) < 0.0127
    assert (R10.up(341.8), R10.up(32.0), R10.up(6.3e-3)) == (400.0, 40.0, 6.3e-3)


def test_the_one_exception_and_what_two_series_share() -> None:
    assert 9.2 in SERIES["E192"].values and 9.19 not in SERIES["E192"].values
    assert sorted(set(SERIES["E24"].values) & set(SERIES["E96"].values)) == [1.0, 1.1, 1.3, 1.5, 2.0, 7.5]


@given(st.sampled_from(list(SERIES)), st.floats(1e-14, 1e14))
def test_neighbours_enclose_a_value_without_another_between(name: str, value: float) -> None:
    series = SERIES[name]
    low, high = series.down(value), series.up(value)
    assert low <= value * (1.0 + 2e-9) and high >= value * (1.0 - 2e-9)
    if high > low * (1.0 + 1e-6):
        assert series.up(low * (1.0 + 1e-6)) == high and series.down(high * (1.0 - 1e-6)) == low
    assert high / low < 10.0 ** (2.0 / len(series.values))


def test_examples() -> None:
    e12 = SERIES["E12"]
    assert (e12.up(4.8e-3), e12.up(4.7e-3), e12.down(4.6e-3)) == (5.6e-3, 4.7e-3, 3.9e-3)
    assert (e12.up(8.3), e12.up(9.9e-7), e12.down(1.0), e12.down(0.999)) == (10.0, 1e-6, 1.0, 0.82)


@pytest.mark.parametrize("value", [0.0, -1.0, math.inf, math.nan])
def test_only_finite_values_above_zero_have_neighbours(value: float) -> None:
    with pytest.raises(ValueError, match="above zero"):
        SERIES["E6"].up(value)


@pytest.mark.parametrize(
    ("name", "values"), [("E4", (1.0, 2.2, 4.7)), ("E3", (1.0, 4.7, 2.2)), ("E3", (1.0, 3.3, 4.7))]
)
def test_a_series_that_cannot_be_right_is_not_made(name: str, values: tuple[float, ...]) -> None:
    with pytest.raises(ValueError):
        Series(name, values)
