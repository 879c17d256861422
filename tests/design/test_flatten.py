"""Repeats and blocks written out: names, indices, joins, defaults, and the bounds on copies."""

from __future__ import annotations

import pytest
from understood import BASE, circuit_of, whats

LADDER = """let N = 3
block stage(x[0], x[N]) with R = 1 kOhm, N = 1 {
    repeat k from 1 to N {
        x[k-1] -> x[k]: resistor R[k], R * k
    }
    x[N] -> mid: resistor R_mid, R
    mid -> x[0]: resistor R_back, R
    observe u_mid = voltage(mid -> x[0])
}
a -> g: source e, constant = 10 V
reference g
repeat k from 1 to N {
    (g, n[k]): stage S[k], N = k, R = 2 kOhm
    n[k] -> a: resistor L[k], 1 Ohm * k
}
study rest: operating_point
"""


def test_copies_have_names_of_their_own_and_join_outside_nodes() -> None:
    circuit = circuit_of(LADDER)
    ports = {name: (element.ports[0].a, element.ports[0].b) for name, element in circuit.elements.items()}
    assert ports["S[1].R[1]"] == ("g", "n[1]")
    assert [ports[f"S[3].R[{k}]"] for k in (1, 2, 3)] == [
        ("g", "S[3].x[1]"),
        ("S[3].x[1]", "S[3].x[2]"),
        ("S[3].x[2]", "n[3]"),
    ]
    assert ports["S[2].R_mid"] == ("n[2]", "S[2].mid")
    assert circuit.elements["S[3].R[2]"].given["resistance"] == 4000.0
    assert circuit.blocks == {"S[1]": "stage", "S[2]": "stage", "S[3]": "stage"}
    assert list(circuit.observes) == ["S[1].u_mid", "S[2].u_mid", "S[3].u_mid"]
    assert sum(name.startswith("S[") for name in circuit.elements) == (1 + 2 + 3) + 2 * 3


def test_blocks_in_blocks() -> None:
    circuit = circuit_of(
        """block one(x, y) with R { x -> y: resistor R1, R }
        block two(x, y) with R = 5 Ohm {
            (x, m): one first, R = R
            (m, y): one second, R = 2 * R
        }
        a -> g: source e, constant = 1 V
        (a, g): two T
        (a, g): two U, R = 1 Ohm
        reference g
        """
    )
    assert {name: element.given["resistance"] for name, element in circuit.elements.items() if name != "e"} == {
        "T.first.R1": 5.0, "T.second.R1": 10.0, "U.first.R1": 1.0, "U.second.R1": 2.0
    }  # fmt: skip
    assert circuit.elements["T.second.R1"].ports[0].a == "T.m" and circuit.elements["T.second.R1"].ports[0].b == "g"


def test_repeats_in_repeats_and_empty_ones() -> None:
    circuit = circuit_of(
        BASE
        + "repeat i from 1 to 3 {\n repeat j from i to 3 {\n  p -> b: resistor M[i][j], 1 Ohm * i * j\n }\n}\nrepeat k from 1 to 0 { p -> b: resistor Z[k], 1 Ohm }\n"
    )
    found = [name for name in circuit.elements if name.startswith("M")]
    assert found == ["M[1][1]", "M[1][2]", "M[1][3]", "M[2][2]", "M[2][3]", "M[3][3]"]
    assert circuit.elements["M[2][3]"].given["resistance"] == 6.0


def test_lets_and_requirements_in_repeats() -> None:
    circuit = circuit_of(
        BASE
        + "repeat k from 1 to 2 {\n let I[k] = 1 A * k tolerance 10 %\n observe u[k] = voltage(p) * k\n require s: mean(u[k]) <= 10 V * k\n}\n"
    )
    assert circuit.lets["I[2]"].high == pytest.approx(2.2)
    assert [each.wording for each in circuit.requirements] == ["mean(u[1]) <= 10 V * 1", "mean(u[2]) <= 10 V * 2"]


def test_a_data_sheet_and_a_count_as_parameters() -> None:
    circuit = circuit_of(
        BASE + "datasheet big: diode { saturation_current = 2 nA, ideality_factor = 2 }\n"
        "block string(s[0], s[N]) with valve = big, N = 2 { repeat k from 1 to N { s[k-1] -> s[k]: diode D[k], valve } }\n"
        "(a, p): string S\n"
    )
    assert circuit.elements["S.D[2]"].sheet == "big" and circuit.elements["S.D[2]"].given["saturation_current"] == 2e-9
    assert circuit.elements["S.D[2]"].ports[0].b == "p"


