"""The command as a user runs it: exit statuses, what is printed, which files appear."""

from __future__ import annotations

import csv
import json
import subprocess
import sys
from pathlib import Path

import pytest

import simcore

LIBRARY = simcore.library_folder()
GOOD = """
let R_L = 100 Ohm
a -> g: source e, sine = 10 V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> g: capacitor C1, 1000 uF
p -> g: resistor R1, R_L
reference g
observe u_out = voltage(p)
study s: settled
study start: transient, duration = 20 ms, record_every = 1 ms
require s: mean(u_out) >= 5 V
"""


def bulkrail(*arguments: str, folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "simcore.command", *arguments]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, timeout=120, env=None, check=False)


@pytest.fixture
def good(tmp_path: Path) -> Path:
    (tmp_path / "good.rect").write_text(GOOD)
    return tmp_path


@pytest.fixture(autouse=True)
def from_anywhere(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PYTHONPATH", str(Path(simcore.__file__).parent.parent))


def test_all_requirements_hold(good: Path) -> None:
    done = bulkrail("run", "good.rect", folder=good)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "The requirement holds." in done.stdout and "Caution" in done.stdout and done.stderr == ""
    files = sorted(path.name for path in (good / "results" / "good").iterdir())
    assert files == ["figures.csv", "s.csv", "start.csv", "summary.json", "verdicts.csv"]


def test_traces_are_rfc_4180_with_units_in_the_head(good: Path) -> None:
    bulkrail("run", "good.rect", "--out", "here", folder=good)
    raw = (good / "here" / "start.csv").read_bytes()
    assert raw.startswith(b"time [s],u_out [V]\r\n")
    rows = list(csv.DictReader(raw.decode().splitlines()))
    times = [float(row["time [s]"]) for row in rows]
    assert len(times) == 21 and times[1] == pytest.approx(1e-3)
    with (good / "here" / "verdicts.csv").open(newline="") as file:
        verdict = next(csv.DictReader(file))
    assert verdict["verdict"] == "holds" and verdict["unit"] == "V" and float(verdict["bound"]) > 0.0
    summary = json.loads((good / "here" / "summary.json").read_text())
    assert summary["outcome"]["status"] == 0


def test_a_failed_requirement_is_one(good: Path) -> None:
    (good / "bad.rect").write_text(GOOD.replace(">= 5 V", ">= 50 V"))
    done = bulkrail("run", "bad.rect", folder=good)
    assert done.returncode == 1 and "fails" in done.stdout


def test_wrong_input_is_two_and_writes_nothing(good: Path) -> None:
    (good / "wrong.rect").write_text(GOOD.replace("100 Ohm", "100 Ohms"))
    done = bulkrail("run", "wrong.rect", "good.rect", folder=good)
    assert done.returncode == 2 and "wrong.rect:2:15: Ohms is no unit" in done.stderr and "cure:" in done.stderr
    assert done.stdout == "" and not (good / "results").exists()


def test_no_solution_is_three(good: Path) -> None:
    text = GOOD.replace("frequency = 50 Hz", "frequency = 50 Hz") + "a -> g: resistor R9, 1 Ohm\n"
    text += "b -> g: source e9, sine = 1 V peak, frequency = 70.7106781186547 Hz\nb -> g: resistor R8, 1 Ohm\n"
    (good / "none.rect").write_text(text)
    done = bulkrail("run", "none.rect", folder=good)
    assert done.returncode == 3 and "no common period" in done.stderr and not (good / "results").exists()


def test_a_missing_file_is_a_message(tmp_path: Path) -> None:
    done = bulkrail("run", "nothing.rect", folder=tmp_path)
    assert done.returncode == 2 and "nothing.rect" in done.stderr and "Traceback" not in done.stderr


def test_study_and_set(good: Path) -> None:
    done = bulkrail("run", "good.rect", "--study", "s", "--set", "R_L=10 Ohm", "--out", "o", folder=good)
    assert done.returncode == 0 and not (good / "o" / "start.csv").exists()
    assert json.loads((good / "o" / "summary.json").read_text())["lets"]["R_L"]["value"] == 10.0
    unknown = bulkrail("run", "good.rect", "--set", "R_K=10 Ohm", folder=good)
    assert unknown.returncode == 2 and "Did you mean R_L?" in unknown.stderr


def test_several_files_one_summary(good: Path) -> None:
    (good / "other.rect").write_text(GOOD.replace(">= 5 V", ">= 50 V"))
    done = bulkrail("run", "good.rect", "other.rect", folder=good)
    assert done.returncode == 1 and "Summary" in done.stdout
    assert {path.name for path in (good / "results").iterdir()} == {"good", "other"}


def test_look_shows_the_circuit_and_solves_nothing(good: Path) -> None:
    done = bulkrail("look", "good.rect", folder=good)
    assert done.returncode == 0 and not (good / "results").exists()
    for part in ("Branches", "independent loops", "Studies", "Requirements", "R_L", "D1"):
        assert part in done.stdout


def test_help_loads_nothing_heavy(tmp_path: Path) -> None:
    program = "import sys; from simcore.command import main\ntry: main(['--help'])\nexcept SystemExit: pass\nprint(sorted({'numpy', 'scipy', 'networkx', 'lark'} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", program], cwd=tmp_path, capture_output=True, text=True, check=True)
    assert done.stdout.strip().endswith("[]")


@pytest.mark.parametrize("path", sorted(LIBRARY.glob("*.rect")), ids=lambda path: path.stem)
def test_every_worked_circuit_holds(path: Path, tmp_path: Path) -> None:
    done = bulkrail("run", str(path), folder=tmp_path)
    assert done.returncode == 0, done.stdout + done.stderr
