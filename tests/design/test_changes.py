"""A circuit under the actions of a study: what is opened, shorted, closed and set, in any order."""

from __future__ import annotations

import pytest
from understood import understood

from grammar.mistakes import DescriptionError
from grammar.quantities import NONE, OHM, VOLT, Quantity
from simcore.design.changes import SHORT, Variants
from simcore.design.circuit import Change, Circuit

TEXT = """let N = 2
let R_x = 10 Ohm
let valve = small
datasheet small: diode { saturation_current = 1 nA, ideality_factor = 2 }
datasheet big: diode { saturation_current = 9 nA, ideality_factor = 2 }
a -> g: source e, constant = 10 V
a -> p: diode D, valve
p -> g: resistor R, R_x
p -> g: switch S, closed_resistance = 1 Ohm, initially = closed, opens_at = 5 ms
(a -> g) : (x -> y) : (y -> z): transformer T, turns = 1 : 2 : 2, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm : 1 Ohm
x -> z: resistor Q, 1 Ohm
y -> z: resistor P, 1 Ohm
(u, v, w) -> g: three_phase grid, sine = 1 V phase rms, frequency = 50 Hz, series_resistance = 1 Ohm
u -> v: resistor O, 1 Ohm
v -> w: resistor M, 1 Ohm
reference g, y
repeat k from 1 to N { p -> g: resistor L[k], 1 Ohm }
study s: settled
"""


def changed(*changes: Change) -> Circuit:
    project, circuit, mistakes = understood(TEXT)
    assert not mistakes, mistakes
    return Variants(project, circuit)(changes)


def ports(circuit: Circuit, name: str) -> list[str]:
    return [port.name for port in circuit.elements[name].ports]


def test_opened_elements_are_gone_and_closed_ones_back() -> None:
    assert "R" not in changed(Change("open", "R")).elements
    assert "R" in changed(Change("open", "R"), Change("close", "R")).elements
    assert "R" not in changed(Change("short", "R"), Change("open", "R")).elements
    assert "T" not in changed(Change("open", "T")).elements


def test_a_short_is_a_small_resistance_across() -> None:
    found = changed(Change("short", "D")).elements["D"]
    assert (
        found.kind == "resistor"
        and found.given == {"resistance": SHORT}
        and (found.ports[0].a, found.ports[0].b) == ("a", "p")
    )
    both = changed(Change("short", "T")).elements
    assert "T" not in both and [both[f"T.w{n}"].ports[0].a for n in (1, 2, 3)] == ["a", "x", "y"]


def test_windings_and_phases() -> None:
    opened = changed(Change("open", "T.w3"))
    assert ports(opened, "T") == ["w1", "w2"] and "T.w3" not in opened.elements
    shorted = changed(Change("short", "T.w3"))
    assert ports(shorted, "T") == ["w1", "w2", "w3"] and shorted.elements["T.w3"].given == {"resistance": SHORT}
    phase = changed(Change("short", "grid.L2"))
    assert ports(phase, "grid") == ["L1", "L3"] and phase.elements["grid.L2"].ports[0].b == "g"
    assert ports(changed(Change("open", "T.w3"), Change("close", "T.w3")), "T") == ["w1", "w2", "w3"]
    assert "T" not in changed(*(Change("open", f"T.w{n}") for n in (1, 2, 3))).elements


def test_a_switch_obeys() -> None:
    opened = changed(Change("open", "S")).elements["S"]
    assert opened.kind == "switch" and opened.given["initially"] == "open" and "opens_at" not in opened.given
    assert changed(Change("close", "S")).elements["S"].given["initially"] == "closed"


def test_lets_are_set_and_the_last_one_holds() -> None:
    once = changed(Change("set", "R_x", Quantity(5.0, OHM)), Change("set", "R_x", Quantity(7.0, OHM)))
    assert once.elements["R"].given["resistance"] == 7.0 and once.lets["R_x"].value == Quantity(7.0, OHM)
    assert changed(Change("set", "valve", "big")).elements["D"].given["saturation_current"] == 9e-9
    more = changed(Change("set", "N", Quantity(4.0, NONE)), Change("open", "L[1]"))
    assert [name for name in more.elements if name.startswith("L")] == ["L[2]", "L[3]", "L[4]"]
    assert list(more.studies) == ["s"]


@pytest.mark.parametrize(
    ("let", "value"),
    [
        ("N", Quantity(2.5, NONE)),
        ("N", Quantity(1e5, NONE)),
        ("R_x", Quantity(-1.0, OHM)),
        ("R_x", Quantity(1.0, VOLT)),
        ("valve", "huge"),
    ],
)
def test_values_that_make_the_design_wrong(let: str, value: Quantity | str) -> None:
    with pytest.raises(DescriptionError):
        changed(Change("set", let, value))


def test_each_variant_is_made_once() -> None:
    project, circuit, _ = understood(TEXT)
    variants = Variants(project, circuit)
    assert variants([]) is circuit
    change = Change("set", "R_x", Quantity(5.0, OHM))
    assert variants([change]) is variants([change])
