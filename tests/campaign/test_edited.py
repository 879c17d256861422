"""Designs edited from Python, and swept side by side."""

from __future__ import annotations

import pytest
from small_design import DESIGN

import simcore
from simcore.campaign.rows import encode
from simcore.campaign.solver import Task
from simcore.campaign.sweeping import fingerprint, solved_rows
from simcore.campaign.workers import Here, Processes

BLOCKS = """
block passive(a, b) { a -> b: resistor R, 50 Ohm }
block filtered(a, b) {
    a -> m: resistor R, 49 Ohm
    m -> b: resistor S, 1 Ohm
    m -> b: capacitor C, 100 uF
}
(p, g): passive tail
"""


def test_an_element_is_added_replaced_and_left_out(design: simcore.Design) -> None:
    snubbed = design.edited("a -> s: resistor R_s, 10 Ohm", "s -> p: capacitor C_s, 1 uF")
    assert set(snubbed.graph.nodes) - set(design.graph.nodes) == {"s"} and "C_s" not in design.circuit.elements
    stiff = snubbed.edited("p -> g: capacitor C1, 2 * C", without=["R_s", "C_s"])
    assert stiff.circuit.elements.keys() == design.circuit.elements.keys()
    assert stiff.circuit.elements["C1"].given["capacitance"] == pytest.approx(2e-3)
    assert list(stiff.circuit.elements) == list(design.circuit.elements), "it stands where the first one stood"
    halves = [float(each.run("work").figure("ripple(u_out)")) for each in (stiff, design)]
    assert halves[0] == pytest.approx(halves[1] / 2.0, rel=0.1)


def test_a_block_is_swapped() -> None:
    design = simcore.read_text(DESIGN + BLOCKS)
    other = design.edited("(p, g): filtered tail")
    assert "tail.C" in other.circuit.elements and "tail.C" not in design.circuit.elements
    assert simcore.read_text(other.text).circuit.elements == other.circuit.elements


def test_a_requirement_is_left_out_by_its_statement(design: simcore.Design) -> None:
    less = design.edited(without=["require start: peak(u_out) <= 12 V"])
    assert len(less.circuit.requirements) == len(design.circuit.requirements) - 1


def test_settings_stay_and_files_beside_are_still_found(tmp_path) -> None:
    (tmp_path / "parts.rect").write_text("datasheet weaker: diode { saturation_current = 2 nA, ideality_factor = 1.8 }\n")
    (tmp_path / "top.rect").write_text('use "parts.rect"\n' + DESIGN)
    design = simcore.read(tmp_path / "top.rect").variant(V="7 V").edited("let valve = weaker")
    assert design.circuit.lets["V"].value.value == 7.0 and design.circuit.lets["valve"].value == "weaker"


@pytest.mark.parametrize(
    ("lines", "without", "words"),
    [
        (["p -> g: resistor R9"], [], "R9"),
        (["p -> : resistor R9, 1 Ohm"], [], "change:1:6"),
        ([], ["C2"], "(?s)there is no C2.*cure: "),
        ([], ["C1", "C1"], "there is no C1"),
        ([], ["D1"], "no element is called D1|D1"),
    ],
)
def test_what_is_wrong_with_a_change_is_said(design: simcore.Design, lines, without, words) -> None:
    with pytest.raises(simcore.DescriptionError, match=words):
        design.edited(*lines, without=without).prove()


def test_designs_side_by_side(design: simcore.Design) -> None:
    """The design as described first; every row is what its own design gives, wherever it is solved."""
    stiff = design.edited("p -> g: capacitor C1, 3 * C")
    bare = design.edited("a -> g: source e, sine = V peak, frequency = 50 Hz")
    results = design.sweep({"R_load": [80.0, 120.0]}, studies=["work"], others={"stiff": stiff, "bare": bare}, workers=2)
    assert results.columns["design"] == ["as described"] * 2 + ["stiff"] * 2 + ["bare"] * 2
    for first, each in ((0, design), (2, stiff), (4, bare)):
        own = each.sweep({"R_load": [80.0, 120.0]}, studies=["work"], workers=1).rows
        assert [row.found for row in own] == [row.found for row in results.rows[first : first + 2]]
    ripple = next(worst for worst in results.worst if worst.claim.figure == "ripple(u_out)")
    assert ripple.row.number in (1, 2, 5, 6)
    lines = results.pasted(results.rows[3])
    assert lines == ["let R_load = 120 Ohm tolerance 95 Ohm .. 105 Ohm normal"] or lines == [
        "let R_load = 120 Ohm tolerance 5 % normal"
    ]


def test_a_sweep_of_the_description_on_two_designs(design: simcore.Design) -> None:
    stiff = design.edited("p -> g: capacitor C1, 3 * C")
    results = design.sweep("spread", others={"stiff": stiff}, workers=1)
    assert [rate.at for rate in results.pass_rates] == ["as described", "stiff"] and len(results) == 24
    values = [results.columns[name] for name in ("V [V]", "C [F]")]
    assert all(column[:12] == column[12:] for column in values), "both take the same draws"


def test_rows_of_designs_are_the_same_on_any_worker(design: simcore.Design) -> None:
    task = design._task("spread", ["work"], [], {"stiff": design.edited("p -> g: capacitor C1, 3 * C")})
    plain = [encode([row], []) for row in solved_rows(task, Here(), block=5)]
    assert [encode([row], []) for row in solved_rows(task, Processes(2), block=3)] == plain
    only = Task(task.opened, task.plan, task.studies)
    assert fingerprint(task) != fingerprint(only)


def test_a_design_that_lacks_what_is_varied_is_refused(design: simcore.Design) -> None:
    fixed = design.edited("p -> g: resistor R1, 100 Ohm", without=["R_load", "study idle: settled, set R_load = 10 kOhm"])
    fixed = fixed.edited(without=["loads"])
    with pytest.raises(simcore.DescriptionError, match="fixed has no let that is called R_load"):
        design.sweep("spread", others={"fixed": fixed}, workers=1)
    with pytest.raises(simcore.DescriptionError, match="fixed has no study that is called idle"):
        design.sweep("corners", studies=["idle"], others={"fixed": fixed}, workers=1)
    with pytest.raises(simcore.DescriptionError, match='another design can\'t be called ""'):
        design.sweep("corners", others={"": fixed}, workers=1)
