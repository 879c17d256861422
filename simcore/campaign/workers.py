"""Blocks of variants on executors: in this process, on processes of this machine, or on an engine that runs elsewhere.

It knows blocks and executors, and nothing of what a block holds.
"""

from __future__ import annotations

import logging
import multiprocessing
import os
import signal
import sys
import threading
import time
import warnings
from collections import Counter, deque
from collections.abc import Callable, Generator, Iterator, Sequence
from concurrent.futures import (
    FIRST_COMPLETED,
    BrokenExecutor,
    CancelledError,
    Executor,
    Future,
    ProcessPoolExecutor,
    wait,
)
from contextlib import contextmanager
from typing import Any, Protocol

from grammar.mistakes import DescriptionError, Mistake
from simcore import __version__

ATTEMPTS = 3
"""Times a block is tried whose workers die, before the sweep gives up."""
SECONDS_A_BLOCK = 5.0
"""How long a worker is at a block, about: what a crash can cost, and how long progress is silent."""
LARGEST_BLOCK = 512
"""Variants of a block at most. A row takes some hundred bytes, so that a block stays below a few hundred kilobytes."""
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
    """On the workers of a scheduler of dask.distributed, by its address; patience: seconds it has to answer."""

    def __init__(self, address: str, patience: float = 10.0):
        try:
            import distributed
        except ImportError as fault:
            what = "a scheduler was named, and the package that speaks with it is not installed"
            cure = 'Install it with `pip install "bulkrail[cluster]"`, or leave --scheduler out.'
            raise DescriptionError([Mistake(what, cure, file="--scheduler")]) from fault
        self._address, self._patience = address, patience
        self.lost: tuple[type[BaseException], ...] = (distributed.KilledWorker, CancelledError)
        with self._client() as client:
            self.count = max(1, sum(client.nthreads().values()))
            self._check(client)

    @contextmanager
    def _client(self) -> Iterator[Any]:
        """A connection. Raises DescriptionError where there is none."""
        import distributed

        with _silent("distributed"):
            try:
                client = distributed.Client(self._address, timeout=self._patience)
            except (OSError, ValueError) as fault:
                what = f"the scheduler does not answer: {fault}"
                cure = "Check that it runs, and its address, such as tcp://host:8786; --resume goes on where it was."
                raise DescriptionError([Mistake(what, cure, file=self._address)]) from fault
            with client:
                yield client

    def _check(self, client: Any) -> None:
        """Every worker has this version of the tool, since another may give other rows."""
        try:
            found = client.run(_version)
        except Exception as fault:  # whatever a worker without the tool, or with a broken one, answers
            what = f"a worker of the scheduler can't run this tool: {fault}"
        else:
            others = sorted(set(found.values()) - {__version__})
            if not others:
                return
            what = f"a worker of the scheduler has version {', '.join(others)} of this tool, not {__version__}"
        cure = "Install this version of it where the workers run, and start them again."
        raise DescriptionError([Mistake(what, cure, file=self._address)])

    @contextmanager
    def hired(self) -> Iterator[Executor]:
        with self._client() as client, client.get_executor(pure=False) as executor:
            yield executor


def _version() -> str:
    """The version of this tool where it is called."""
    return __version__


@contextmanager
def _silent(name: str) -> Iterator[None]:
    """Keeps what a package logs of lost connections to itself: what it means for a sweep is said by the sweep."""
    logger = logging.getLogger(name)
    level = logger.level
    logger.setLevel(logging.CRITICAL + 1)
    try:
        yield
    finally:
        logger.setLevel(level)


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


class Blocks:
    """The variants between those that are done, cut into blocks as workers ask for them.

    done: blocks that are done, in their order; total: variants in all; workers: that share them; size: variants a
    block, None for as many as take SECONDS_A_BLOCK by what was finished so far, the first ones small
    """

    def __init__(
        self,
        done: Sequence[Block],
        total: int,
        workers: int,
        size: int | None = None,
        clock: Callable[[], float] = time.monotonic,
    ):
        ends = [0, *(last for _, last in done)]
        starts = [*(first for first, _ in done), total]
        self._open = deque(span for span in zip(ends, starts, strict=True) if span[0] < span[1])
        self._left = sum(last - first for first, last in self._open)
        self._workers, self._fixed, self._size = workers, size, 1
        self._clock, self._begun, self._finished = clock, clock(), 0
        self._lost: deque[Block] = deque()

    def __bool__(self) -> bool:
        return bool(self._lost or self._open)

    def take(self) -> Block:
        """The next block; those that were lost come first."""
        if self._lost:
            return self._lost.popleft()
        first, last = self._open.popleft()
        stop = min(last, first + (self._fixed or self._best()))
        if stop < last:
            self._open.appendleft((stop, last))
        self._left -= stop - first
        return first, stop

    def give_back(self, lost: Sequence[Block]) -> None:
        """Take back blocks whose worker died."""
        self._lost.extend(sorted(lost))

    def finished(self, block: Block) -> None:
        """Told of each block that is finished, which tells how long variants take."""
        self._finished += block[1] - block[0]

    def _best(self) -> int:
        """Variants of a block that keeps its worker busy long enough, and leaves enough for all at the end."""
        if self._finished:
            each = (self._clock() - self._begun) * self._workers / self._finished
            wanted = int(min(SECONDS_A_BLOCK / max(each, 1e-9), LARGEST_BLOCK))
            self._size = max(1, min(wanted, 2 * self._size, self._left // (2 * self._workers)))
        return self._size


def solved_blocks(
    work: Callable[[int, int], tuple[Callable, tuple]], blocks: Blocks, crew: Crew
) -> Generator[tuple[Block, str], None, None]:
    """Each block with its line, as they are finished; blocks whose worker died are done again.

    work: block -> function and arguments to be called wherever it is solved
    Raises WorkersLost after ATTEMPTS for a block.
    """
    tried = Counter[Block]()
    while blocks:
        with crew.hired() as executor:
            yield from _until_lost(work, blocks, tried, crew, executor)


def _until_lost(
    work: Callable[[int, int], tuple[Callable, tuple]],
    blocks: Blocks,
    tried: Counter[Block],
    crew: Crew,
    executor: Executor,
) -> Generator[tuple[Block, str], None, None]:
    """Work off the blocks that wait; where a worker is lost, those at work wait again and this ends."""
    busy: dict[Future, Block] = {}
    at_work: Block | None = None
    try:
        while blocks or busy:
            while blocks and len(busy) < (2 * crew.count if crew.count > 1 else 1):
                at_work = blocks.take()
                function, arguments = work(*at_work)
                busy[_submitted(executor, function, arguments)] = at_work
                at_work = None
            # A look now and then: a future that an engine cancels, as it does without its scheduler, wakes nobody.
            for future in wait(busy, _LOOK_EVERY, FIRST_COMPLETED).done:
                line = future.result()
                block = busy.pop(future)
                blocks.finished(block)
                yield block, line
    except crew.lost as fault:
        lost = [*busy.values(), *([at_work] if at_work is not None else [])]
        for block in lost:
            tried[block] += 1
            if tried[block] >= ATTEMPTS:
                raise WorkersLost from fault
        blocks.give_back(lost)


def _submitted(executor: Executor, function: Callable, arguments: tuple) -> Future:
    with warnings.catch_warnings():
        # The threads that a fork would leave behind belong to the linear algebra library, and are idle here.
        warnings.filterwarnings("ignore", "This process .* is multi-threaded", DeprecationWarning)
        return executor.submit(function, *arguments)
