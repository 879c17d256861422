"""The operating point: what moves by rounding alone stands still, and what does not rest is named."""

from __future__ import annotations

import re

import numpy as np
import pytest

import simcore
from simcore.equations.run_interface import nearest
from simcore.solve import rest

PART = "saturation_current = 2.5 nA, ideality_factor = 1.75, series_resistance = 0.6 Ohm"
HUNG = f"reference g\na -> g: source e, constant = 12 V\na -> b: resistor R1, 2.2 kOhm\nx -> g: diode D1, {PART}\nb -> x: resistor R2, 1 kOhm\nb -> g: resistor R3, 1 kOhm\nstudy s: operating_point, open R2\n"


def test_operating_point_opens_capacitors_and_shorts_inductors() -> None:
    text = "e -> g: source V, constant = 10 V\ne -> x: inductor L, 1 mH\nx -> a: resistor R1, 3 Ohm\na -> g: resistor R2, 2 Ohm\na -> g: capacitor C, 1 mF\nreference g\nstudy s: operating_point"
    result = simcore.read_text(text).run("s")
    assert float(result.figure("mean(voltage(a))")) == pytest.approx(4.0, rel=1e-9)


def test_an_inductance_at_rest_carries_the_current_of_its_neighbours() -> None:
    """10 V over 3 and 2 ohm; the voltage across 1 mH or 1 H at rest is nothing, so its current follows from no voltage."""
    for inductance in ("1 uH", "1 mH", "1 H"):
        text = f"e -> g: source V, constant = 10 V\ne -> x: inductor L, {inductance}\nx -> a: resistor R1, 3 Ohm\na -> g: resistor R2, 2 Ohm\nreference g\nstudy s: operating_point"
        assert simcore.read_text(text).run("s").figure("mean(current(L))").value == pytest.approx(2.0, rel=1e-9)


def test_operating_point_divides_by_capacitances_where_nothing_else_does() -> None:
    """What no steady state fixes is as reached from rest: charges on a blocked node."""
    text = "e -> g: source V, constant = 9 V\ne -> a: capacitor C1, 1 uF\na -> g: capacitor C2, 2 uF\nreference g\nstudy s: operating_point"
    result = simcore.read_text(text).run("s")
    assert float(result.figure("mean(voltage(a))")) == pytest.approx(3.0, rel=1e-9)


def test_a_diode_that_hangs_from_one_end_rests() -> None:
    """Nothing drives it: its voltage is rounding, never twice the same, beside 12 V."""
    result = simcore.read_text(HUNG).run("s")
    assert abs(float(result.figure("mean(voltage(x))"))) < 1e-12
    assert float(result.figure("mean(voltage(b))")) == pytest.approx(12.0 * 1.0 / 3.2)


FED = "reference g\na -> g: source e, constant = 12 V, series_resistance = 1 Ohm\na -> g: {}\nstudy s: operating_point\n"


@pytest.mark.parametrize(
    ("part", "current", "told"),
    [
        # 12 V - i 1 Ohm = 10 W / i: the smaller root of i^2 - 12 i + 10 = 0.
        ("load X, power = 10 W, cut_in = 8 V, cut_out = 4 V", 6.0 - 26.0**0.5, ["X starts at 0 s"]),
        ("switch X, closed_resistance = 2 Ohm, open_resistance = 1 MOhm, control = voltage(a), closes_above = 5 V, opens_below = 3 V, delay = 1 h", 4.0, ["X is told to close at 0 s"]),
        ("fuse X, resistance = 20 mOhm, melting_i2t = 1 A^2 s, rated_current = 20 A", 12.0 / 1.02, []),
        ("fuse X, resistance = 20 mOhm, melting_i2t = 1 A^2 s, rated_current = 1 A", 0.0, ["X melts at 0 s"]),
        ("fuse X, resistance = 20 mOhm, melting_i2t = 1 A^2 s", 0.0, ["X melts at 0 s"]),
    ],
    ids=["load", "switch", "fuse that holds", "fuse that melts", "fuse that loses no heat"],
)  # fmt: skip
def test_thresholds_are_passed_at_rest_too(part: str, current: float, told: list[str]) -> None:
    result = simcore.read_text(FED.format(part)).run("s")
    assert float(result.figure("mean(current(X))")) == pytest.approx(current, rel=1e-9, abs=1e-7)
    assert result.solved.notes == told


def test_what_switches_itself_off_and_on_has_no_rest() -> None:
    part = "switch X, closed_resistance = 1 mOhm, open_resistance = 1 MOhm, control = voltage(a), closes_above = 5 V, opens_below = 3 V"
    with pytest.raises(simcore.NoSolution, match=r"switch one another on and off .*\(at X\)"):
        simcore.read_text(FED.format(part)).run("s")


def test_what_does_not_come_to_rest_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    """Were no movement allowed at all, a hanging diode would never rest, and the message tells where."""
    monkeypatch.setattr(rest, "_ROUNDING", 0.0)
    monkeypatch.setattr(rest, "_STILL", 0.0)
    with pytest.raises(simcore.NoSolution, match=r"does not converge at 0 s \(near (x|D1)\)"):
        simcore.read_text(HUNG).run("s")


def test_a_voltage_that_moves_by_more_than_rounding_is_seen() -> None:
    system = simcore.read_text(HUNG).run("s").solved.record.solution.stretches[0].system
    still = np.full(len(system.columns), 1.0)
    moved = still.copy()
    moved[0] += 1e-8
    assert not np.any(rest._movement(system, still, still, 12.0) > 0.0)
    assert np.argmax(rest._movement(system, still, moved, 12.0)) == 0
    assert rest._movement(system, still, moved, 12.0)[0] > 0.0


def test_where_none_stands_out_all_are_named() -> None:
    system = simcore.read_text(HUNG).run("s").solved.record.solution.stretches[0].system
    assert re.fullmatch(r"among e, R1, D1, R3", nearest(system, 0))
