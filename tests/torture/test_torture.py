"""Circuits at the ends of what the language allows are solved, or end with a reason that names a part."""

from __future__ import annotations

import pytest
from ending import ended

import simcore
from circuits import CIRCUITS, ladder
from simcore.solve import engine

UNSOLVED = {
    "two ideal transformers in parallel": "not sound",
    "load of constant power without a capacitor": "CHATTER",
    "femtofarad junction behind a henry": "WORK",
}
"""What has no solution (a supply whose voltage falls below the cut-out of its load as soon as that starts), or none
within the work allowed (a ringing of megahertz for two periods of the mains); every other circuit is solved."""


@pytest.mark.parametrize("name", CIRCUITS)
def test_each_ends(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    assert ended(CIRCUITS[name], monkeypatch) == UNSOLVED.get(name, "solved")


@pytest.mark.parametrize("stages", [1, 4, 7])
def test_ladders_start_cold(stages: int, monkeypatch: pytest.MonkeyPatch) -> None:
    assert ended(ladder(stages, "transient, duration = 100 us"), monkeypatch) == "solved"


@pytest.mark.nightly
@pytest.mark.parametrize("stages", [2, 3, 5, 7, 15, 20, 30, 50, 70, 100])
def test_more_ladders_start_cold(stages: int, monkeypatch: pytest.MonkeyPatch) -> None:
    assert ended(ladder(stages, "transient, duration = 100 us"), monkeypatch, 1e8) == "solved"


def test_a_run_that_records_nothing_is_bounded_too(monkeypatch: pytest.MonkeyPatch) -> None:
    """On the way to a settled state nothing is recorded, so no full record brings the run back to be counted."""
    monkeypatch.setattr(engine, "_WORK_AT_MOST", 5e3)
    monkeypatch.setattr(engine, "_ATTEMPTS", 20)
    monkeypatch.setattr(engine, "_ATTEMPTS_TOGETHER", 1)
    with pytest.raises(simcore.NoSolution, match=r"work bound.*\(near (C1|D1)\)"):
        simcore.read_text(CIRCUITS["ideality factor 1"]).run("t")


def test_all_studies_together_are_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("simcore.pipeline.WORK_OF_ALL", 1e3)
    with pytest.raises(simcore.NoSolution, match="of all studies together"):
        simcore.read_text(CIRCUITS["ideality factor 1"]).run("s")
