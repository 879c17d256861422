"""How far a sweep is, on standard error where that is a terminal: a bar by tqdm where it is installed, else lines.

Knows counts and time, and nothing of what is counted.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager

_LINE_EVERY = 5.0

Tell = Callable[[int, bool], None]


@contextmanager
def progress(name: str, total: int, complain: Callable[[str], None]) -> Iterator[Tell]:
    """A function to be told of each finished block: its count, and whether it was done now."""
    if not sys.stderr.isatty():
        yield _say_nothing
        return
    try:
        from tqdm import tqdm
    except ImportError:
        yield _Lines(name, total, complain).tell
        return
    with tqdm(total=total, desc=name, unit="variant", leave=False) as bar:

        def tell(count: int, now: bool) -> None:
            bar.initial += 0 if now else count
            bar.update(count)

        yield tell


def _say_nothing(count: int, now: bool) -> None:
    """Nobody watches."""


class _Lines:
    """A line every few seconds, with an estimate of the time left."""

    def __init__(
        self, name: str, total: int, complain: Callable[[str], None], clock: Callable[[], float] = time.monotonic
    ):
        self._name, self._total, self._complain, self._clock = name, total, complain, clock
        self._done = self._now = 0
        self._begun = self._told = clock()

    def tell(self, count: int, now: bool) -> None:
        self._done += count
        self._now += count if now else 0
        moment = self._clock()
        if moment - self._told < _LINE_EVERY or not self._now:
            return
        self._told = moment
        left = (moment - self._begun) / self._now * (self._total - self._done)
        self._complain(f"{self._name}: {self._done} of {self._total} variants, about {_time(left)} left")


def _time(seconds: float) -> str:
    if seconds < 60.0:
        return f"{seconds:.0f} s"
    return f"{seconds / 60.0:.0f} min" if seconds < 3600.0 else f"{seconds / 3600.0:.1f} h"
