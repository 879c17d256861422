"""Circuits that no equations can be written for, each named by what is at fault, and sound ones that look alike."""

from __future__ import annotations

import random

import networkx
import pytest
from understood import BASE, circuit_of, understood, whats

from simcore.design.graph import joined
from simcore.design.overview import describe
from simcore.design.soundness import parts_of

PLAIN = "a -> g: source e, constant = 1 V, series_resistance = 1 Ohm\na -> g: resistor R, 1 Ohm\nreference g\n"


@pytest.mark.parametrize(
    ("text", "whats_wrong"),
    [
        (PLAIN + "a -> x: resistor Q, 1 Ohm\n", ["node x is used once, by Q"]),
        (PLAIN + "a -> x: resistor Q, 1 Ohm\ny -> g: resistor P, 1 Ohm\n", ["node x is used once, by Q", "node y is used once, by P"]),
        (PLAIN + "a -> a: resistor Q, 1 Ohm\n", ["Q is shorted on itself: both its ends are node a"]),
        (PLAIN.replace("reference g\n", ""), ["no node counts as 0 V"]),
        (PLAIN + "x -> y: resistor Q, 1 Ohm\nx -> y: resistor P, 1 Ohm\n", ["nodes x, y have no path to a reference"]),
        (PLAIN.replace("reference g", "reference g, a"), ["nodes g and a are both references of one part of the circuit"]),
        (
            PLAIN + "(a -> g) : (x -> y): transformer T, turns = 1 : 1, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm\nx -> y: resistor Q, 1 Ohm\n",
            ["nodes x, y have no path to a reference"],
        ),
        (
            PLAIN + "(a -> g) : (x -> x): transformer T, turns = 1 : 1, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm\nreference x\n",
            ["T.w2 is shorted on itself: both its ends are node x"],
        ),
        (PLAIN + "a -> g: source f, constant = 1 V\na -> g: source h, constant = 2 V\n", ["a loop of voltage sources: f and h, over nodes a, g"]),
        (
            PLAIN + "a -> x: source f, constant = 1 V\nx -> y: source h, constant = 2 V\ny -> a: source k, sine = 1 V rms, frequency = 50 Hz\n",
            ["a loop of voltage sources: f, h and k, over nodes a, x, y"],
        ),
        (PLAIN + "a -> g: source f, constant = 1 V\na -> g: resistor z, 0 Ohm\n", ["a loop of voltage sources: f and z, over nodes a, g"]),
        (
            PLAIN + "a -> g: source f, constant = 1 V\n(a -> g) : (a -> g): transformer T, turns = 2 : 1, magnetising = 1 H\n",
            ["a loop of voltage sources and ideal windings: f, T.w1 and T.w2, over nodes a, g"],
        ),
        (PLAIN + "x -> g: source f, constant = 1 A\nx -> g: source h, constant = 1 A\n", ["a cut set of current sources: only f and h lead to node x"]),
        (PLAIN + "a -> x: source f, constant = 1 A\nx -> g: inductor L, 1 H\n", ["a cut set of current sources and inductors: only f and L lead to node x"]),
        (
            "(x, y, z): three_phase S, sine = 1 V phase rms, frequency = 50 Hz\n(x, y, z): three_phase T, sine = 1 V phase rms, frequency = 50 Hz\nreference x\n",
            ["a loop of voltage sources: S.L1, S.L2, T.L1 and T.L2, over nodes x, S.star, y, T.star"],
        ),
    ],
)  # fmt: skip
def test_unsound_circuits(text: str, whats_wrong: list[str]) -> None:
    assert whats(text) == whats_wrong


def test_what_only_the_rank_shows() -> None:
    """An ideal core whose two windings hang on one resistor: nothing holds their common voltage."""
    text = PLAIN + "(x -> g) : (y -> g): transformer T, turns = 1 : 1\nx -> y: resistor P, 1 Ohm\n"
    assert whats(text) == ["ideal elements leave voltages or currents undetermined at x, y and T"]
    assert whats(text + "x -> g: resistor Q, 1 Ohm\n") == []


