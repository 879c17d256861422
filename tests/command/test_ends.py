"""How the command ends when something outside it goes wrong: a key, a pipe, a folder, an argument."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

import simcore

GOOD = """
a -> g: source e, sine = 10 V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> g: capacitor C1, 1000 uF
p -> g: resistor R1, 100 Ohm
reference g
observe u_out = voltage(p)
study s: settled
require s: mean(u_out) >= 5 V
"""
STARTED = """
import signal, sys
signal.signal(signal.SIGINT, signal.default_int_handler)
from simcore.solve.course import Course
solve = Course.solve
def announced(course):
    print("solving", flush=True)
    return solve(course)
Course.solve = announced
from simcore.command import main
sys.exit(main(sys.argv[1:]))
"""
ROOT = Path(simcore.__file__).parent.parent


def start(folder: Path, *arguments: str, program: tuple[str, ...] = ("-m", "simcore.command")) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, *program, *arguments],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def ended(process: subprocess.Popen[str]) -> tuple[int, str, str]:
    out, err = process.communicate(timeout=60)
    return process.returncode, out, err


@pytest.fixture
def good(tmp_path: Path) -> Path:
    (tmp_path / "good.rect").write_text(GOOD)
    return tmp_path


def test_an_interrupt_while_it_solves_is_one_line_and_leaves_no_file(good: Path) -> None:
    (good / "long.rect").write_text(GOOD + "study long: transient, duration = 10 min\n")
    process = start(good, "run", "long.rect", "--study", "long", program=("-c", STARTED))
    assert process.stdout is not None and process.stdout.readline() == "solving\n"
    process.send_signal(signal.SIGINT)
    status, out, err = ended(process)
    assert status == 130 and out == "" and err == "interrupted; no file is half written\n"
    assert sorted(path.name for path in good.iterdir()) == ["good.rect", "long.rect"]


def test_an_interrupt_keeps_the_studies_that_were_solved(good: Path) -> None:
    """Of two studies the first is written and judged, and all that is said and written names the other as missing."""
    text = GOOD + "study long: transient, duration = 10 min\nrequire long: mean(u_out) >= 5 V\n"
    (good / "long.rect").write_text(text + "require s: mean(u_out) - mean(u_out) at long <= 1 V\n")
    process = start(good, "run", "long.rect", program=("-c", STARTED.replace('"solving"', "course.study.name")))
    assert process.stdout is not None
    while process.stdout.readline() != "long\n":
        assert process.poll() is None
    process.send_signal(signal.SIGINT)
    status, out, err = ended(process)
    assert status == 130 and err == "interrupted; no file is half written\n"
    assert "Interrupted: long not solved." in out and "All" not in out
    results = good / "results" / "long"
    assert sorted(path.name for path in results.iterdir()) == ["figures.csv", "s.csv", "summary.json", "verdicts.csv"]
    summary = json.loads((results / "summary.json").read_text())
    assert summary["unsolved"] == ["long"] and summary["outcome"]["status"] == 130
    states = {verdict["requirement"]: verdict["verdict"] for verdict in summary["verdicts"]}
    assert sorted(states.values()) == ["holds", "undecided"]


@pytest.mark.parametrize("arguments", [("run", "good.rect"), ("look", "good.rect"), ("--help",), ("--version",)])
def test_a_reader_who_goes_away_changes_nothing(good: Path, arguments: tuple[str, ...]) -> None:
    process = start(good, *arguments)
    assert process.stdout is not None
    process.stdout.close()
    process.stdout = None
    status, _, err = ended(process)
    assert (status, err) == (0, "")
    assert (good / "results" / "good" / "summary.json").exists() == (arguments[0] == "run")


def test_no_reader_of_mistakes_either(good: Path) -> None:
    process = start(good, "run", "none.rect")
    assert process.stderr is not None
    process.stderr.close()
    process.stderr = None
    assert ended(process)[0] == 2


def test_a_pipe_to_a_reader_of_one_line(good: Path) -> None:
    shell = f'"{sys.executable}" -m simcore.command run good.rect | head -n 1; echo "${{PIPESTATUS[0]}}"'
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run(["bash", "-c", shell], cwd=good, env=environment, capture_output=True, text=True, timeout=60)
    assert done.stdout == "good.rect\n0\n" and done.stderr == ""


def test_a_folder_that_is_a_file_is_said_before_anything_is_solved(good: Path) -> None:
    (good / "taken").write_text("mine")
    for out in ("taken", "taken/below"):
        status, said, err = ended(start(good, "run", "good.rect", "--out", out, program=("-c", STARTED)))
        assert status == 2 and said == ""
        assert err == (
            f"{out}: the results can't be written: {'taken' if out == 'taken' else good / 'taken'} is no folder\n"
            "    cure: Name a folder that can be written to with --out.\n"
        )
    assert (good / "taken").read_text() == "mine" and not (good / "results").exists()


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_without_the_right_to_write(good: Path) -> None:
    closed = good / "closed"
    closed.mkdir(mode=0o500)
    status, said, err = ended(start(good, "run", "good.rect", "--out", "closed/new"))
    assert status == 2 and said == "" and "no right to write" in err and "cure:" in err


def test_a_result_that_can_t_take_its_name_is_a_message(good: Path) -> None:
    """The folder looks well, and yet one file can't be put in its place."""
    (good / "out" / "figures.csv").mkdir(parents=True)
    status, said, err = ended(start(good, "run", "good.rect", "--out", "out"))
    assert status == 2 and said == "" and err.startswith("out: the results can't be written: ") and "cure:" in err
    assert not list((good / "out").glob(".*"))


def test_results_are_the_same_bytes_under_any_hash_seed(good: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    written = []
    for seed in ("1", "2"):
        monkeypatch.setenv("PYTHONHASHSEED", seed)
        assert ended(start(good, "run", "good.rect", "--out", "out"))[0] == 0
        written.append({path.name: path.read_bytes() for path in (good / "out").iterdir()})
    assert len(written[0]) == 4 and written[0] == written[1]
