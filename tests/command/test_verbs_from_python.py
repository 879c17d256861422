"""Every verb of the command from Python: the same results, the same files."""

from __future__ import annotations

from pathlib import Path

import pytest

import simcore
from simcore.command import VERBS, main
from simcore.face import Design

TEXT = """
purpose "a divider"
let R_low = 1 kOhm
let R_top = 1 kOhm
a -> g: source cell, constant = 10 V
a -> m: resistor R1, R_top, rated_power = 1 W
m -> g: resistor R2, R_low
reference g
observe u = voltage(m)
study s: operating_point
require s: mean(u) >= 4 V
"""


@pytest.fixture
def design(tmp_path: Path) -> Design:
    (tmp_path / "d.rect").write_text(TEXT)
    return simcore.read(tmp_path / "d.rect")


def test_each_verb_has_its_place(design: Design) -> None:
    known = {"run", "sweep", "look", "size", "draw", "keep", "compare"}
    assert all(callable(getattr(design, name)) for name in known)
    assert {module.__name__.rpartition(".")[2] for module in VERBS} - known == {"baseline", "tidy"}


def test_look_says_what_the_command_says(
    design: Design, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["look", "d.rect"]) == 0
    assert simcore.read("d.rect").look() == capsys.readouterr().out.rstrip("\n")


def test_figures_are_kept_and_compared(design: Design, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "d.kept.csv"
    with pytest.raises(simcore.DescriptionError, match="no figures are kept"):
        design.compare(path)
    design.keep(path)
    assert design.compare(path).same
    moved = design.variant(R_low="1.001 kOhm").compare(path)
    assert not moved.same and {drift.key[1] for drift in moved.drifted} == {"u", "mean(u)"}
    monkeypatch.chdir(tmp_path)
    assert main(["compare", "d.rect"]) == 0, "the command reads the same file"


def test_a_design_is_sized_and_traded(design: Design) -> None:
    (turn,) = design.size("R_low", "s: mean(u) >= 4 V", series="E24").sizing.turns
    assert turn.preferred is not None and turn.preferred.value == 680.0
    traded = design.trade("R_top", "R_low", "s: mean(u) >= 4 V", first="1 kOhm", last="2 kOhm")
    assert [top for top, _ in traded][::12] == pytest.approx([1e3, 2e3])
    assert [found.sizing.turns[0].value for _, found in traded][::12] == pytest.approx([2e3 / 3, 4e3 / 3], rel=2e-4)
    for claim, series in (("s: mean(u)", "E12"), ("s: mean(u) >= 4 V", "E13")):
        with pytest.raises(simcore.DescriptionError):
            design.size("R_low", claim, series=series)


def test_pages_bills_and_pictures(design: Design, tmp_path: Path) -> None:
    design.page(tmp_path / "pages" / "d.html")
    assert "a divider" in (tmp_path / "pages" / "d.html").read_text()
    (line,) = [line for line in design.bill() if (line.name, line.stress) == ("R1", "dissipation")]
    # 5 V over 1 kOhm are 25 mW; with 20 % unused 31.25 mW, in R10 31.5 mW.
    assert line.figure.value == pytest.approx(0.025) and line.suggested == pytest.approx(0.0315)
    pytest.importorskip("matplotlib", reason="the extra `view` is not installed")
    assert design.draw(tmp_path, "svg") == [tmp_path / "d.circuit.svg"] and (tmp_path / "d.circuit.svg").is_file()
