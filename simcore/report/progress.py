"""How far a sweep or a run is, on standard error where that is a terminal: a bar by tqdm where it is installed, else
lines.

Knows counts and time, and nothing of what is counted.
"""

from __future__ import annotations

import sys
import time
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager

from grammar.quantities import SECOND, show
from simcore.design.circuit import Circuit
from simcore.pipeline import Watch

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


@contextmanager
def watching(
    name: str, circuit: Circuit, studies: Sequence[str], complain: Callable[[str], None]
) -> Iterator[Watch | None]:
    """A function to be told how far the studies of a run are (see pipeline); None where nobody watches."""
    if not sys.stderr.isatty():
        yield None
        return
    try:
        from tqdm import tqdm
    except ImportError:
        yield _Studies(name, circuit, studies, complain).tell
        return
    with tqdm(total=len(studies), desc=name, unit="study", leave=False) as bar:

        lines = _Studies("", circuit, studies, bar.set_postfix_str, every=0.2)

        def tell(study: str, time: float | None) -> None:
            lines.tell(study, time)
            bar.update(lines.count - bar.n)

        yield tell


class _Studies:
    """The study at work and how far it is, every so many seconds."""

    def __init__(
        self,
        name: str,
        circuit: Circuit,
        studies: Sequence[str],
        complain: Callable[[str], None],
        every: float = _LINE_EVERY,
        clock: Callable[[], float] = time.monotonic,
    ):
        self._name, self._circuit, self._studies, self._complain = name, circuit, studies, complain
        self._every, self._clock, self._told = every, clock, clock()
        self._solved: set[str] = set()
        self._solutions: Counter[str] = Counter()

    @property
    def count(self) -> int:
        """How many of the studies are solved."""
        return len(self._solved)

    def tell(self, study: str, reached: float | None) -> None:
        """Told the study at work and the s of it that are solved, 0 as each of its solutions begins; None once all of
        it is."""
        if reached is None:
            self._solved |= {study} & set(self._studies)
            return
        self._solutions[study] += reached == 0.0
        moment = self._clock()
        if moment - self._told < self._every:
            return
        self._told = moment
        duration = self._circuit.studies[study].duration
        of = f" at {show(reached, SECOND, 3)} of {show(duration, SECOND)}" if duration else ""
        before = f"{self._name}: {self.count} of {len(self._studies)} studies solved, now " if self._name else ""
        self._complain(f"{before}{study}, solution {self._solutions[study]}{of}")


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
