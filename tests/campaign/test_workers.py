"""Workers that die, an engine that runs elsewhere, and progress for those who watch."""

from __future__ import annotations

import importlib.util
import os
import signal
import sys
from pathlib import Path

import pytest

import simcore
from simcore.campaign.rows import encode
from simcore.campaign.solver import Solver, Task, packed, solve_block
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import Cluster, Here, Processes, WorkersLost, solved_blocks
from simcore.equations.compiled import available
from simcore.report.progress import _Lines, _Studies, progress, watching


def dies_once(mark: Path, first: int, last: int) -> str:
    """A block whose worker dies the first time."""
    if first == 4 and not mark.exists():
        mark.touch()
        os.kill(os.getpid(), signal.SIGKILL)
    return f"{first} {last}"


def dies(first: int, last: int) -> str:
    os.kill(os.getpid(), signal.SIGKILL)
    return ""


BLOCKS = [(start, start + 2) for start in range(0, 12, 2)]


def test_the_blocks_of_a_dead_worker_are_done_again(tmp_path: Path) -> None:
    mark = tmp_path / "died"
    lines = dict(solved_blocks(lambda *block: (dies_once, (mark, *block)), BLOCKS, Processes(2)))
    assert mark.exists() and lines == {block: f"{block[0]} {block[1]}" for block in BLOCKS}


def test_workers_that_always_die_end_the_sweep() -> None:
    with pytest.raises(WorkersLost, match="3 times"):
        list(solved_blocks(lambda *block: (dies, block), BLOCKS, Processes(2)))


def test_a_parcel_is_solved_wherever_it_comes(spread: Task) -> None:
    parcel = packed(spread, "a key of its own", False)
    assert solve_block(parcel, 2, 4) == Solver(spread).block(2, 4)


def test_compiled_runs_give_the_same_rows(spread: Task) -> None:
    if not available():
        pytest.skip("the extra `fast` is not installed")
    solver = Solver(spread)
    plain = solver.block(0, 12)
    assert 0.1 < solver._kernels.compilation < 60.0
    solver._kernels.compile()
    assert solver.block(0, 12) == plain


def test_what_compiled_arithmetic_raises() -> None:
    """A division by zero and an overflow are seen in both, or a lost pivot would go unseen in one."""
    if not available():
        pytest.skip("the extra `fast` is not installed")
    from numba import njit

    from simcore.equations.compiled import _functions

    exp = _functions()["exp"]
    assert exp(1.0) == 2.718281828459045 and exp(-1e9) == 0.0
    with pytest.raises(OverflowError):
        exp(1000.0)
    with pytest.raises(ZeroDivisionError):
        njit(error_model="python")(lambda x: 1.0 / x)(0.0)


def test_on_a_dask_cluster(spread: Task) -> None:
    if importlib.util.find_spec("distributed") is None:
        pytest.skip("the extra `cluster` is not installed")
    from distributed import LocalCluster

    plain = [encode([row], []) for row in solved_rows(spread, Here())]
    with LocalCluster(n_workers=1, threads_per_worker=1, processes=False, dashboard_address=None) as cluster:
        crew = Cluster(cluster.scheduler_address)
        assert [encode([row], []) for row in solved_rows(spread, crew, block=5)] == plain


def test_a_scheduler_without_its_package_is_a_message(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(simcore.DescriptionError, match=r"(?s)not installed.*cure: .*bulkrail\[cluster\]"):
        Cluster("tcp://nowhere:1")


def test_progress_says_how_long_it_will_take() -> None:
    said: list[str] = []
    clock = iter([0.0, 1.0, 10.0, 20.0])
    lines = _Lines("spread", 1000, said.append, lambda: next(clock))
    lines.tell(500, False)
    lines.tell(100, True)
    lines.tell(100, True)
    assert said == ["spread: 600 of 1000 variants, about 40 s left", "spread: 700 of 1000 variants, about 30 s left"]


def test_a_run_says_which_study_it_is_at() -> None:
    text = "a -> g: source e, constant = 1 V\na -> g: resistor R, 1 Ohm\nreference g\n"
    text += "study rest: operating_point\nstudy long: transient, duration = 2 s"
    said: list[str] = []
    clock = iter([0.0, 1.0, 6.0, 7.0, 12.0])
    studies = _Studies("x.rect", simcore.read_text(text).circuit, ["rest", "long"], said.append, 5.0, lambda: next(clock))
    for study, reached in [("rest", 0.0), ("rest", None), ("long", 0.0), ("long", 1.0), ("long", 0.0)]:
        studies.tell(study, reached)
    assert studies.count == 1
    assert said == [
        "x.rect: 1 of 2 studies solved, now long, solution 1 at 0 s of 2 s",
        "x.rect: 1 of 2 studies solved, now long, solution 2 at 0 s of 2 s",
    ]


def test_no_progress_where_nobody_watches(monkeypatch: pytest.MonkeyPatch) -> None:
    said: list[str] = []
    monkeypatch.setattr(sys.stderr, "isatty", lambda: False, raising=False)
    with progress("spread", 10, said.append) as tell:
        tell(10, True)
    with watching("x.rect", None, ["s"], said.append) as watch:
        assert watch is None
    assert not said
