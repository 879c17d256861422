"""Units and prefixes: what a number with a unit is in SI, and how a value is shown to people."""

from __future__ import annotations

import math

import pytest

from grammar.quantities import (
    AMPERE,
    ANGLE,
    FARAD,
    HENRY,
    HERTZ,
    I2T,
    JOULE,
    KELVIN,
    KELVIN_PER_WATT,
    NONE,
    OHM,
    PREFIXES,
    SECOND,
    UNITS,
    VOLT,
    VOLT_PER_SECOND,
    WATT,
    WATT_PER_KELVIN,
    Dimension,
    Quantity,
    quantity,
    show,
    unit_of,
)


@pytest.mark.parametrize(
    ("number", "unit", "value", "dimension"),
    [
        (4700.0, "uF", 4700e-6, FARAD),
        (4.7, "mF", 4.7e-3, FARAD),
        (1.0, "MOhm", 1e6, OHM),
        (20.0, "mOhm", 0.02, OHM),
        (3.0, "", 3.0, NONE),
        (20.0, "%", 0.2, NONE),
        (5.0, "VA", 5.0, WATT),
        (2.0, "min", 120.0, SECOND),
        (1.5, "h", 5400.0, SECOND),
        (180.0, "deg", math.pi, ANGLE),
        (25.0, "A^2 s", 25.0, I2T),
        (1.5, "K/W", 1.5, KELVIN_PER_WATT),
        (15.0, "mW/K", 0.015, WATT_PER_KELVIN),
        (5.0, "V/us", 5e6, VOLT_PER_SECOND),
        (50.0, "Hz", 50.0, HERTZ),
        (2.0, "mH", 2e-3, HENRY),
        (3.0, "W s", 3.0, JOULE),
        (2.0, "s^-1", 2.0, HERTZ),
        (7.0, "V/A/s", 7.0, OHM / SECOND),
        (1.0, "kV/mA", 1e6, OHM),
    ],
)
def test_a_number_with_its_unit_in_si(number: float, unit: str, value: float, dimension: Dimension) -> None:
    found = quantity(number, unit)
    assert found.value == pytest.approx(value, rel=1e-15) and found.dimension == dimension


@pytest.mark.parametrize("unit", ["\u00b5F", "\u03bcF", "uF"])
def test_micro_in_either_code_point(unit: str) -> None:
    assert quantity(47.0, unit) == Quantity(47e-6, FARAD)


@pytest.mark.parametrize("unit", ["k\u03a9", "k\u2126", "kOhm"])
def test_ohm_in_either_code_point(unit: str) -> None:
    assert quantity(4.7, unit) == Quantity(4700.0, OHM)


@pytest.mark.parametrize(("celsius", "kelvin"), [(25.0, 298.15), (-40.0, 233.15), (0.0, 273.15), (-273.15, 0.0)])
def test_degrees_celsius_are_absolute(celsius: float, kelvin: float) -> None:
    assert quantity(celsius, "degC") == Quantity(kelvin, KELVIN)


def test_every_prefix_before_every_unit() -> None:
    for prefix, factor in PREFIXES.items():
        for name, dimension in UNITS.items():
            found = quantity(3.0, prefix + name)
            if prefix + name not in ("min", "h"):
                assert found.dimension == dimension and found.value == pytest.approx(3.0 * factor, rel=1e-15)


@pytest.mark.parametrize("written", [1, 22, 47, 470, 4700, 68000])
@pytest.mark.parametrize(
    ("prefix", "power"), [("m", -3), ("u", -6), ("n", -9), ("p", -12), ("k", 3), ("M", 6), ("G", 9)]
)
def test_a_prefix_gives_the_nearest_double(written: int, prefix: str, power: int) -> None:
    assert quantity(float(written), prefix + "V").value == float(f"{written}e{power}")


@pytest.mark.parametrize(
    "unit",
    [
        "Ohms",
        "v",
        "KOhm",
        "mdeg",
        "kdegC",
        "m",
        "u",
        "V^10",
        "V^",
        "kmV",
        "V//A",
        "/s",
        "V*A",
        "fV^9 fV^9",
        "TV^9 TV^9",
        " ".join(["V"] * 30),
        "sec",
        "o",
    ],
)
def test_what_is_no_unit(unit: str) -> None:
    with pytest.raises(ValueError, match="unit"):
        quantity(1.0, unit)


@pytest.mark.parametrize(
    ("dimension", "unit"),
    [
        (VOLT, "V"), (OHM, "Ohm"), (FARAD, "F"), (NONE, ""), (ANGLE, "deg"), (I2T, "A^2 s"), (KELVIN_PER_WATT, "K/W"),
        (VOLT**2, "V^2"), (HERTZ**2, "1/s^2"), (VOLT * SECOND, "V s"),
    ],
)  # fmt: skip
def test_the_unit_of_a_dimension_reads_back(dimension: Dimension, unit: str) -> None:
    assert unit_of(dimension) == unit
    if unit and not unit.startswith("1/"):
        assert quantity(1.0, unit).dimension == dimension


@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (0.0047, FARAD, "4.7 mF"),
        (0.0, VOLT, "0 V"),
        (999.94, VOLT, "999.94 V"),
        (999.999, VOLT, "1 kV"),
        (-12.5, VOLT, "-12.5 V"),
        (1e-18, AMPERE, "0.001 fA"),
        (1e6, OHM, "1 MOhm"),
        (math.pi / 2, ANGLE, "90 deg"),
        (298.15, KELVIN, "298.15 K"),
        (3600.0, SECOND, "3600 s"),
        (0.2, NONE, "0.2"),
        (2.5, I2T, "2.5 A^2 s"),
        (math.nan, VOLT, "nan V"),
    ],
)
def test_a_value_shown_to_people(value: float, dimension: Dimension, text: str) -> None:
    assert show(value, dimension) == text


def test_dimensions_multiply_divide_and_take_powers() -> None:
    assert VOLT / AMPERE == OHM and OHM * SECOND == HENRY and (OHM / HERTZ) == HENRY
    assert (VOLT**2 / OHM) == WATT and (VOLT**2) ** 0.5 == VOLT and VOLT**0.0 == NONE
