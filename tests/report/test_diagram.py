"""The circuit as a diagram: nothing covers anything, and it looks as an engineer would draw it."""

from __future__ import annotations

from itertools import combinations, pairwise
from pathlib import Path
from xml.etree import ElementTree

import networkx
import pytest

import simcore
from simcore.components import KINDS
from simcore.design.circuit import Circuit
from simcore.report.arranging import MOST_BRANCHES, Arrangement, Place, arrange, branches_of
from simcore.report.diagram import Diagram, Mark, Words, diagram_of, diagram_svg, width_of
from simcore.report.symbols import SYMBOLS, Point, symbol_of

DESIGNS = sorted(simcore.library_folder().glob("*.rect"))


def circuit_of(path: Path) -> Circuit:
    return simcore.read(path).circuit


def arranged(stem: str) -> tuple[Arrangement, dict[str, Place]]:
    circuit = circuit_of(simcore.library_folder() / f"{stem}.rect")
    found = arrange(branches_of(circuit), circuit.references)
    return found, {place.branch.name: place for place in found.places}


def test_there_are_designs() -> None:
    assert len(DESIGNS) > 5


Box = tuple[float, float, float, float]


def overlap(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]


def around(wire: tuple[Point, Point]) -> Box:
    (x1, y1), (x2, y2) = wire
    return min(x1, x2) - 0.1, min(y1, y2) - 0.1, max(x1, x2) + 0.1, max(y1, y2) + 0.1


def written(words: Words) -> Box:
    """A name of a node: it starts at its point and stands on it."""
    return words.at[0], words.at[1] - 9.0, words.at[0] + width_of(words.words), words.at[1] + 1.0


@pytest.mark.parametrize("path", DESIGNS, ids=lambda path: path.stem)
def test_nothing_covers_anything(path: Path) -> None:
    """Symbols with their words keep apart; no wire runs through one but its own, nor through a node's name."""
    circuit = circuit_of(path)
    diagram = diagram_of(circuit)
    assert diagram is not None and len(diagram.marks) == len(branches_of(circuit))
    boxes = {mark.name: mark.box for mark in diagram.marks}
    boxes |= {f"name {words.words}": written(words) for words in diagram.names}
    for one, other in combinations(boxes, 2):
        assert not overlap(boxes[one], boxes[other]), (one, other)
    own = 0
    for name, box in boxes.items():
        assert box[0] >= 0.0 and box[1] >= 0.0 and box[2] <= diagram.width and box[3] <= diagram.height
        for wire in diagram.wires:
            if overlap(box, around(wire)):
                # A branch's own wires come from outside its box and end inside, at its symbol.
                inside = [end for end in wire if box[0] < end[0] < box[2] and box[1] < end[1] < box[3]]
                assert not name.startswith("name ") and len(inside) == 1, (name, wire)
                own += 1
    assert own == 2 * len(diagram.marks)


@pytest.mark.parametrize("path", DESIGNS, ids=lambda path: path.stem)
def test_each_wire_leads_where_the_description_says(path: Path) -> None:
    """What the wires of the drawing join, traced by their ends alone, are the circuit's nodes."""
    circuit = circuit_of(path)
    diagram = diagram_of(circuit)
    assert diagram is not None
    symbol_ends = {mark.name: [] for mark in diagram.marks}
    net = networkx.Graph()
    for wire in diagram.wires:
        net.add_edge(*wire)
    for wire in diagram.wires:
        for point in wire:
            for other in diagram.wires:
                (x1, y1), (x2, y2) = other
                # A wire that ends on another is joined to it; one that only crosses it is not.
                if min(x1, x2) <= point[0] <= max(x1, x2) and min(y1, y2) <= point[1] <= max(y1, y2):
                    net.add_edge(point, other[0])
    for mark in diagram.marks:
        left, top, right, bottom = mark.box
        symbol_ends[mark.name] = [
            point
            for wire in diagram.wires
            for point in wire
            if left < point[0] < right and top < point[1] < bottom
        ]
    part_of = {point: at for at, part in enumerate(networkx.connected_components(net)) for point in part}
    drawn = {name: sorted(part_of[point] for point in points) for name, points in symbol_ends.items()}
    known: dict[str, int] = {}
    for branch in branches_of(circuit):
        assert len(drawn[branch.name]) == 2
        mark = next(mark for mark in diagram.marks if mark.name == branch.name)
        ends = [part_of[end] for end in _from_first(diagram, mark)]
        for node, part in zip((branch.a, branch.b), ends, strict=True):
            assert known.setdefault(node, part) == part, (branch.name, node)
    assert len(set(known.values())) == len(circuit.nodes())


