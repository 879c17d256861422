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


def test_a_diode_that_hangs_from_one_end_rests() -> None:
    """Nothing drives it: its voltage is rounding, never twice the same, beside 12 V."""
    result = simcore.read_text(HUNG).run("s")
    assert abs(float(result.figure("mean(voltage(x))"))) < 1e-12
    assert float(result.figure("mean(voltage(b))")) == pytest.approx(12.0 * 1.0 / 3.2)


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
