"""The circuit as a diagram: nothing covers anything, and it looks as an engineer would draw it."""

from __future__ import annotations

from itertools import combinations
from pathlib import Path
from xml.etree import ElementTree

import pytest

import simcore
from simcore.design.circuit import Circuit
from simcore.report.arranging import MOST_BRANCHES, Arrangement, Place, arrange, branches_of
from simcore.report.diagram import BOX_HEIGHT, BOX_WIDTH, diagram_of, diagram_svg

DESIGNS = sorted(simcore.library_folder().glob("*.rect"))


def circuit_of(path: Path) -> Circuit:
    return simcore.read(path).circuit


def arranged(stem: str) -> tuple[Arrangement, dict[str, Place]]:
    circuit = circuit_of(simcore.library_folder() / f"{stem}.rect")
    found = arrange(branches_of(circuit), circuit.references)
    return found, {place.branch.name: place for place in found.places}


def test_there_are_designs() -> None:
    assert len(DESIGNS) > 5


@pytest.mark.parametrize("path", DESIGNS, ids=lambda path: path.stem)
def test_nothing_covers_anything(path: Path) -> None:
    """Boxes keep apart; no line of a node runs through a box but that of a branch which lies in it."""
    circuit = circuit_of(path)
    diagram = diagram_of(circuit)
    assert diagram is not None and len(diagram.boxes) == len(branches_of(circuit))
    for one, other in combinations(diagram.boxes, 2):
        apart = abs(one.middle[0] - other.middle[0]) >= BOX_WIDTH or abs(one.middle[1] - other.middle[1]) >= BOX_HEIGHT
        assert apart, (one.words, other.words)
    for box in diagram.boxes:
        left, right = box.middle[0] - BOX_WIDTH / 2.0, box.middle[0] + BOX_WIDTH / 2.0
        for stroke in diagram.strokes:
            if stroke.heavy and abs(stroke.start[1] - box.middle[1]) < BOX_HEIGHT / 2.0:
                assert stroke.end[0] <= left or stroke.start[0] >= right, (box.words, stroke)
        assert left >= 0.0 and right <= diagram.width and 0.0 <= box.middle[1] <= diagram.height


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
        for one, other in combinations(column, 2):
            assert max(one.rows) <= min(other.rows) or max(other.rows) <= min(one.rows)
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
    for name in ("six_pulse", "bridge", "multiplier", "centre_tap", "two_tap_bridge"):
        arrangement, place = arranged(name)
        diodes = [each for each in place.values() if each.branch.kind == "diode"]
        assert diodes and all(each.rows[0] > each.rows[1] for each in diodes), name


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
    for wanted in ("plus", "R_w", "resistor", "600 mOhm", "silicon_1A", "12 V rms", "4.7 mF"):
        assert wanted in words, wanted


def test_what_could_not_be_read_is_not_drawn() -> None:
    resistors = "\n".join(f"a -> g: resistor R{count}, 1 Ohm" for count in range(MOST_BRANCHES))
    text = f"a -> g: source e, constant = 1 V, series_resistance = 1 Ohm\n{resistors}\nreference g\nstudy s: operating_point\n"
    assert diagram_of(simcore.read_text(text).circuit) is None
    assert diagram_of(simcore.read_text(text.replace("a -> g: resistor R0, 1 Ohm", "")).circuit) is not None
