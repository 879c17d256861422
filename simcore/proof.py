"""A design proved: its studies solved, its requirements judged, and what every study shows without being asked.

The one way from a design to its result, for the command and for Python alike. It writes nothing and prints nothing.
"""

from __future__ import annotations

import time
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from grammar.description import Binary, Call, Expression, Negative
from grammar.expressions import nearest
from grammar.mistakes import Mistake
from simcore.design.circuit import Circuit, PlannedStudy, Requirement
from simcore.equations.kernel import KernelCache
from simcore.figures.overview import Balance, Row, balance, diode_rows, signal_rows
from simcore.figures.record import Record
from simcore.judge.outcome import Outcome, State, outcome_of
from simcore.judge.ratings import unrated
from simcore.judge.verdict import Verdict, judge
from simcore.opening import Opened
from simcore.pipeline import Stopped, StudyResult, Watch, solve_studies

TAKEN = ("figures", "verdicts", "bill", "size")
"""Names of result files that a study's trace would take the place of."""


@dataclass(frozen=True)
class ProvedStudy:
    """A solved study and its tables, with bounds from a second solution at a looser tolerance; statistics: what all of
    its solutions cost."""

    study: PlannedStudy
    record: Record
    signals: list[Row]
    diodes: list[Row]
    balance: Balance
    kirchhoff: float
    statistics: Mapping[str, float]
    notes: Sequence[str]


@dataclass(frozen=True)
class Proof:
    """What a design came to.

    studies: in the order solved; coarse: all solved studies at the looser tolerance that the bounds come from;
    verdicts: of the requirements on them, in the order written, of `ratings` one a rating; seconds: wall-clock time;
    unsolved: studies that an interrupt left out
    """

    circuit: Circuit
    studies: dict[str, ProvedStudy]
    coarse: Mapping[str, Record]
    verdicts: list[Verdict]
    seconds: float
    unsolved: Sequence[str] = ()

    @property
    def outcome(self) -> Outcome:
        """What the verdicts come to together."""
        if self.unsolved:
            return Outcome.INTERRUPTED
        return outcome_of(verdict.state for verdict in self.verdicts)

    @property
    def unrated(self) -> list[str]:
        """Elements that `ratings` was required of and that have none, though their kind can."""
        return unrated(self.circuit)


def chosen_studies(circuit: Circuit, wanted: Sequence[str], file: str) -> tuple[list[str], list[Mistake]]:
    """The studies to prove, in the order written: those wanted, or all; and what is wrong with the choice."""
    mistakes = [_unknown(name, circuit, file) for name in wanted if name not in circuit.studies]
    if not circuit.studies:
        cure = "Add one, such as `study full_load: settled`; `bulkrail look` shows a circuit without one."
        mistakes.append(Mistake("there is no study, so there is nothing to solve", cure, file=file))
    for name, study in circuit.studies.items():
        if name in TAKEN:
            cure = "Give the study another name."
            mistakes.append(Mistake(f"the trace of {name} would take the place of {name}.csv", cure, study.span, file))
    return [name for name in circuit.studies if not wanted or name in wanted], mistakes


def _unknown(name: str, circuit: Circuit, file: str) -> Mistake:
    near = nearest(name, circuit.studies)
    known = ", ".join(circuit.studies) or "none"
    cure = f"Did you mean {near}?" if near else f"Its studies: {known}."
    return Mistake(f"no study is called {name}", cure, file=file)


@dataclass(frozen=True)
class Judged:
    """Studies solved and requirements judged: the records at the tighter and at the looser tolerance, by study."""

    solved: Mapping[str, StudyResult]
    fine: Mapping[str, Record]
    coarse: Mapping[str, Record]
    verdicts: list[Verdict]