def _from_first(diagram: Diagram, mark: Mark) -> list[Point]:
    """The outer ends of a branch's two wires, that of its first node first: they are drawn in this order."""
    left, top, right, bottom = mark.box

    def inside(point: Point) -> bool:
        return left < point[0] < right and top < point[1] < bottom

    own = [wire for wire in diagram.wires if inside(wire[0]) != inside(wire[1])]
    return [wire[0] if inside(wire[1]) else wire[1] for wire in own]


def test_joints_stand_where_three_wires_meet_and_nowhere_else() -> None:
    diagram = diagram_of(circuit_of(simcore.library_folder() / "bench_supply.rect"))
    assert diagram is not None
    # plus: D2 and C1 between its ends; minus likewise; x and ac2: a leg passes through. Corners and crossings have none.
    assert len(diagram.joints) == 6


@pytest.mark.parametrize("path", DESIGNS, ids=lambda path: path.stem)
def test_each_branch_joins_its_own_nodes_only(path: Path) -> None:
    """A node's line reaches every branch of its own; lines of two nodes in a row keep apart."""
    circuit = circuit_of(path)
    arrangement = arrange(branches_of(circuit), circuit.references)
    assert set(arrangement.rows) == set(circuit.nodes())
    reach: dict[str, list[int]] = {}
    for place in arrangement.places:
        assert place.rows == (arrangement.rows[place.branch.a], arrangement.rows[place.branch.b])
        for node in (place.branch.a, place.branch.b):
            reach.setdefault(node, []).append(place.column)
    pairs = [(one, other) for one, other in combinations(reach, 2) if arrangement.rows[one] == arrangement.rows[other]]
    for one, other in pairs:
        assert max(reach[one]) <= min(reach[other]) or max(reach[other]) <= min(reach[one]), (one, other)
    standing: dict[int, list[Place]] = {}
    for place in arrangement.places:
        standing.setdefault(place.column, []).append(place)
    for column in standing.values():
        for one, other in pairwise(sorted(column, key=lambda place: min(place.rows))):
            assert max(one.rows) <= min(other.rows)
            assert {one.branch.a, one.branch.b} & {other.branch.a, other.branch.b}


def test_a_bridge_looks_like_one() -> None:
    """Rails above and below, each leg one column, the winding left, reservoir and load right, the resistor in line."""
    arrangement, place = arranged("bench_supply")
    rows = arrangement.rows
    assert rows["plus"] == 0 and rows["minus"] == max(rows.values()) and rows["ac1"] == rows["x"]
    assert place["D1"].column == place["D3"].column and place["D2"].column == place["D4"].column
    assert place["R_w"].lies and place["R_w"].forward
    order = ["winding", "R_w", "D1", "C1", "R_L"]
    assert [place[name].column for name in order] == sorted(place[name].column for name in order)


def test_a_choke_lies_in_the_rail_and_diodes_conduct_upwards() -> None:
    arrangement, place = arranged("choke_input")
    assert place["choke"].lies and arrangement.rows["raw"] == arrangement.rows["plus"] == 0
    for name in ("six_pulse", "bridge", "multiplier", "centre_tap", "two_tap_bridge", "controlled_charger"):
        arrangement, place = arranged(name)
        valves = [each for each in place.values() if each.branch.kind in ("diode", "thyristor")]
        assert valves and all(each.rows[0] > each.rows[1] for each in valves), name
    arrangement, place = arranged("operating_point")
    assert arrangement.rows["zero"] == max(arrangement.rows.values())
    assert all(place[name].rows[0] < place[name].rows[1] for name in ("supply", "D1", "D2", "D3"))


