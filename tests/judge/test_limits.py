"""Limits on harmonic currents: the published tables, a user's own, and verdicts on waves whose harmonics are known."""

import itertools
import math
from pathlib import Path

import numpy as np
import pytest

import simcore
from grammar.description import Call, Name, Part
from simcore.design.circuit import Element, Port, Requirement
from simcore.design.limits import PUBLISHED, LimitTable, read_limits
from simcore.face import Result
from simcore.figures.record import Record
from simcore.judge.harmonics import harmonics
from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict, judge
from tests.figures.fake_solution import FakeSolution, branch, circuit_of, steady, zero

A, D = PUBLISHED["IEC 61000-3-2 class A"], PUBLISHED["IEC 61000-3-2 class D"]

# IEC 61000-3-2 tables 1 and 3, as a published test-laboratory report and a public summary have them.
CLASS_A_ODD = {
    3: 2.3,
    5: 1.14,
    7: 0.77,
    9: 0.4,
    11: 0.33,
    13: 0.21,
    15: 0.15,
    17: 0.132353,
    23: 0.0978261,
    39: 0.0576923,
}
CLASS_A_EVEN = {2: 1.08, 4: 0.43, 6: 0.3, 8: 0.23, 10: 0.184, 20: 0.092, 40: 0.046}
CLASS_D_100_W = {3: 0.34, 5: 0.19, 7: 0.1, 9: 0.05, 11: 0.035, 13: 0.029615, 39: 0.0098718}
CLASS_D_600_W = {3: 2.04, 5: 1.14, 7: 0.6, 9: 0.3, 11: 0.21, 13: 0.17769, 39: 0.057692}
CLASS_D_MEETS_A = {3: 676.47, 5: 600.0, 7: 770.0, 9: 800.0, 11: 942.86, 13: 709.09, 15: 584.42, 39: 584.42}


def test_class_a_is_the_published_table() -> None:
    limits = A.at(1.0)
    assert list(limits) == list(range(2, 41))
    for order, limit in {**CLASS_A_ODD, **CLASS_A_EVEN}.items():
        assert limits[order] == pytest.approx(limit, rel=1e-5), order


@pytest.mark.parametrize(("power", "listed"), [(100.0, CLASS_D_100_W), (600.0, CLASS_D_600_W)])
def test_class_d_is_the_published_table(power: float, listed: dict[int, float]) -> None:
    limits = D.at(power)
    assert list(limits) == list(range(3, 40, 2))
    for order, limit in listed.items():
        assert limits[order] == pytest.approx(limit, rel=3e-5), order


@pytest.mark.parametrize(("order", "power"), list(CLASS_D_MEETS_A.items()))
def test_class_d_never_exceeds_class_a(order: int, power: float) -> None:
    assert D.at(power * 0.999)[order] < A.at(0.0)[order]
    assert D.at(power * 1.001)[order] == A.at(0.0)[order]


@pytest.mark.parametrize(
    ("ampere", "why"),
    [
        ({}, "one limit"),
        ({1: 1.0}, "orders"),
        ({5: 1.0, 3: 1.0}, "orders"),
        ({3: 0.0}, "above zero"),
        ({3: math.nan}, "above zero"),
    ],
)
def test_a_table_that_cannot_be_right_is_not_made(ampere: dict[int, float], why: str) -> None:
    with pytest.raises(ValueError, match=why):
        LimitTable("own", ampere)


def test_a_table_of_ones_own() -> None:
    table = read_limits("own.csv", "what, limit [A] ,order\nthird,0.5,3\n\nsecond,0.25,2\n")
    assert table.at(123.0) == {2: 0.25, 3: 0.5} and table.scope == ""


@pytest.mark.parametrize(
    ("text", "why"),
    [
        ("", "first line"),
        ("order,limit\n3,1\n", "first line"),
        ("order,limit [A]\n3\n", "line 2"),
        ("order,limit [A]\n3,x\n", "line 2"),
        ("order,limit [A]\n3,1\n3,2\n", "line 3.*twice"),
        ("order,limit [A]\n3,nan\n", "above zero"),
        ("order,limit [A]\n", "one limit"),
    ],
)
def test_a_table_with_a_fault_says_where(text: str, why: str) -> None:
    with pytest.raises(ValueError, match=why):
        read_limits("own.csv", text)


def block_wave(current: float, width: float) -> Record:
    """A source of 230 V with a block of line current, `width` of each half period wide, about its middle; 50 Hz."""
    source = Element("mains", "source", (Port("", "a", "0"),), {"frequency": 50.0})
    edges = 0.01 * np.unique(
        [0.0, 0.5 - width / 2.0, 0.5 + width / 2.0, 1.0, 1.5 - width / 2.0, 1.5 + width / 2.0, 2.0]
    )
    times = np.unique(np.concatenate([np.linspace(*ends, 41) for ends in itertools.pairwise(edges)]))
    middle = 0.5 * (times[1:] + times[:-1])
    block = np.abs(middle % 0.01 - 0.005) < 0.005 * width
    levels = np.repeat(np.where(block, np.sign(0.01 - middle), 0.0) * current, 3).reshape(-1, 3)
    voltage = 230.0 * math.sqrt(2.0)
    solution = FakeSolution(
        circuit_of([source]),
        times,
        {"a": lambda t: voltage * np.sin(100.0 * math.pi * t), "0": zero},
        {("mains", ""): lambda t: zero(t)},
        period=0.02,
    )
    solution.current = lambda element, port="": -levels  # type: ignore[method-assign]
    return Record(solution)


