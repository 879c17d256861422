"""A sweep from its task to its rows: blocks cut, solved wherever there are workers, kept in a journal, put in order.

It knows tasks, workers and journals, and neither circuits nor what the rows say.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Generator, Iterator, Sequence
from contextlib import closing
from dataclasses import dataclass

from grammar.mistakes import DescriptionError, Mistake
from simcore import __version__
from simcore.campaign.journal import Journal
from simcore.campaign.rows import Row, decode
from simcore.campaign.solver import Packed, Solver, Task, keep, packed, solve_block
from simcore.campaign.workers import Block, Blocks, Crew, solved_blocks
from simcore.design.files import Unit


@dataclass(frozen=True)
class Keeping:
    """Where finished blocks are kept, and whether to go on from what is there."""

    journal: Journal
    resume: bool = False


def fingerprint(task: Task) -> str:
    """A digest of all that the rows of a task depend on: the designs in full, what is varied, and the version."""
    digest = hashlib.sha256()

    def add(text: str) -> None:
        digest.update(text.encode())
        digest.update(b"\n")

    add(__version__)
    for name, opened in task.designs.items():
        add(name)
        for unit in _units(opened.project.top):
            add(repr(unit.description))
        add(repr(dict(opened.overrides)))
        add(repr(opened.circuit.elements))
    add(repr((task.plan.name, task.studies, task.figures, task.billed)))
    for line in task.plan.lines():
        add(line)
    return digest.hexdigest()


def _units(top: Unit) -> Iterator[Unit]:
    yield top
    for unit in top.uses:
        yield from _units(unit)


def solved_rows(
    task: Task,
    crew: Crew,
    keeping: Keeping | None = None,
    block: int | None = None,
    tell: Callable[[int, bool], None] | None = None,
) -> Iterator[Row]:
    """The rows of a task in the order of its variants, each as soon as it and all before it are there.

    block: variants a block, by default as many as keep a worker busy for some seconds; tell: called with the count of
    variants that a finished block had, and whether it was solved now
    Raises DescriptionError for a journal that does not fit, WorkersLost.
    """
    key, solver = fingerprint(task), Solver(task)
    claims = solver.claims
    waiting: dict[int, list[Row]] = {}
    earlier = _earlier(keeping, task) if keeping is not None else {}
    for span, line in earlier.items():
        waiting[span[0]] = decode(line, claims)
        if tell is not None:
            tell(span[1] - span[0], False)
    left = len(task.plan) - sum(last - first for first, last in earlier)
    parcel = packed(task, key, solver.compiles(left, crew.count))
    keep(key, solver)
    due = 0
    with closing(_solved_now(task, parcel, crew, list(earlier), block)) as lines:
        while True:
            while due in waiting:
                rows = waiting.pop(due)
                due += len(rows)
                yield from rows
            solved = next(lines, None)
            if solved is None:
                return
            span, line = solved
            if keeping is not None:
                keeping.journal.add(span, line)
            if tell is not None:
                tell(span[1] - span[0], True)
            waiting[span[0]] = decode(line, claims)


def _earlier(keeping: Keeping, task: Task) -> dict[Block, str]:
    """What an interrupted run left; a journal is begun where there is none to go on with."""
    if not keeping.resume:
        keeping.journal.begin()
        return {}
    blocks = keeping.journal.resumed()
    end = 0
    for first, last in sorted(blocks):
        if not end <= first < last <= len(task.plan):
            cure = "Delete the journal and run the sweep without --resume."
            what = f"the journal is damaged: its block {first} to {last} can't be"
            raise DescriptionError([Mistake(what, cure, file=str(keeping.journal.path))])
        end = last
    return blocks


def _solved_now(
    task: Task, parcel: Packed, crew: Crew, done: Sequence[Block], size: int | None
) -> Generator[tuple[Block, str], None, None]:
    """The blocks between those that are done already."""
    blocks = Blocks(sorted(done), len(task.plan), crew.count, size)
    return solved_blocks(lambda first, last: (solve_block, (parcel, first, last)), blocks, crew)
