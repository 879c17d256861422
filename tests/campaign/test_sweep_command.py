"""`bulkrail sweep` as a user runs it."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest
from small_design import DESIGN

from simcore.command import main


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "small.rect").write_text(DESIGN)
    return tmp_path


def test_a_sweep_is_reported_and_tabled(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["sweep", "small.rect", "--sweep", "corners", "--sweep", "spread", "--workers", "1"]) == 1
    said = capsys.readouterr()
    assert said.err == "" and "half-wave supply" in said.out and "Caution" in said.out
    for part in (
        "corners: every corner of V, C, and the nominal",
        "let V = 11 V",
        "of each requirement",
        "Of 5 variants",
    ):
        assert part in said.out
    assert "Pass rate:" in said.out and "95 % confidence" in said.out and "Clopper, Pearson" in said.out
    assert sorted(path.name for path in (folder / "results" / "small").iterdir()) == ["corners.csv", "spread.csv"]
    with (folder / "results" / "small" / "corners.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    assert [row["variant"] for row in rows] == ["1", "2", "3", "4", "5"] and rows[0]["V [V]"] == "10.0"
    assert {row["ended"] for row in rows} == {"solved"} and "work: ripple(u_out), bound [V]" in rows[0]


def test_all_that_holds_is_zero(folder: Path) -> None:
    (folder / "small.rect").write_text(DESIGN.replace("between 5 V and 9.6 V", ">= 5 V").replace("<= 1.5 V", "<= 3 V"))
    assert main(["sweep", "small.rect", "--sweep", "corners", "--workers", "1"]) == 0


def test_a_variant_without_solution_is_three(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (folder / "small.rect").write_text(DESIGN + "sweep bad: R_load over [100 Ohm, -1 Ohm], studies = [work]\n")
    assert main(["sweep", "small.rect", "--sweep", "bad", "--workers", "1"]) == 3
    said = capsys.readouterr().out
    assert "variant 2 (R_load = -1 Ohm) was not solved: not sound:" in said


@pytest.mark.parametrize(
    ("line", "arguments", "words"),
    [
        ("", ["--sweep", "corner"], "Did you mean corners?"),
        ("", ["--set", "V=1 A"], "V is in V, and what it is set to is in A"),
        ("sweep start: extremes of V", [], "would take the place of start.csv"),
        ("sweep quiet: extremes of V, studies = [idle]", ["--sweep", "quiet"], "nothing is required"),
        ("let x = ", [], "small.rect:"),
    ],
)
def test_what_is_wrong_is_two_and_writes_nothing(
    line: str, arguments: list[str], words: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (folder / "small.rect").write_text(DESIGN + line + "\n")
    assert main(["sweep", "small.rect", "--workers", "1", *arguments]) == 2
    said = capsys.readouterr()
    assert words in said.err and "cure:" in said.err and said.out == "" and not (folder / "results").exists()


def test_a_file_without_sweeps(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (folder / "small.rect").write_text("\n".join(x for x in DESIGN.splitlines() if not x.startswith("sweep")))
    assert main(["sweep", "small.rect"]) == 2
    assert "there is no sweep in it" in capsys.readouterr().err


def test_workers_must_be_a_count(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as ended:
        main(["sweep", "small.rect", "--workers", "0"])
    assert ended.value.code == 2 and "not a number of workers" in capsys.readouterr().err


def test_sensitivities_are_reported_and_tabled(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = "\n".join(x for x in DESIGN.splitlines() if not x.startswith("require") or "ripple" in x)
    (folder / "small.rect").write_text(text)
    assert main(["sweep", "small.rect", "--sensitivity", "--workers", "1", "--out", "o"]) == 0
    assert "work: ripple(u_out)" in capsys.readouterr().out
    with (folder / "o" / "sensitivity.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    assert [row["let"] for row in rows][0] == "V" and {row["let"] for row in rows} == {"V", "C", "R_load"}
    ripple = {row["let"]: float(row["relative sensitivity"]) for row in rows}
    assert ripple["V"] > 1.0 and -1.1 < ripple["C"] < -0.7 and -1.1 < ripple["R_load"] < -0.6
