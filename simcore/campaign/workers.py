"""Blocks of variants on executors: in this process, on processes of this machine, or on an engine that runs elsewhere.

It knows blocks and executors, and nothing of what a block holds.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
import threading
import time
import warnings
from collections import Counter, deque
from collections.abc import Callable, Generator, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, Executor, Future, ProcessPoolExecutor, wait
from contextlib import contextmanager
from typing import Any, Protocol

from grammar.mistakes import DescriptionError, Mistake

ATTEMPTS = 3
"""Times a block is tried whose workers die, before the sweep gives up."""
_LOOK_EVERY = 1.0

Block = tuple[int, int]
"""Indices of variants: the first, and the one after the last."""


class Crew(Protocol):
    """Where blocks are solved. count: blocks at work at a time; lost: what a future raises whose worker has died."""

    count: int
    lost: tuple[type[BaseException], ...]

    def hired(self) -> Any:
        """A context that gives an executor; left by an exception, it ends what is at work."""
        ...


class Here:
    """In this process, one block after another."""

    count = 1
    lost: tuple[type[BaseException], ...] = ()

    @contextmanager
    def hired(self) -> Iterator[Executor]:
        yield _Inline()


class _Inline(Executor):
    def submit(self, function: Callable, /, *arguments: Any, **keywords: Any) -> Future:
        future: Future = Future()
        future.set_result(function(*arguments, **keywords))
        return future


class Processes:
    """On processes of this machine; where the system allows it they are forked, and begin with all this one knows."""

    lost: tuple[type[BaseException], ...] = (BrokenExecutor,)

    def __init__(self, count: int):
        self.count = count

    @contextmanager
    def hired(self) -> Iterator[Executor]:
        context = multiprocessing.get_context("fork" if sys.platform == "linux" else None)
        before = {process.pid for process in multiprocessing.active_children()}
        pool = ProcessPoolExecutor(self.count, context, _begin, (os.getpid(),))
        try:
            yield pool
        except BaseException:
            mine = [process for process in multiprocessing.active_children() if process.pid not in before]
            pool.shutdown(wait=False, cancel_futures=True)
            for process in mine:
                process.terminate()
            raise
        pool.shutdown()


def _begin(parent: int) -> None:
    """A worker leaves the keyboard to its parent, and does not outlive it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_end_with, args=(parent,), daemon=True).start()


def _end_with(parent: int) -> None:
    while os.getppid() == parent:
        time.sleep(_LOOK_EVERY)
    os._exit(1)


class Cluster:
    """On the workers of a scheduler of dask.distributed, by its address."""

    def __init__(self, address: str):
        try:
            import distributed
        except ImportError as fault:
            what = "a scheduler was named, and the package that speaks with it is not installed"
            cure = 'Install it with `pip install "bulkrail[cluster]"`, or leave --scheduler out.'
            raise DescriptionError([Mistake(what, cure, file="--scheduler")]) from fault
        try:
            with distributed.Client(address, timeout="10s") as client:
                self.count = max(1, sum(client.nthreads().values()))
        except (OSError, ValueError) as fault:
            cure = "Check its address, such as tcp://host:8786, and that it runs the same version of this tool."
            raise DescriptionError([Mistake(f"the scheduler does not answer: {fault}", cure, file=address)]) from fault
        self._address = address
        self.lost: tuple[type[BaseException], ...] = (distributed.KilledWorker,)

    @contextmanager
    def hired(self) -> Iterator[Executor]:
        import distributed

        with distributed.Client(self._address) as client, client.get_executor(pure=False) as executor:
            yield executor


def crew_of(workers: int | None, scheduler: str = "") -> Crew:
    """Where blocks are solved: on a scheduler's workers where one is named, else on processes of this machine, by
    default as many as it has cores. Raises DescriptionError where a scheduler can't be reached."""
    if scheduler:
        return Cluster(scheduler)
    if workers is None:
        workers = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
    return Processes(workers) if workers > 1 else Here()


class WorkersLost(Exception):
    """Workers died again and again over the same blocks."""

    def __init__(self) -> None:
        super().__init__(f"workers died {ATTEMPTS} times over the same variants")


def solved_blocks(
    work: Callable[[int, int], tuple[Callable, tuple]], blocks: Sequence[Block], crew: Crew
) -> Generator[tuple[Block, str], None, None]:
    """Each block with its line, as they are finished; blocks whose worker died are done again.

    work: block -> function and arguments to be called wherever it is solved
    Raises WorkersLost after ATTEMPTS for a block.
    """
    waiting, tried = deque(blocks), Counter[Block]()
    while waiting:
        with crew.hired() as executor:
            yield from _until_lost(work, waiting, tried, crew, executor)


def _until_lost(
    work: Callable[[int, int], tuple[Callable, tuple]],
    waiting: deque[Block],
    tried: Counter[Block],
    crew: Crew,
    executor: Executor,
) -> Generator[tuple[Block, str], None, None]:
    """Work off the blocks that wait; where a worker is lost, those at work wait again and this ends."""
    busy: dict[Future, Block] = {}
    try:
        while waiting or busy:
            while waiting and len(busy) < (2 * crew.count if crew.count > 1 else 1):
                function, arguments = work(*waiting[0])
                busy[_submitted(executor, function, arguments)] = waiting[0]
                waiting.popleft()
            for future in wait(busy, return_when=FIRST_COMPLETED).done:
                line = future.result()
                yield busy.pop(future), line
    except crew.lost as fault:
        for block in busy.values():
            tried[block] += 1
            if tried[block] >= ATTEMPTS:
                raise WorkersLost from fault
        waiting.extendleft(sorted(busy.values(), reverse=True))


def _submitted(executor: Executor, function: Callable, arguments: tuple) -> Future:
    with warnings.catch_warnings():
        # The threads that a fork would leave behind belong to the linear algebra library, and are idle here.
        warnings.filterwarnings("ignore", "This process .* is multi-threaded", DeprecationWarning)
        return executor.submit(function, *arguments)
