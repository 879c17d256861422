"""Pictures of sweeps, from the tables that sweeps leave."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from grammar.mistakes import DescriptionError
from simcore.command import main
from simcore.opening import open_design
from simcore.report.sweep_panels import SweepPicture, sweep_picture
from simcore.report.sweep_session import task_of

TEXT = """
let U = 10 V     tolerance 10 %
let R_top = 1 kOhm
a -> g: source e, constant = U
a -> m: resistor R1, R_top
m -> g: resistor R2, 1 kOhm
reference g
observe u = voltage(m)
study s: operating_point
require s: mean(u) between 4 V and 6 V
require s: mean(current(R1)) <= U / 1.5 kOhm as "light"
sweep line: R_top from 500 Ohm to 2 kOhm in 5 log steps
sweep spread: 40 samples of U, seed = 3
sweep corners: extremes of U
sweep some: R_top over [2 kOhm, 1 kOhm, 1.5 kOhm]
"""


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "d.rect").write_text(TEXT)
    return tmp_path


def swept(*names: str) -> None:
    asked = [part for name in names for part in ("--sweep", name)]
    assert main(["sweep", "d.rect", "--out", "o", "--workers", "1", *asked]) in (0, 1)


def picture(name: str) -> SweepPicture | None:
    opened, mistakes = open_design("d.rect", {})
    assert not mistakes
    (sweep,) = [each for each in opened.circuit.sweeps if each.name == name]
    return sweep_picture(sweep, task_of(opened, sweep), Path("o") / f"{name}.csv")


def test_a_line_has_its_figures_limits_and_failures(folder: Path) -> None:
    swept("line")
    found = picture("line")
    assert found is not None and found.over is not None and found.logarithmic
    assert found.over_title == "R_top in kOhm" and found.over == pytest.approx(np.geomspace(0.5, 2.0, 5))
    voltage, current = found.panels
    assert voltage.title == "s: mean(u) in V" and voltage.limits == (4.0, 6.0)
    assert voltage.values == pytest.approx(10.0 / (1.0 + found.over)) and list(voltage.fails) == [
        True,
        False,
        False,
        False,
        True,
    ]
    assert current.title == "s: mean(current(R1)) in mA" and current.limits == pytest.approx((10.0 / 1.5,))


def test_a_list_is_drawn_in_order(folder: Path) -> None:
    swept("some")
    found = picture("some")
    assert found is not None and found.over is not None and not found.logarithmic
    assert list(found.over) == [1.0, 1.5, 2.0] and found.panels[0].values == pytest.approx([5.0, 4.0, 10.0 / 3.0])
    assert not found.panels[0].fails[0] and found.panels[0].fails[2]


def test_a_limit_that_a_let_moves_is_no_line(folder: Path) -> None:
    swept("spread")
    found = picture("spread")
    assert found is not None and found.over is None and len(found.panels[0].values) == 40
    assert found.panels[0].limits == (4.0, 6.0) and found.panels[1].limits == ()


def test_a_table_of_another_sweep_is_not_drawn(folder: Path) -> None:
    with pytest.raises(DescriptionError, match="no table of the sweep"):
        picture("line")
    swept("line", "corners")
    assert picture("corners") is None
    (folder / "d.rect").write_text(TEXT.replace("2 kOhm in 5", "3 kOhm in 5"))
    with pytest.raises(DescriptionError, match="not the table of this sweep"):
        picture("line")
    (folder / "o" / "line.csv").write_text("a,b\n1\n")
    with pytest.raises(DescriptionError, match="can't be read"):
        picture("line")


def test_sweeps_are_drawn_from_their_tables(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    pytest.importorskip("matplotlib", reason="the extra `view` is not installed")
    swept("line", "spread", "corners")
    assert main(["draw", "d.rect", "--out", "o", "--format", "svg", "--sweep", "line", "--sweep", "spread"]) == 0
    assert "Pictures in o: line.svg, spread.svg" in capsys.readouterr().out
    for name, words in (("line", "R_top in kOhm"), ("spread", "variants")):
        assert words in (folder / "o" / f"{name}.svg").read_text()
    assert main(["draw", "d.rect", "--out", "o", "--sweep", "corners"]) == 2
    assert main(["draw", "d.rect", "--out", "o", "--sweep", "lin"]) == 2
    assert main(["draw", "d.rect", "--out", "o", "--sweep", "line", "--study", "s"]) == 2
    assert capsys.readouterr().err.count("cure:") == 3
