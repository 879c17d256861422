"""Descriptions as text: what is written reads as the same meaning, and writing that changes nothing."""

from __future__ import annotations

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from worked import ALL

from grammar.description import (
    Binary,
    Call,
    Description,
    Each,
    Expression,
    Let,
    Name,
    Negative,
    Number,
    Part,
    Purpose,
    Require,
    Study,
    Sweep,
)
from grammar.layout import in_order, write
from grammar.reader import read_expression, read_text
from grammar.writer import write_expression


def read(text: str) -> Description:
    description, mistakes = read_text(text, "text")
    assert not mistakes, mistakes
    return description


@pytest.mark.parametrize("text", ALL.values(), ids=ALL)
def test_written_and_read_again_means_the_same(text: str) -> None:
    description = read(text)
    written = write(description)
    assert read(written) == description and write(read(written)) == written
    ordered = in_order(description)
    assert read(write(ordered)) == ordered and in_order(ordered) == ordered
    assert sorted(map(repr, ordered.statements)) == sorted(map(repr, description.statements))


@pytest.mark.parametrize(
    ("text", "written"),
    [
        ("a+b*c", "a + b * c"),
        ("(a+b)*c", "(a + b) * c"),
        ("a-(b-c)", "a - (b - c)"),
        ("(a-b)-c", "a - b - c"),
        ("a/(b*c)", "a / (b * c)"),
        ("(a^b)^c", "(a^b)^c"),
        ("a^(b^c)", "a^b^c"),
        ("(-a)^2", "(-a)^2"),
        ("-(a^2)", "-a^2"),
        ("-(a+b)", "-(a + b)"),
        ("-(a*b)", "-(a * b)"),
        ("(-a)*b", "-a * b"),
        ("a*(-b)", "a * -b"),
        ("2^-(a)", "2^-a"),
        ("1.50 V", "1.5 V"),
        ("4700.0 uF", "4700 uF"),
        ("f( a->b )", "f(a -> b)"),
        ("mean(u)at s", "mean(u) at s"),
        ("S[ k-1 ].m[2]", "S[k-1].m[2]"),
        ("each diode", "each diode"),
    ],
)
def test_expressions_have_as_few_parentheses_as_they_need(text: str, written: str) -> None:
    expression, mistakes = read_expression(text, "text")
    assert expression is not None and not mistakes
    assert write_expression(expression) == written


NAMES = st.from_regex(r"[a-z][A-Za-z0-9_]{0,5}", fullmatch=True).filter(
    lambda word: word not in ("each", "of", "open", "short", "extremes", "ratings", "worst", "at")
)
NUMBERS = st.builds(
    Number,
    st.floats(0.0, 1e9, allow_subnormal=False).filter(lambda v: v == 0 or v > 1e-200),
    st.sampled_from(["", "V", "mA", "k\u03a9", "A^2 s", "degC", "%", "K/W"]),
)


def _larger(inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
    plain = st.builds(Name, st.tuples(st.builds(Part, NAMES, st.tuples() | st.tuples(inner))))
    return (
        st.builds(Binary, st.sampled_from("+-*/^"), inner, inner)
        | st.builds(Negative, inner)
        | st.builds(Call, NAMES, st.lists(inner, max_size=3).map(tuple), st.none() | NAMES)
        | st.builds(Each, NAMES)
        | plain
    )


@settings(max_examples=300, deadline=None)
@given(st.recursive(NUMBERS | st.builds(Name, st.tuples(st.builds(Part, NAMES))), _larger, max_leaves=12))
@example(Name((Part("a", (Name((Part("b", (Number(0.0, "A^2 s"),)),)),)),)))  # an index in an index may hold a unit
def test_any_expression_reads_back(expression: Expression) -> None:
    again, mistakes = read_expression(write_expression(expression), "text")
    assert not mistakes and again == expression


@pytest.mark.parametrize("value", [0.1, 1 / 3, 1e22, 5e-290, 123456789.123, 4.9e-9, 2.0**60])
def test_numbers_are_exact(value: float) -> None:
    expression, _ = read_expression(write_expression(Number(value, "V")), "text")
    assert expression == Number(value, "V")


def test_the_order_of_reading_and_an_empty_line_between_kinds() -> None:
    text = 'a -> b: resistor R, 1 Ohm\nlet x = 1\nlet y = 2\nstudy s: settled\npurpose "p"\nrequire s: mean(u) < 1\n'
    ordered = in_order(read(text))
    assert [type(each) for each in ordered.statements[:5]] == [Purpose, Require, Study, Let, Let]
    assert write(ordered) == (
        'purpose "p"\n\nrequire s: mean(u) < 1\n\nstudy s: settled\n\nlet x = 1\nlet y = 2\n\na -> b: resistor R, 1 Ohm\n'
    )
    assert write(Description(())) == ""


def test_a_sweep_keeps_its_axes() -> None:
    (sweep,) = read("sweep w: 5 samples of A, seed = 2 by R over [1, 2], studies = [s]").statements
    assert (
        isinstance(sweep, Sweep)
        and len(sweep.axes) == 2
        and [each.key for each in sweep.settings] == ["seed", "studies"]
    )
    (again,) = read(write(Description((sweep,)))).statements
    assert again == sweep
