"""One variant after another solved and judged, each alone: nothing of one reaches the next but emitted source.

It runs in this process or in any other that gets the same task.
"""

from __future__ import annotations

import pickle
import threading
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

from grammar.description import Expression
from grammar.mistakes import DescriptionError, Mistake
from grammar.quantities import Quantity
from simcore.campaign.plan import Plan, Variant
from simcore.campaign.rows import SOLVED, Claim, Row, claim_of, encode, found_demand, found_figure, found_of
from simcore.design.changes import Variants
from simcore.design.circuit import Change, Circuit
from simcore.design.depends import asked_names, structure
from simcore.design.elaborate import elaborate
from simcore.design.soundness import contradictions
from simcore.equations.compiled import available
from simcore.equations.kernel import KernelCache
from simcore.figures.evaluate import figures_with_bounds
from simcore.judge.bill import demands
from simcore.judge.verdict import spread
from simcore.opening import Opened
from simcore.proof import Judged, solve_and_judge
from simcore.solve.failure import NoSolution

COUNT_WORTH_TIMING = 20
"""Variants a worker from which timing the first one is worth its while."""
PAYS = 2.0
"""Time of plain runs ahead, over that of compiling them, from which they are compiled. A bridge supply's variant took
86 ms plain and 11 ms compiled, so that compiling breaks even at 1.15; what more is asked covers a poor estimate."""


@dataclass(frozen=True)
class Task:
    """All that solving the variants of a sweep takes.

    studies: those whose requirements are judged; figures: asked for besides, of the first study unless they say `at`;
    billed: whether what each element has to stand is found besides; others: designs that an axis of the plan names,
    each with all that the plan varies
    """

    opened: Opened
    plan: Plan
    studies: tuple[str, ...]
    figures: tuple[Expression, ...] = ()
    billed: bool = False
    others: Mapping[str, Opened] = field(default_factory=dict)

    @property
    def designs(self) -> Mapping[str, Opened]:
        """All designs by the name that variants know them by."""
        return {"": self.opened, **self.others}

    @property
    def claims(self) -> list[Claim]:
        """The requirements of the designs; a variant with other counts of parts may have more or fewer."""
        circuits = [opened.circuit for opened in self.designs.values()]
        required = [each for circuit in circuits for each in spread(circuit, circuit.requirements)]
        return list(dict.fromkeys(claim_of(each) for each in required if each.study in self.studies))


class Solver:
    """Solves variants of a task. What it keeps between them has no influence on any."""

    def __init__(self, task: Task):
        self.task = task
        self.claims = task.claims
        self._kernels = KernelCache()
        self._elaborators = {name: Elaborator(opened) for name, opened in task.designs.items()}

    def block(self, start: int, stop: int) -> str:
        """The rows of the variants from an index, counted from 0, to another, as one line."""
        return encode([self.row(index) for index in range(start, stop)], self.claims)

    def row(self, index: int) -> Row:
        """What the variant of an index, counted from 0, comes to."""
        variant = self.task.plan.variant(index)
        try:
            judged = self.judged(variant)
        except DescriptionError as error:
            return Row(variant.number, _in_a_line(error.mistakes))
        except NoSolution as failure:
            return Row(variant.number, str(failure))
        found = [found_of(verdict) for verdict in judged.verdicts]
        asked = [(self.task.studies[0], expression) for expression in self.task.figures]
        for (_, expression), figure in zip(asked, figures_with_bounds(asked, judged.coarse, judged.fine), strict=True):
            found.append(found_figure(expression, figure))
        if self.task.billed:
            circuit = next(iter(judged.fine.values())).circuit
            found += map(found_demand, demands(circuit, judged.coarse, judged.fine))
        return Row(variant.number, SOLVED, tuple(found))

    def compiles(self, left: int, workers: int) -> bool:
        """Compile the emitted runs, where numba is there and it pays for the variants that are left: the first one,
        solved once to emit and once to time, tells how long plain runs would take. The rows are the same either way."""
        count = min(self.task.plan.alike, left) // workers
        if count < COUNT_WORTH_TIMING or not available():
            return False
        for _ in range(2):
            start = time.process_time()
            self.row(0)
            if (time.process_time() - start) * count < PAYS * self._kernels.compilation:
                return False
        self._kernels.compile()
        return True

    def compile(self) -> None:
        """Compile the emitted runs that the first variant needs."""
        self.row(0)
        self._kernels.compile()

    def judged(self, variant: Variant) -> Judged:
        """A variant's studies solved and its requirements judged. Raises DescriptionError, NoSolution."""
        opened = self._elaborators[variant.design].varied(variant)
        return solve_and_judge(opened, self.task.studies, self.task.figures, self._kernels.afresh())