def test_windings_stand_side_by_side_and_taps_in_a_row() -> None:
    _, place = arranged("two_tap_bridge")
    primary, sections = place["T1.w1"], [place[f"T1.w{count}"] for count in (2, 3, 4)]
    assert [each.column for each in sections] == [primary.column + 1] * 3
    assert [each.rows for each in sections] == [(row, row + 1) for row in range(sections[0].rows[0], sections[0].rows[0] + 3)]
    assert primary.rows[1] == sections[-1].rows[1]


def test_a_ladder_is_drawn_as_one() -> None:
    """The diodes in one column, the capacitors of each side in one of their own, on either side of it."""
    _, place = arranged("multiplier")
    columns = {
        part: {place[f"S[{count}].{part}"].column for count in (2, 3)} for part in ("D_push", "D_hold", "C_push", "C_hold")
    }
    assert all(len(found) == 1 for found in columns.values()) and columns["D_push"] == columns["D_hold"]
    (diodes,), (push,), (hold,) = columns["D_push"], columns["C_push"], columns["C_hold"]
    assert push < diodes < hold


def test_a_battery_that_is_charged_stands_where_loads_do() -> None:
    arrangement, place = arranged("controlled_charger")
    assert place["battery"].column == arrangement.columns - 1 and place["choke"].lies


def test_every_kind_has_a_symbol_that_fits_its_wires() -> None:
    assert set(SYMBOLS) == set(KINDS)
    (letters,) = symbol_of("ballast", "").letters
    assert letters.words == "bal", "what has no symbol of its own is a box with its first letters"
    seen = set()
    for kind in KINDS:
        for form in ("sine", "changing", "steady", "current") if kind in ("source", "three_phase") else ("P",):
            symbol = symbol_of(kind, form)
            points = [point for outline in symbol.outlines for point in outline.points]
            assert max(abs(x) for x, _ in points) <= 15.0 and 0.0 < symbol.reach <= 24.0
            if kind != "three_phase":
                seen.add(repr((symbol.outlines, symbol.letters)))
    # No two kinds look alike, but that an inductor is a winding without the dot of its first end.
    assert len(seen) == len(KINDS) - 1 + 3


def test_loads_stand_right() -> None:
    for name, load in (("multiplier", "R_L"), ("centre_tap", "R_L"), ("six_pulse", "drive"), ("two_tap_bridge", "R_L")):
        arrangement, place = arranged(name)
        assert place[load].column == arrangement.columns - 1, name
        assert next(iter(place.values())).column == 0, name


def test_the_picture_is_the_same_each_time_and_says_what_was_given() -> None:
    circuit = circuit_of(simcore.library_folder() / "bench_supply.rect")
    first, second = diagram_of(circuit), diagram_of(circuit)
    assert first is not None and first == second
    words = [node.text for node in ElementTree.fromstring(diagram_svg(first)).iter("{http://www.w3.org/2000/svg}text")]
    for wanted in ("plus", "R_w", "R_L", "600 mOhm", "silicon_1A", "12 V rms", "4.7 mF"):
        assert wanted in words, wanted


def test_what_could_not_be_read_is_not_drawn() -> None:
    resistors = "\n".join(f"a -> g: resistor R{count}, 1 Ohm" for count in range(MOST_BRANCHES))
    text = f"a -> g: source e, constant = 1 V, series_resistance = 1 Ohm\n{resistors}\nreference g\nstudy s: operating_point\n"
    assert diagram_of(simcore.read_text(text).circuit) is None
    assert diagram_of(simcore.read_text(text.replace("a -> g: resistor R0, 1 Ohm", "")).circuit) is not None