@pytest.mark.parametrize(
    "added",
    [
        "a -> x: source f, constant = 1 V\nx -> g: resistor Q, 1 Ohm\n",
        "a -> g: source f, constant = 1 V\na -> g: source h, constant = 1 V, series_resistance = 1 mOhm\n",
        "a -> x: source f, constant = 1 A\nx -> g: capacitor C, 1 F\n",
        "a -> x: inductor L, 1 H\nx -> g: inductor M, 1 H\n",
        "(a -> g) : (x -> y): transformer T, turns = 1 : 1, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm\nx -> y: resistor Q, 1 Ohm\nreference y\n",
        "(a -> g) : (x -> g): transformer T, turns = 1 : 2, magnetising = 1 H, resistance = 1 Ohm : 0 Ohm\nx -> g: resistor Q, 1 Ohm\n",
    ],
)
def test_sound_circuits_that_look_alike(added: str) -> None:
    assert whats(PLAIN + added) == []


@pytest.mark.parametrize("seed", range(20))
def test_connected_components_are_those_of_the_graph(seed: int) -> None:
    draw = random.Random(seed)
    nodes = [f"n{index}" for index in range(12)]
    draw.shuffle(nodes)
    branches = [(draw.choice(nodes), draw.choice(nodes)) for _ in range(seed)]
    graph = networkx.Graph()
    graph.add_edges_from(branches)
    graph.add_nodes_from(nodes)
    parts = joined(nodes, branches)
    assert {frozenset(part) for part in parts} == {frozenset(part) for part in networkx.connected_components(graph)}
    assert all(part == sorted(part, key=nodes.index) for part in parts)
    assert parts == sorted(parts, key=lambda part: nodes.index(part[0]))


def test_parts_and_the_overview() -> None:
    text = PLAIN + (
        '(a -> g) : (x -> y): transformer T, turns = 1 : 2, magnetising = 1 H, resistance = 1 Ohm : 2 Ohm\nx -> y: resistor Q, 4.7 kOhm as "bleeder"\nreference y\n'
        'purpose "test"\nambient 40 degC\nlet k = 3 V tolerance 10 %\nobserve u = voltage(x)\nsweep w: extremes of k by open each resistor\n'
        'study t: transient, duration = 10 ms, angle = 90 deg, open Q {\n at 5 ms: close Q\n}\nrequire t: mean(u) <= 1 V as "low"\n'
    )
    circuit = circuit_of(text)
    assert parts_of(circuit) == [["a", "g"], ["x", "y"]]
    shown = describe(circuit)
    assert (shown.purpose, shown.ambient) == ("test", "40 degC")
    assert [(part.reference, part.branches, part.loops) for part in shown.parts] == [("g", 3, 2), ("y", 2, 1)]
    assert [branch.name for branch in shown.branches] == ["e", "R", "T.w1", "T.w2", "Q"]
    assert shown.branches[-1].values == ("resistance = 4.7 kOhm",) and shown.branches[-1].label == "bleeder"
    assert shown.lets[0].tolerance == "2.7 V to 3.3 V, uniform" and shown.observes == {"u": "voltage(x) [V]"}
    assert (
        shown.studies["t"] == "from rest, for 10 ms, starting at 90 deg of the first sine; Q opened; at 5 ms Q closed"
    )
    assert shown.sweeps["w"] == "every corner of k, and the nominal, for each of open each resistor, one at a time"
    assert shown.requirements == (("t", "mean(u) <= 1 V", "low"),)


def test_soundness_waits_for_the_rest_to_be_right() -> None:
    assert whats(PLAIN + "a -> x: resistor Q, 1 Ohm\nlet k = 1 V + 1 A\n") == [
        "the two sides of + have different units"
    ]
    assert whats(PLAIN + "a -> x: resistor Q, 1 Ohm\nx -> g: resistor P 1 Ohm\n") == [
        "1 can't stand here: `as`, `,` or the end of the line is expected"
    ]


def test_an_empty_file_is_no_circuit_and_no_mistake() -> None:
    _, circuit, mistakes = understood("# nothing\n")
    assert not mistakes and not circuit.elements


def test_a_large_sound_circuit() -> None:
    assert (
        whats(
            BASE
            + "n[0] -> b: resistor Z, 1 Ohm\np -> n[2000]: resistor Y, 1 Ohm\nrepeat k from 1 to 2000 { n[k-1] -> n[k]: resistor R[k], 1 Ohm }\n"
        )
        == []
    )
