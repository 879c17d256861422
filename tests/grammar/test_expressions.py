"""Values: arithmetic with units, the check of dimensions, functions, and the bounds of what a value may be."""

from __future__ import annotations

import math

import pytest

from grammar.description import Name
from grammar.expressions import Poisoned, evaluate, names_in, nearest
from grammar.mistakes import Mistake
from grammar.quantities import AMPERE, ANGLE, KELVIN, NONE, OHM, SECOND, VOLT, WATT, Dimension, Quantity
from grammar.reader import read_expression

KNOWN = {"V": Quantity(12.0, VOLT), "R": Quantity(4.0, OHM), "A": Quantity(2.0, NONE), "n": Quantity(3.0, NONE)}


def value(text: str, mistakes: list[Mistake] | None = None) -> Quantity:
    expression, wrong = read_expression(text, "value")
    assert expression is not None and not wrong, wrong

    def lookup(name: Name) -> Quantity:
        return KNOWN[name.parts[0].name]

    return evaluate(expression, lookup, mistakes)


@pytest.mark.parametrize(
    ("text", "number", "dimension"),
    [
        ("2 + 3 * 4", 14.0, NONE),
        ("(2 + 3) * 4", 20.0, NONE),
        ("2 - 3 - 4", -5.0, NONE),
        ("8 / 4 / 2", 1.0, NONE),
        ("2^3^2", 512.0, NONE),
        ("-2^2", -4.0, NONE),
        ("2^-1", 0.5, NONE),
        ("(-8)^3", -512.0, NONE),
        ("+5 V", 5.0, VOLT),
        ("- 5 V", -5.0, VOLT),
        ("12 V / 4 Ohm", 3.0, AMPERE),
        ("V^2 / R", 36.0, WATT),
        ("1 V/A", 1.0, OHM),
        ("1 V / A", 0.5, VOLT),
        ("1 V /A", 0.5, VOLT),
        ("sqrt(9 V * 4 V)", 6.0, VOLT),
        ("sqrt(4)", 2.0, NONE),
        ("exp(0)", 1.0, NONE),
        ("log(exp(2))", 2.0, NONE),
        ("sin(90 deg)", 1.0, NONE),
        ("cos(pi)", -1.0, NONE),
        ("sin(pi / 2)", 1.0, NONE),
        ("abs(-3 V)", 3.0, VOLT),
        ("min(3 V, V, 5 V)", 3.0, VOLT),
        ("max(1, n, 2)", 3.0, NONE),
        ("2 * pi", 2 * math.pi, NONE),
        ("90 deg + 90 deg", math.pi, ANGLE),
        ("-40 degC", 233.15, KELVIN),
        ("25 degC - 20 degC", 5.0, KELVIN),
        ("25 degC + 10 K", 308.15, KELVIN),
        ("20 %", 0.2, NONE),
        ("1 min + 1 s", 61.0, SECOND),
        ("4700 \u00b5F * 1 k\u03a9", 4.7, SECOND),
        ("0 V", 0.0, VOLT),
        ("0e99", 0.0, NONE),
    ],
)
def test_values(text: str, number: float, dimension: Dimension) -> None:
    found = value(text)
    assert found.value == pytest.approx(number, rel=1e-12, abs=1e-12) and found.dimension == dimension


@pytest.mark.parametrize(
    ("text", "what", "caret"),
    [
        ("3 V + 2 A", "the two sides of + have different units", "+"),
        ("3 V - 2", "the two sides of - have different units", "-"),
        ("2 ^ 1 V", "an exponent is a plain number, not in V", "^"),
        ("(-8) ^ 0.5", "a negative value has no such power", "^"),
        ("1 / 0", "it divides by zero", "/"),
        ("1 V / (2 A - 2 A)", "it divides by zero", "/"),
        ("sqrt(-1)", "sqrt of -1 does not exist", "sqrt(-1)"),
        ("log(0)", "log of 0 does not exist", "log(0)"),
        ("log(1 V)", "log takes a plain number, not in V", "log(1 V)"),
        ("exp(1 deg)", "exp takes a plain number, not in deg", "exp(1 deg)"),
        ("sin(1 V)", "sin takes a number or an angle, not in V", "sin(1 V)"),
        ("min(1 V)", "min takes two or more values", "min(1 V)"),
        ("max(1 V, 2 A)", "the values of max have different units", "max(1 V, 2 A)"),
        ("abs(1, 2)", "abs takes one value, not 2", "abs(1, 2)"),
        ("sqrt()", "sqrt takes one value, not 0", "sqrt()"),
        ("sqr(4)", "sqr has no place in a value", "sqr(4)"),
        ("abs(2) at s", "abs has no place in a value", "abs(2) at s"),
        ("each diode", "`each diode` has no place in a value", "each diode"),
        ("1e308 * 10", "the value is too large to be a number", "1e308 * 10"),
        ("9^9^9^9", "the value is too large to be a number", "9^9^9"),
        ("0 ^ -1", "the value is too large to be a number", "0 ^ -1"),
        ("exp(1000)", "the value is too large to be a number", "exp(1000)"),
        ("(1 V)^101", "the value has a unit to a power above 100", "(1 V)^101"),
        ("(1 V)^1e300 * 1 V", "the value has a unit to a power above 100", "(1 V)^1e300"),
    ],
)  # fmt: skip
def test_what_is_no_value(text: str, what: str, caret: str) -> None:
    mistakes: list[Mistake] = []
    with pytest.raises(Poisoned):
        value(text, mistakes)
    assert [mistake.what for mistake in mistakes] == [what]
    span = mistakes[0].span
    assert span is not None and caret.lstrip("(").startswith(text[span.start : span.end].lstrip("(")[:3])
    assert mistakes[0].cure


def test_mistakes_on_both_sides_are_found() -> None:
    mistakes: list[Mistake] = []
    with pytest.raises(Poisoned):
        value("(1 V + 1 A) * log(0)", mistakes)
    assert len(mistakes) == 2


@pytest.mark.parametrize(
    ("text", "names"),
    [
        ("a + b * sqrt(c)", "a b c"),
        ("s[k - 1].m[j]", "s k j"),
        ("voltage(a -> b)", "a b"),
        ("-x", "x"),
        ("D[m..n]", "D m n"),
        ("3 V", ""),
    ],
)
def test_names_in_an_expression(text: str, names: str) -> None:
    expression, _ = read_expression(text, "names")
    assert expression is not None
    assert " ".join(name.parts[0].name for name in names_in(expression)) == names


@pytest.mark.parametrize(
    ("word", "near"),
    [("resitor", "resistor"), ("Resistor", "resistor"), ("xyz", None), ("capacitr", "capacitor"), ("q" * 200, None)],
)
def test_the_nearest_known_word(word: str, near: str | None) -> None:
    assert nearest(word, ["resistor", "capacitor", "q" * 199]) == near
