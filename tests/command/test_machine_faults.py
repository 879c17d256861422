"""What the machine does to the command: it is killed at any instant, the disk is full, two of it share a folder."""

from __future__ import annotations

import errno
import json
import os
import random
import subprocess
import sys
import time
from pathlib import Path

import pytest
from plain_design import GOOD

import simcore
from simcore.command import main

ROOT = Path(simcore.__file__).parent.parent
ASKED = {
    "run": ("run", "good.rect", "--out", "out"),
    "keep": ("keep", "good.rect"),
    "sweep": ("sweep", "good.rect", "--out", "out", "--workers", "1"),
    "tidy": ("tidy", "good.rect"),
}


def start(folder: Path, *arguments: str) -> subprocess.Popen[bytes]:
    return subprocess.Popen(
        [sys.executable, "-m", "simcore.command", *arguments],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )


def contents(folder: Path) -> dict[str, bytes]:
    """The files that bear a name of their own: what was not finished has a hidden one, and a journal is no result."""
    return {
        str(path.relative_to(folder)): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file() and not path.name.startswith(".") and path.suffix != ".journal"
    }


@pytest.fixture
def good(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    (tmp_path / "good.rect").write_text(GOOD)
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize("verb", ["run", "keep", "sweep"])
def test_killed_at_any_instant_it_leaves_whole_files_only(
    verb: str, good: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Every file under its own name is one that an undisturbed run writes, to the last byte; and the next run ends."""
    began = time.monotonic()
    start(good, *ASKED[verb]).communicate(timeout=120)
    took, whole = time.monotonic() - began, contents(good)
    assert len(whole) > 1
    for path in whole:
        (good / path).unlink() if path != "good.rect" else None
    draw = random.Random(verb)
    for _ in range(3):
        process = start(good, *ASKED[verb])
        time.sleep(took * draw.uniform(0.3, 1.0))
        process.kill()
        process.communicate()
        assert contents(good).items() <= whole.items()
    for journal in good.rglob("*.journal"):
        journal.unlink()
    assert main(list(ASKED[verb])) == 0
    assert contents(good) == whole


@pytest.mark.parametrize("verb", ASKED)
@pytest.mark.parametrize("call", ["fsync", "write", "replace"])
def test_a_full_disk_is_a_message_and_loses_nothing(
    verb: str, call: str, good: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    main(list(ASKED[verb]))
    if verb == "tidy":
        (good / "good.rect").write_text(GOOD)
    before = contents(good)
    (good / "good.rect").write_text(GOOD.replace("100 Ohm", "50 Ohm"))
    before["good.rect"] = (good / "good.rect").read_bytes()
    capsys.readouterr()

    def full(*arguments: object, **more: object) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    if call == "write":
        monkeypatch.setattr("simcore.report.writing.open", full, raising=False)
    else:
        monkeypatch.setattr(os, call, full)
    status = main(list(ASKED[verb]))
    monkeypatch.undo()
    said = capsys.readouterr().err
    assert status == 2 and "No space left on device" in said and "cure:" in said and "Traceback" not in said
    assert contents(good) == before and not list(good.rglob(".*"))


@pytest.mark.parametrize("file", [2, 3, 4])
def test_a_disk_that_fills_up_among_the_files_leaves_those_of_one_run(
    file: int, good: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    main(list(ASKED["run"]))
    (good / "good.rect").write_text(GOOD.replace("100 Ohm", "50 Ohm"))
    before, force, forced = contents(good), os.fsync, []

    def full(handle: int) -> None:
        forced.append(handle)
        if len(forced) == file:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        force(handle)

    monkeypatch.setattr(os, "fsync", full)
    assert main(list(ASKED["run"])) == 2 and len(forced) == file
    monkeypatch.undo()
    assert contents(good) == before and not list(good.rglob(".*"))


def test_two_runs_into_one_folder_leave_what_either_writes(good: Path) -> None:
    start(good, *ASKED["run"]).communicate(timeout=120)
    whole = contents(good)
    both = [start(good, *ASKED["run"]) for _ in range(2)]
    for process in both:
        _, errors = process.communicate(timeout=120)
        assert (process.returncode, errors) == (0, b"")
    assert contents(good) == whole and not list(good.rglob(".*"))
    assert json.loads(whole["out/summary.json"])
