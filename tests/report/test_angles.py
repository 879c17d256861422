"""An angle in a file is in the unit that stands beside it."""

from __future__ import annotations

import csv
import json
import math
from pathlib import Path

import pytest

import simcore
from simcore.report.baseline import figures_to_keep
from simcore.report.files import write_results

TEXT = """
let turn = 90 deg
a -> g: source e, sine = 10 V peak, frequency = 50 Hz, phase = turn
a -> p: diode D1, saturation_current = 1 pA, ideality_factor = 1
p -> g: resistor R, 1 kOhm
reference g
study s: settled
require s: conduction_angle(D1) <= 180 deg
"""


def test_angles_are_in_degrees(tmp_path: Path) -> None:
    """A diode before a resistor conducts for nearly half a period, less the angle to its threshold."""
    write_results(simcore.read_text(TEXT).prove(), tmp_path, "text")
    with (tmp_path / "figures.csv").open(newline="") as file:
        (row,) = [row for row in csv.DictReader(file) if row["figure"] == "conduction angle"]
    with (tmp_path / "verdicts.csv").open(newline="") as file:
        verdict = next(csv.DictReader(file))
    assert row["unit"] == verdict["unit"] == "deg" and 160.0 < float(row["value"]) < 180.0
    assert verdict["value"] == row["value"] and float(verdict["limit"]) == pytest.approx(180.0)
    assert float(verdict["margin"]) == pytest.approx(180.0 - float(row["value"])) and float(row["bound"]) < 1.0
    kept = figures_to_keep(simcore.read_text(TEXT).prove())["s", "D1", "conduction angle"]
    assert kept.unit == "deg" and kept.value == float(row["value"]) and kept.bound == float(row["bound"])
    lets = json.loads((tmp_path / "summary.json").read_text())["lets"]
    assert lets["turn"]["unit"] == "deg" and math.isclose(lets["turn"]["value"], 90.0)
