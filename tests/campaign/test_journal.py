"""An interrupted sweep goes on where it stopped and ends with the same bytes; a journal that does not fit is refused."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from small_design import DESIGN

import simcore
from simcore.campaign.face import sweep_task
from simcore.campaign.journal import Journal
from simcore.campaign.rows import encode
from simcore.campaign.solver import Task
from simcore.campaign.sweeping import Keeping, fingerprint, solved_rows
from simcore.campaign.workers import Here
from simcore.command import main

CHECKOUT = str(Path(simcore.__file__).parent.parent)


def rows(task: Task, keeping: Keeping, block: int) -> list[str]:
    return [encode([row], []) for row in solved_rows(task, Here(), keeping, block)]


@pytest.fixture
def journal(tmp_path: Path, spread: Task) -> Journal:
    return Journal(tmp_path / "spread.journal", fingerprint(spread))


@pytest.fixture
def whole(spread: Task, journal: Journal) -> list[str]:
    return rows(spread, Keeping(journal), 3)


@pytest.mark.parametrize("cut", [1, 2.4, 3, 3.99])
def test_resumed_after_any_block_and_in_the_middle_of_one(
    cut: float, spread: Task, journal: Journal, whole: list[str]
) -> None:
    """A last line that was cut short counts as not written; blocks of another size fill the rest."""
    lines = journal.path.read_bytes().splitlines(keepends=True)
    assert len(lines) == 5
    full, part = int(cut), cut - int(cut)
    torn = lines[1 + full][: int(part * len(lines[1 + full]))] if part else b""
    journal.path.write_bytes(b"".join(lines[: 1 + full]) + torn)
    told: list[tuple[int, bool]] = []
    resumed = solved_rows(spread, Here(), Keeping(journal, True), 2, lambda count, now: told.append((count, now)))
    assert [encode([row], []) for row in resumed] == whole
    assert sum(count for count, now in told if not now) == 3 * full
    assert rows(spread, Keeping(journal, True), 5) == whole, "the journal it leaves is whole"


def test_a_block_counts_once_it_is_on_disk(spread: Task, journal: Journal, monkeypatch: pytest.MonkeyPatch) -> None:
    forced: list[int] = []
    fsync = os.fsync
    monkeypatch.setattr(os, "fsync", lambda handle: (forced.append(handle), fsync(handle))[1])
    course = solved_rows(spread, Here(), Keeping(journal), 4)
    next(course)
    assert len(journal.path.read_text().splitlines()) == 2 and len(forced) >= 2
    course.close()
    assert journal.left_by() == 1


@pytest.mark.parametrize("damage", ["a letter", "a line cut short", "zeros", "two lines run together", "no text"])
def test_of_a_damaged_journal_the_sound_blocks_are_kept(
    damage: str, spread: Task, journal: Journal, whole: list[str]
) -> None:
    """What no longer checks is solved again, and nothing else; the rows are those of an undisturbed sweep."""
    good = journal.path.read_bytes()
    head, *blocks = good.splitlines(keepends=True)
    bad = {
        "a letter": good.replace(b"solved", b"sloved", 1),
        "a line cut short": b"".join([head, blocks[0][:40] + b"\n", *blocks[1:]]),
        "zeros": b"".join([head, b"\0" * (len(blocks[0]) - 1) + b"\n", *blocks[1:]]),
        "two lines run together": b"".join([head, blocks[0][:-1], *blocks[1:]]),
        "no text": b"".join([head, b"\xff\xfe" + blocks[0], *blocks[1:]]),
    }[damage]
    journal.path.write_bytes(bad)
    kept = len(blocks) - (2 if damage == "two lines run together" else 1)
    assert (journal.left_by(), journal.damaged()) == (kept, 1)
    told: list[tuple[int, bool]] = []
    resumed = solved_rows(spread, Here(), Keeping(journal, True), 3, lambda count, now: told.append((count, now)))
    assert [encode([row], []) for row in resumed] == whole
    assert sum(not now for _, now in told) == kept and journal.damaged() == 0


def test_a_journal_that_makes_no_sense_is_refused(spread: Task, journal: Journal, whole: list[str]) -> None:
    good = journal.path.read_bytes()
    lines = good.splitlines(keepends=True)
    for bad in (
        b"".join([*lines[:2], *lines[1:]]),
        b"\xff" + good,
        b"",
        b"variant,x\r\n1,2\r\n",
    ):
        assert bad != good
        journal.path.write_bytes(bad)
        with pytest.raises(simcore.DescriptionError, match="(?s)damaged.*cure: Delete the journal"):
            rows(spread, Keeping(journal, True), 3)


def test_a_journal_of_something_else_is_refused(design: simcore.Design, journal: Journal, whole: list[str]) -> None:
    others = (
        sweep_task(design._opened, "corners", (), ()),
        sweep_task(design._opened, "spread", ("start",), ()),
        sweep_task(design.variant(V="9 V")._opened, "spread", (), ()),
        sweep_task(simcore.read_text(DESIGN.replace("1.8 }", "1.7 }"))._opened, "spread", (), ()),
        sweep_task(simcore.read_text(DESIGN.replace("seed = 3", "seed = 4"))._opened, "spread", (), ()),
    )
    for task in others:
        other = Journal(journal.path, fingerprint(task))
        assert other.left_by() == 0
        with pytest.raises(simcore.DescriptionError, match="belongs to another"):
            rows(task, Keeping(other, True), 3)


def test_a_comment_changes_nothing(spread: Task) -> None:
    same = simcore.read_text("# a comment\n" + DESIGN)
    assert fingerprint(sweep_task(same._opened, "spread", (), ())) == fingerprint(spread)


ASKED = ["sweep", "small.rect", "--sweep", "long", "--out", "o"]


def begun(folder: Path, blocks: int) -> subprocess.Popen:
    """A sweep at work that has so many blocks on disk."""
    (folder / "small.rect").write_text(DESIGN + "sweep long: 24 samples of V, C, seed = 5, studies = [work]\n")
    environment = {**os.environ, "PYTHONPATH": CHECKOUT}
    command = [sys.executable, "-m", "simcore.command", *ASKED, "--workers", "2"]
    process = subprocess.Popen(command, cwd=folder, env=environment, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    journal, deadline = folder / "o" / "long.journal", time.monotonic() + 60.0
    while not (journal.exists() and journal.read_bytes().count(b"\n") > blocks):
        assert process.poll() is None and time.monotonic() < deadline, "it never came so far"
        time.sleep(0.02)
    return process


def test_killed_and_resumed_it_ends_with_the_same_bytes(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    process = begun(tmp_path, 2)
    process.kill()
    process.communicate()
    monkeypatch.chdir(tmp_path)
    assert not (tmp_path / "o" / "long.csv").exists()
    assert main(ASKED) == 2 and "cure: Add --resume" in capsys.readouterr().err
    assert main([*ASKED, "--resume", "--workers", "1"]) == 1
    assert [path.name for path in (tmp_path / "o").iterdir()] == ["long.csv"]
    resumed = (tmp_path / "o" / "long.csv").read_bytes()
    assert main([*ASKED, "--workers", "3"]) == 1
    assert (tmp_path / "o" / "long.csv").read_bytes() == resumed and resumed.count(b"\r\n") == 25


def test_a_disk_that_is_full_in_the_middle_of_a_block_costs_that_block_alone(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Files may grow to a limit that the journal meets while a block is written, as a full disk would have it."""
    resource = pytest.importorskip("resource", reason="no limits of this kind here")
    most = 2048
    (tmp_path / "small.rect").write_text(DESIGN + "sweep long: 12 samples of V, C, seed = 5, studies = [work]\n")
    command = [sys.executable, "-m", "simcore.command", *ASKED, "--workers", "1"]
    environment = {**os.environ, "PYTHONPATH": CHECKOUT, "PYTHONDONTWRITEBYTECODE": "1"}

    def limited() -> None:
        resource.setrlimit(resource.RLIMIT_FSIZE, (most, most))

    done = subprocess.run(command, cwd=tmp_path, env=environment, preexec_fn=limited, capture_output=True, timeout=120)
    assert done.returncode == 2 and b"--resume" in done.stderr and b"can't be written" in done.stderr and b"Traceback" not in done.stderr
    journal = tmp_path / "o" / "long.journal"
    assert journal.stat().st_size == most and not journal.read_bytes().endswith(b"\n"), "the last line is torn"
    monkeypatch.chdir(tmp_path)
    assert main([*ASKED, "--resume", "--workers", "1"]) == 1
    resumed = (tmp_path / "o" / "long.csv").read_bytes()
    assert main([*ASKED, "--workers", "1"]) == 1
    assert (tmp_path / "o" / "long.csv").read_bytes() == resumed and resumed.count(b"\r\n") == 13
    capsys.readouterr()


def test_interrupted_from_the_keyboard_it_says_how_to_go_on(tmp_path: Path) -> None:
    process = begun(tmp_path, 1)
    process.send_signal(signal.SIGINT)
    _, errors = process.communicate(timeout=60)
    assert process.returncode == 130 and b"--resume" in errors and b"Traceback" not in errors
    assert (tmp_path / "o" / "long.journal").exists() and not (tmp_path / "o" / "long.csv").exists()
