"""Studies solved to the accuracy they ask for: each twice, the difference telling how far a figure can be off.

A study is solved at a tolerance and at a tighter one; where the figures that count still differ by more than the accuracy asked
for, the tighter one becomes the looser and a still tighter one is solved. It knows studies, solutions and figures, and no text.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass

from grammar.quantities import Quantity
from simcore.design.changes import Variants
from simcore.design.circuit import Circuit, PlannedStudy, Requirement
from simcore.design.files import Project
from simcore.equations.kernel import KernelCache
from simcore.figures.evaluate import figure_of
from simcore.figures.figure import Figure, bounded
from simcore.figures.overview import signal_rows
from simcore.figures.record import Record
from simcore.solve.course import Course, Reached
from simcore.solve.solution import Solution

START = 1.0
"""First tolerance of a step over the accuracy asked for."""
RATIO = 8.0
"""Tolerance over the next tighter one; with errors that fall at least as its square root, what is left is below the difference."""
ROUNDS = 4
"""Tighter solutions at most, after the first."""
_LOOSEST, _TIGHTEST = 1e-2, 1e-8


@dataclass(frozen=True)
class StudyResult:
    """A study's solution and the one at the looser tolerance before it; reached: whether the accuracy asked for was met."""

    solution: Solution
    coarse: Solution
    reached: bool


@dataclass(frozen=True)
class _Level:
    """One solution of a study and where it left the circuit."""

    solution: Solution
    left: Reached


class _Proof:
    """Solves the studies of one circuit, each after those it starts from."""

    def __init__(self, circuit: Circuit, variant: Callable[[Sequence], Circuit]):
        self.circuit = circuit
        self.variant = variant
        self.kernels = KernelCache()
        self.pairs: dict[str, tuple[_Level, _Level]] = {}
        self.results: dict[str, StudyResult] = {}

    def solve(self, name: str) -> None:
        """Solve a study, and first the one it starts from."""
        if name in self.results:
            return
        study = self.circuit.studies[name]
        if study.after is not None:
            self.solve(study.after)
        tolerance = min(_LOOSEST, START * study.accuracy)
        levels = [self._level(study, tolerance, 0, None)]
        reached = False
        while not reached and len(levels) <= ROUNDS and tolerance > _TIGHTEST:
            tolerance = max(tolerance / RATIO, _TIGHTEST)
            levels.append(self._level(study, tolerance, 1, levels[-1]))
            reached = self._accurate(study, levels[-2].solution, levels[-1].solution)
        self.pairs[name] = (levels[-2], levels[-1])
        self.results[name] = StudyResult(levels[-1].solution, levels[-2].solution, reached)

    def _level(self, study: PlannedStudy, tolerance: float, which: int, earlier: _Level | None) -> _Level:
        """One solution; a settled state is looked for from where the looser solution found it."""
        before = self.pairs[study.after][which].left if study.after is not None else None
        if study.kind == "settled" and earlier is not None:
            before = earlier.left if before is None else before
        return _Level(*Course(study, self.variant, before, tolerance, self.kernels).solve())

    def _accurate(self, study: PlannedStudy, coarse: Solution, fine: Solution) -> bool:
        """Whether every figure that counts is within the accuracy: those required of the study, else those of its signals."""
        records = ({study.name: Record(coarse)}, {study.name: Record(fine)})
        asked = [part for requirement in self.circuit.requirements for part in _figures(requirement, study.name)]
        if asked:
            pairs = [bounded(*(figure_of(part, study.name, record) for record in records)) for part in asked]
            return all(_within(figure, study.accuracy) for figure in pairs)
        rows = signal_rows(records[1][study.name], records[0][study.name])
        return all(_within(figure, study.accuracy) for row in rows for figure in row.figures.values())


def _figures(requirement: Requirement, study: str) -> Iterable:
    """The figure of a requirement on a study, where it is of that study alone."""
    if requirement.study == study and requirement.figure is not None:
        yield requirement.figure


def _within(figure: Figure, accuracy: float) -> bool:
    """A figure near nothing is judged by what it was formed from."""
    if figure.bound is None or not figure.defined:
        return True
    return figure.bound <= accuracy * max(abs(figure.value), figure.scale) + figure.rounding


def solve_studies(
    project: Project, circuit: Circuit, names: Sequence[str], overrides: Mapping[str, Quantity | str] | None = None
) -> dict[str, StudyResult]:
    """The named studies of a circuit, solved to their accuracy; overrides: the lets that were set from outside.

    Raises NoSolution where one cannot be solved, DescriptionError where a value set in it makes the design wrong.
    """
    proof = _Proof(circuit, Variants(project, circuit, overrides))
    for name in names:
        proof.solve(name)
    return {name: proof.results[name] for name in names}
