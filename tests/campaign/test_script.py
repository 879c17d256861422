"""The worked script designs what it says, and prints what its own figures give."""

from __future__ import annotations

import runpy

import pytest

import simcore

SCRIPT = simcore.library_folder() / "choose_reservoir.py"


def test_the_script_chooses_the_first_that_passes_everywhere(capsys: pytest.CaptureFixture[str]) -> None:
    script = runpy.run_path(str(SCRIPT))
    assert script["main"]((13.0,), (3300e-6, 4700e-6, 6800e-6), 3) == (13.0, 4700e-6)
    said = capsys.readouterr().out
    assert "13 V,  3300 uF: 3 of 4 corners pass" in said and "6800" not in said
    assert "as described: 3 of 3 pass" in said and "with a snubber: 3 of 3 pass" in said
    low = script["supply"]().variant(V_sec="14.3 V", C_res="2640 uF")
    assert not low.run("full_load").holds, "the corner that fails, alone"