@pytest.mark.parametrize(
    ("added", "what"),
    [
        ("repeat k from 1 to 2 { p -> b: resistor Q, 1 Ohm }", "Q is named twice"),
        ("repeat k from 1 to 2 { let q = 1 }", "q is declared twice"),
        ("repeat k from 1 to 2 { study t: settled }", "this can't stand in a repeat"),
        ("repeat k from 1 to 2 { repeat k from 1 to 2 { p -> b: resistor Q[k], 1 Ohm } }", "k is named already"),
        ("repeat k from 1 to 1.5 { p -> b: resistor Q[k], 1 Ohm }", "the last copy of a repeat must be a whole number without a unit"),
        ("repeat k from 1 V to 2 { p -> b: resistor Q[k], 1 Ohm }", "the first copy of a repeat must be a whole number without a unit"),
        ("repeat k from 1 to 1e7 { p -> b: resistor Q[k], 1 Ohm }", "the last copy of a repeat is 10000000, which is out of range"),
        ("repeat k from 1 to 10001 { p -> b: resistor Q[k], 1 Ohm }", "the repeats make too many copies"),
        ("repeat i from 1 to 200 {\nrepeat k from 1 to 200 { p -> b: resistor Q[k][i], 1 Ohm }\n}", "the repeats make too many copies"),
        ("repeat i from 1 to 6000 {\n" + "p -> b: resistor Q, 1 Ohm\n" * 9 + "}", "the design has too many elements"),
        ("repeat i from 1 to 6000 {\n" + "".join(f"let q{n}[i] = 1 Ohm\n" for n in range(9)) + "}", "the design is too large once its repeats and blocks are written out"),
        ("block x(c, d) { (c, d): x X }\n(p, b): x X", "block x holds itself"),
        ("block x(c, d) { (c, d): y X }\nblock y(c, d) { (c, d): x X }\n(p, b): x X", "block x holds itself"),
        ("block x(c, d) { use \"a.rect\" }\n(p, b): x X", "this can't stand in a block"),
        ("block x(c, c) { c -> d: resistor R, 1 Ohm }\n(p, b): x X", "two terminals of block x have one name"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\n(p, b) -> a: x X", "block x takes its terminals in one pair of parentheses"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\n(p, b, a): x X", "block x has 2 terminals, and 3 are given"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\n(p, b): x X, 5", "block x takes no unnamed value"),
        ("block x(c, d) with q { c -> d: resistor R, q }\n(p, b): x X", "block x needs q"),
        ("block x(c, d) with q = 1 Ohm { c -> d: resistor R, q }\n(p, b): x X, r = 1 Ohm", "block x has no parameter r"),
        ("block x(c, d) with q = 1 Ohm { c -> d: resistor R, q }\n(p, b): x X, q = 1 : 2", "block x takes a value or a data sheet for q"),
        ("block resistor(c, d) { c -> d: capacitor C, 1 F }", "resistor is a kind of element already"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\nblock x(c, d) { c -> d: resistor R, 1 Ohm }", "x is a block already"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\n(p, b): x X\n(p, b): x X", "X is named twice"),
        ("block x(c, d) { c -> d: resistor R, 1 Ohm }\n(p, b): x X\np -> X: resistor R2, 1 Ohm", "X is a block and a node"),
        ("p -> b: resistor X.R, 1 Ohm", "X.R can't be put in from outside"),
        ("p -> X.m: resistor R2, 1 Ohm", "no node is named X.m"),
        ("p -> b: resistor R[1 Ohm], 1 Ohm", "an index must be a whole number without a unit"),
        ("p -> b: resistor R[1e9], 1 Ohm", "an index is 1000000000, which is out of range"),
        ("p -> b: resistor R[1..2], 1 Ohm", "a range of indices stands where one name is wanted"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_copies(added: str, what: str) -> None:
    assert whats(BASE + added + "\n") == [what]


def test_blocks_that_multiply_are_bounded() -> None:
    """Sixteen blocks of ten copies each would be 10^16 elements."""
    blocks = "block b0(x, y) { x -> y: resistor R, 1 Ohm }\n" + "".join(
        f"block b{level + 1}(x, y) {{\n" + "".join(f"(x, y): b{level} S{copy}\n" for copy in range(10)) + "}\n"
        for level in range(14)
    )
    assert whats(BASE + blocks + "(p, b): b14 S\n") == [
        "the design is too large once its repeats and blocks are written out"
    ]


def test_copies_nested_too_deeply() -> None:
    inner = "".join(f"repeat k{level} from 1 to 1 {{\n" for level in range(12))
    blocks = "".join(f"block b{n}(x, y) {{\n{inner}(x, y): b{n + 1} S\n{'}' * 12}\n}}\n" for n in range(3))
    found = whats(BASE + blocks + "block b3(x, y) { x -> y: resistor R, 1 Ohm }\n(p, b): b0 S\n")
    assert found == ["the design is too large once its repeats and blocks are written out"]
