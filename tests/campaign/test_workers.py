"""Workers that die, an engine that runs elsewhere, and progress for those who watch."""

from __future__ import annotations

import os
import signal
import socket
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import simcore
from simcore.campaign.rows import encode
from simcore.campaign.solver import Solver, Task, packed, solve_block
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import (
    LARGEST_BLOCK,
    SECONDS_A_BLOCK,
    Blocks,
    Cluster,
    Here,
    Processes,
    WorkersLost,
    solved_blocks,
)
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


def six_blocks() -> Blocks:
    return Blocks([], 12, 2, 2)


def test_the_blocks_of_a_dead_worker_are_done_again(tmp_path: Path) -> None:
    mark = tmp_path / "died"
    lines = dict(solved_blocks(lambda *block: (dies_once, (mark, *block)), six_blocks(), Processes(2)))
    assert mark.exists() and lines == {(start, start + 2): f"{start} {start + 2}" for start in range(0, 12, 2)}


def test_workers_that_always_die_end_the_sweep() -> None:
    with pytest.raises(WorkersLost, match="3 times"):
        list(solved_blocks(lambda *block: (dies, block), six_blocks(), Processes(2)))


@pytest.mark.parametrize("seconds", [1e-4, 0.03, 20.0])
def test_blocks_grow_until_they_take_some_seconds(seconds: float) -> None:
    """Each variant once, none that are done; small at first and at the end, and as long as asked in between."""
    now = 0.0
    blocks, sizes, met = Blocks([(3, 5), (7, 8)], 5000, 2, None, lambda: now), [], []
    while blocks:
        block = blocks.take()
        now += seconds * (block[1] - block[0]) / 2
        blocks.finished(block)
        sizes.append(block[1] - block[0])
        met += range(*block)
    assert sorted(met) == [index for index in range(5000) if index not in (3, 4, 7)]
    assert max(sizes) == min(LARGEST_BLOCK, max(1, int(SECONDS_A_BLOCK / seconds + 1e-6)))
    assert sizes[0] == 1 and sizes[-1] == 1


def test_lost_blocks_come_first() -> None:
    blocks = six_blocks()
    taken = [blocks.take() for _ in range(3)]
    blocks.give_back(taken[:0:-1])
    assert [blocks.take() for _ in range(3)] == [(2, 4), (4, 6), (6, 8)]


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


@pytest.fixture(scope="module")
def local_cluster() -> Iterator:
    """A scheduler and two worker processes that know this project and this folder."""
    distributed = pytest.importorskip("distributed", reason="the extra `cluster` is not installed")
    paths = os.pathsep.join([str(Path(simcore.__file__).parent.parent), str(Path(__file__).parent)])
    before = os.environ.get("PYTHONPATH")
    os.environ["PYTHONPATH"] = paths
    try:
        with distributed.LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=":0") as cluster:
            yield cluster
    finally:
        os.environ.pop("PYTHONPATH") if before is None else os.environ.update(PYTHONPATH=before)


@pytest.mark.xdist_group("cluster")
def test_two_processes_under_a_scheduler_give_the_same_rows(spread: Task, local_cluster) -> None:
    plain = [encode([row], []) for row in solved_rows(spread, Here())]
    crew = Cluster(local_cluster.scheduler_address)
    assert crew.count == 2
    assert [encode([row], []) for row in solved_rows(spread, crew, block=2)] == plain


@pytest.mark.xdist_group("cluster")
def test_a_worker_killed_under_a_scheduler_has_its_blocks_done_again(tmp_path: Path, local_cluster) -> None:
    mark, crew = tmp_path / "died", Cluster(local_cluster.scheduler_address)
    lines = dict(solved_blocks(lambda *block: (dies_once, (mark, *block)), six_blocks(), crew))
    assert mark.exists() and lines == {(start, start + 2): f"{start} {start + 2}" for start in range(0, 12, 2)}


@pytest.mark.xdist_group("cluster")
def test_a_worker_of_another_version_is_refused(local_cluster, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("simcore.campaign.workers.__version__", "99")
    with pytest.raises(simcore.DescriptionError, match="(?s)has version .* not 99.*cure: Install this version"):
        Cluster(local_cluster.scheduler_address)


def test_a_scheduler_that_is_not_there_is_a_message() -> None:
    pytest.importorskip("distributed", reason="the extra `cluster` is not installed")
    with socket.socket() as unused:
        unused.bind(("127.0.0.1", 0))
        address = f"tcp://127.0.0.1:{unused.getsockname()[1]}"
        with pytest.raises(simcore.DescriptionError, match="(?s)does not answer.*cure: Check that it runs"):
            Cluster(address, patience=1.0)


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