def solve_and_judge(
    opened: Opened,
    names: Sequence[str],
    more: Iterable[Expression] = (),
    kernels: KernelCache | None = None,
    watch: Watch | None = None,
    sure: bool = True,
) -> Judged:
    """Solve the named studies, and those that their requirements and the figures in `more` take figures from, and judge
    the requirements on them; kernels: where runs of earlier circuits are kept; sure: whether what is undecided is
    solved tighter. Raises NoSolution where a study can't be solved."""
    circuit = opened.circuit
    requirements = [requirement for requirement in circuit.requirements if requirement.study in names]
    others = dict.fromkeys(study for each in requirements for study in _taken(each))
    others |= dict.fromkeys(study for part in more for study in _studies_named(part))
    needed = [name for name in circuit.studies if name in names or name in others]

    def doubtful(name: str, coarse: Mapping[str, Record], fine: Mapping[str, Record]) -> bool:
        """Whether a verdict that a study takes part in lies within its bound of the limit, and that matters."""
        if not sure:
            return False
        pairs = [(each, _taken(each)) for each in requirements]
        asked = [each for each, taken in pairs if name in taken and all(part in fine for part in taken)]
        return any(verdict.state is State.UNDECIDED for verdict in judge(asked, coarse, fine))

    solved = solve_studies(opened.project, circuit, needed, opened.overrides, kernels, doubtful, watch)
    return _judged(requirements, solved)


def _judged(requirements: Sequence[Requirement], solved: Mapping[str, StudyResult]) -> Judged:
    fine = {name: result.fine for name, result in solved.items()}
    coarse = {name: result.coarse for name, result in solved.items()}
    return Judged(solved, fine, coarse, judge(requirements, coarse, fine))


class PartProved(KeyboardInterrupt):
    """An interrupt from the keyboard after some of the studies; proof: of those, which says what is missing."""

    def __init__(self, proof: Proof):
        super().__init__()
        self.proof = proof


def prove(opened: Opened, names: Sequence[str], watch: Watch | None = None) -> Proof:
    """Solve the named studies and judge the requirements on them; watch: who wants to know how far it is. Raises
    NoSolution where one can't be solved, PartProved at an interrupt from the keyboard after the first of them."""
    start = time.perf_counter()
    try:
        judged = solve_and_judge(opened, names, watch=watch)
    except Stopped as stop:
        there = [name for name in names if name in stop.solved]
        if not there:
            raise
        requirements = [each for each in opened.circuit.requirements if each.study in there]
        judged = _judged(requirements, stop.solved)
        unsolved = [name for name in names if name not in there]
        raise PartProved(_proof(opened.circuit, there, judged, time.perf_counter() - start, unsolved)) from None
    return _proof(opened.circuit, names, judged, time.perf_counter() - start)


def _proof(
    circuit: Circuit, names: Sequence[str], judged: Judged, seconds: float, unsolved: Sequence[str] = ()
) -> Proof:
    fine, coarse, solved = judged.fine, judged.coarse, judged.solved
    studies = {name: _proved(circuit.studies[name], fine[name], coarse[name], solved[name]) for name in names}
    return Proof(circuit, studies, coarse, judged.verdicts, seconds, unsolved)


def _taken(requirement: Requirement) -> list[str]:
    """The studies that a requirement takes figures from."""
    parts = (requirement.figure, requirement.bound, requirement.upper)
    return [requirement.study, *(study for part in parts for study in _studies_named(part))]


def _studies_named(expression: Expression | None) -> Iterator[str]:
    """The studies whose figures an expression takes with `at`."""
    if isinstance(expression, Call):
        if expression.study is not None:
            yield expression.study
        for argument in expression.arguments:
            yield from _studies_named(argument)
    elif isinstance(expression, Binary):
        yield from _studies_named(expression.left)
        yield from _studies_named(expression.right)
    elif isinstance(expression, Negative):
        yield from _studies_named(expression.operand)


def _proved(study: PlannedStudy, fine: Record, coarse: Record, solved: StudyResult) -> ProvedStudy:
    solution = solved.solution
    return ProvedStudy(
        study,
        fine,
        signal_rows(fine, coarse),
        diode_rows(fine, coarse),
        balance(fine),
        solution.kirchhoff,
        solved.cost,
        solution.notes,
    )