def verdict(record: Record, table: LimitTable, element: str = "mains") -> Verdict:
    figure = Call("harmonics", (Name((Part(element),)),))
    requirement = Requirement("run", "within", figure, None, None, "harmonics", limits=table)
    (found,) = judge([requirement], {"run": record}, {"run": record})
    return found


# A square wave has harmonics 2 sqrt(2) I/(pi n), a block of 120 degrees the same without those of order 3k (Fourier): the largest
# I within class A, by evaluation of the table, is 2.499122 A decided at order 15, and 2.885737 A at order 17.
@pytest.mark.parametrize(("width", "largest"), [(1.0, 2.499122), (2.0 / 3.0, 2.885737)])
def test_the_largest_block_of_current_within_class_a(width: float, largest: float) -> None:
    assert verdict(block_wave(largest * 0.9999, width), A).state is State.HOLDS
    above = verdict(block_wave(largest * 1.0001, width), A)
    assert above.state is State.FAILS and "above the limit" in above.reason and "edition" in above.reason


def test_rows_are_the_harmonics_of_the_wave() -> None:
    record = block_wave(1.0, 1.0)
    for row in harmonics("mains", A, record, record):
        expected = 2.0 * math.sqrt(2.0) / (math.pi * row.order) if row.order % 2 else 0.0
        assert row.figure.value == pytest.approx(expected, abs=1e-12)
        assert row.limit.value == A.ampere[row.order]


def test_class_d_takes_the_active_input_power() -> None:
    record = block_wave(1.0, 1.0)
    power = 230.0 * 2.0 * math.sqrt(2.0) / math.pi
    row = next(row for row in harmonics("mains", D, record, record) if row.order == 3)
    assert row.limit.value == pytest.approx(3.4e-3 * power, rel=1e-3)


def test_outside_the_scope_is_said() -> None:
    small, large = verdict(block_wave(0.1, 1.0), D), verdict(block_wave(20.0, 1.0), A)
    assert "made for 75 W to 600 W" in small.reason and "made for up to 16 A" in large.reason


def test_what_cannot_be_held_against_a_table_is_not_judged() -> None:
    resistor = branch("R", "resistor", "a", "0", resistance=1.0)
    times = np.linspace(0.0, 0.02, 9)
    currents = {("R", ""): steady(1.0)}
    with_period, without = (
        Record(FakeSolution(circuit_of([resistor]), times, {"a": steady(1.0), "0": zero}, currents, period=period))
        for period in (0.02, None)
    )
    assert "active input power" in verdict(with_period, D, "R").reason
    assert verdict(with_period, A, "R").state is State.HOLDS
    unfit = verdict(without, A, "R")
    assert unfit.state is State.NOT_JUDGED and "whole period" in unfit.reason


TEXT = """
a -> b: source mains, sine = 325 V peak, frequency = 50 Hz
a -> b: resistor R1, 100 Ohm
reference b
study s: settled
require s: harmonics(mains) within "{table}"
"""


def solved(folder: Path, table: str) -> Result:
    (folder / "d.rect").write_text(TEXT.format(table=table))
    return simcore.read(folder / "d.rect").run("s")


def test_a_table_beside_the_description(tmp_path: Path) -> None:
    (tmp_path / "limits").mkdir()
    (tmp_path / "limits" / "own.csv").write_text("order,limit [A]\n3,0.001\n")
    assert solved(tmp_path, "limits/own.csv").holds
    assert solved(tmp_path, "IEC  61000-3-2 class A").holds


@pytest.mark.parametrize(
    ("table", "why"),
    [
        ("../own.csv", "outside the folder"),
        ("/etc/own.csv", "no relative path"),
        ("nothing.csv", "no such file"),
        ("bad.csv", "first line"),
        ("binary.csv", "no UTF-8"),
        ("large.csv", "larger than 1 MB"),
        ("link.csv", "outside the folder"),
        ("IEC 61000-3-2 class E", "there is no table"),
    ],
)
def test_only_tables_inside_the_folder_are_read(tmp_path: Path, table: str, why: str) -> None:
    inside = tmp_path / "inside"
    inside.mkdir()
    (tmp_path / "own.csv").write_text("order,limit [A]\n3,1\n")
    (inside / "bad.csv").write_text("3,1\n")
    (inside / "binary.csv").write_bytes(b"\xff\xfe\x00")
    (inside / "large.csv").write_bytes(b" " * 1_000_001)
    (inside / "link.csv").symlink_to(tmp_path / "own.csv")
    with pytest.raises(simcore.DescriptionError, match=why):
        solved(inside, table)


def test_a_text_that_is_no_file_has_no_table_beside_it() -> None:
    with pytest.raises(simcore.DescriptionError, match="no file"):
        _ = simcore.read_text(TEXT.format(table="own.csv")).circuit