class Elaborator:
    """Variants of a design as circuits. What a variant's values can't change is taken over from the design itself."""

    def __init__(self, opened: Opened):
        self._opened = opened
        self._asked = asked_names(opened.project)
        self._structure = structure(opened.circuit)

    def varied(self, variant: Variant) -> Opened:
        """The design as a variant has it. Raises DescriptionError where that is wrong or unsound."""
        project, overrides = self._opened.project, {**self._opened.overrides, **variant.values}
        circuit = self._with_values(variant, overrides)
        if variant.faults:
            mistakes = contradictions(Variants(project, circuit, overrides)(variant.faults))
            if mistakes:
                raise DescriptionError(mistakes)
            circuit = _faulted(circuit, variant.faults)
        return Opened(project, circuit, overrides)

    def _with_values(self, variant: Variant, overrides: Mapping[str, Quantity | Expression | str]) -> Circuit:
        base = self._opened.circuit
        if not any(_word(let) in self._asked for let in variant.values):
            circuit, mistakes = elaborate(self._opened.project, overrides, again=True)
            if not mistakes and structure(circuit) == self._structure:
                return replace(circuit, studies=base.studies, requirements=base.requirements, sweeps=base.sweeps)
        circuit, mistakes = elaborate(self._opened.project, overrides)
        if mistakes:
            raise DescriptionError(mistakes)
        return circuit


def _word(let: str) -> str:
    """The last word of a let's full name, without its indices."""
    return let.rpartition(".")[2].partition("[")[0]


def _faulted(circuit: Circuit, faults: tuple[Change, ...]) -> Circuit:
    """The circuit whose studies begin with the faults; one that comes after another has them from there."""
    studies = {
        name: study if study.after is not None else replace(study, changes=(*faults, *study.changes))
        for name, study in circuit.studies.items()
    }
    return replace(circuit, studies=studies)


def _in_a_line(mistakes: Sequence[Mistake]) -> str:
    """Why a variant is no sound design."""
    return "not sound: " + "; ".join(dict.fromkeys(mistake.what for mistake in mistakes))


# --- in other processes --------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Packed:
    """A task on its way to other processes; key: what it is known by there; compiled: whether compiling pays."""

    key: str
    content: bytes
    compiled: bool


def packed(task: Task, key: str, compiled: bool) -> Packed:
    """A task that can be sent."""
    return Packed(key, pickle.dumps(task), compiled)


_KEPT: dict[str, Solver] = {}
"""The solver of the last task that this process had a block of: what it emitted serves the next block."""
_ONE_AT_A_TIME = threading.Lock()
"""A process solves one variant at a time, however many threads an engine gives it."""


def keep(key: str, solver: Solver) -> Solver:
    """Have a solver serve the blocks of a task in this process and in those forked from it."""
    _KEPT.clear()
    _KEPT[key] = solver
    return solver


def solve_block(parcel: Packed, start: int, stop: int) -> str:
    """A block of a task's variants as one line, in whichever process this runs."""
    with _ONE_AT_A_TIME:
        solver = _KEPT.get(parcel.key)
        if solver is None:
            solver = keep(parcel.key, Solver(pickle.loads(parcel.content)))
            if parcel.compiled:
                solver.compile()
        return solver.block(start, stop)
