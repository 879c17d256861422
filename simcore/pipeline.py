"""Studies solved to the accuracy they ask for: each twice, the difference telling how far a figure can be off.

A study is solved at a tolerance and at a tighter one; where the figures that count still differ by more than the
accuracy asked for, the tighter one becomes the looser and a still tighter one is solved. It knows studies, solutions
and figures, and no text.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property, partial

import numpy as np

from grammar.description import Call, Expression
from grammar.quantities import AMPERE, ANGLE, JOULE, VOLT, WATT, Dimension, Quantity, show
from simcore.design.changes import Variants
from simcore.design.circuit import Circuit, Element, PlannedStudy, Requirement
from simcore.design.files import Project
from simcore.design.study_kinds import Nature
from simcore.equations.kernel import KernelCache
from simcore.figures.catalogue import TABLED
from simcore.figures.evaluate import figure_of
from simcore.figures.figure import Figure, bounded
from simcore.figures.overview import signal_rows
from simcore.figures.record import Record
from simcore.figures.stresses import Stress, rated_elements, rated_stresses
from simcore.solve.course import Reached
from simcore.solve.failure import NoSolution, Reason
from simcore.solve.heating import solve_warm
from simcore.solve.solution import Solution
from simcore.solve.worst import worst_angle

START = 0.5
"""First tolerance of a step over the accuracy asked for."""
RATIO = 8.0
"""Tolerance over the next tighter one, at least; with errors that fall as its square root or faster, what is left after
the tighter one is less than the difference of both."""
LARGEST_RATIO = 64.0
ROUNDS = 5
"""Tighter solutions at most, after the first."""
NOTHING = 1e-3
"""A figure below this share of what it was formed from counts as near nothing, and is judged by that share."""
ABSENT = 1e-6
"""Share of the circuit's largest voltage, current or power below which one of them counts as none."""
WORK = 1e7
"""Solves times recorded columns of a solution after which none tighter is tried."""
WORK_OF_ALL = 2e9
"""Work of all solutions of a design's studies (see Solution), after which no further one is begun."""
LARGEST_SUM = 1e-3
"""Sum of the currents at a node, over the largest one there, above which a solution is none."""
Watch = Callable[[str, float | None], None]
"""Told the study that is being solved and how much of it in s, None once it is solved."""
_LOOSEST, _TIGHTEST = 5e-4, 1e-8
"""Tolerances of a step. Of 123 settled figures worked out outside, the difference of two solutions at 5e-4 and an
eighth of it covers the true error of 97 %; at 8e-3 and 1e-3 only of 80 %, since there errors do not yet fall as they
should."""


@dataclass(frozen=True)
class StudyResult:
    """A study's solution with its record, and the record of the one at the looser tolerance before it; reached: whether
    the accuracy asked for was met; cost: what all its solutions cost together, by what is counted."""

    solution: Solution
    fine: Record
    coarse: Record
    reached: bool
    cost: Mapping[str, float]


@dataclass(frozen=True)
class _Level:
    """One solution of a study, its record, and where it left the circuit."""

    solution: Solution
    left: Reached

    @cached_property
    def record(self) -> Record:
        """Its signals and figures, each formed once."""
        return Record(self.solution)

    @property
    def heavy(self) -> bool:
        """Whether it took so much work that a tighter one would take too long."""
        return self.solution.statistics["solves"] * len(self.solution.stretches[0].system.columns) > WORK


Doubtful = Callable[[str, Mapping[str, Record], Mapping[str, Record]], bool]
class Stopped(KeyboardInterrupt):
    """An interrupt from the keyboard; solved: the studies that were solved before."""

    def __init__(self, solved: dict[str, StudyResult]):
        super().__init__()
        self.solved = solved


class _Proof:
    """Solves the studies of one circuit, each after those it starts from."""

    def __init__(
        self,
        circuit: Circuit,
        variant: Callable[[Sequence], Circuit],
        kernels: KernelCache,
        doubtful: Doubtful,
        watch: Watch | None = None,
    ):
        self.watch = watch
        self.circuit = circuit
        self.variant = variant
        self.kernels = kernels
        self.doubtful = doubtful
        self.pairs: dict[str, tuple[_Level, _Level]] = {}
        self.results: dict[str, StudyResult] = {}
        self.costs: dict[str, Counter[str]] = {}
        self.work = 0

    def solve(self, name: str) -> None:
        """Solve a study, and first the one it starts from."""
        if name in self.results:
            return
        study = self.circuit.studies[name]
        if study.after is not None:
            self.solve(study.after)
        tolerance = min(_LOOSEST, START * study.accuracy)
        note = None
        if study.worst is not None:
            study = self._at_worst(study, study.worst, tolerance)
            note = f"worst phase: {show(study.angle or 0.0, ANGLE)} of the first sine"
        levels = [self._level(study, tolerance, 0, None)]
        excess, going = RATIO, True
        while going and len(levels) <= ROUNDS and tolerance > _TIGHTEST and not (levels[1:] and levels[-1].heavy):
            tolerance = max(tolerance / min(max(RATIO, 2.0 * excess), LARGEST_RATIO), _TIGHTEST)
            levels.append(self._level(study, tolerance, 1, levels[-1]))
            excess = self._excess(study, levels[-2], levels[-1])
            going = excess > 1.0 or self._in_doubt(name, levels[-2], levels[-1])
        if note is not None:
            levels[-1].solution.notes.append(note)
        self.pairs[name] = (levels[-2], levels[-1])
        if excess > 1.0:
            short = f"a bound is {excess:.2g} times what the accuracy of {100.0 * study.accuracy:g} % allows"
            levels[-1].solution.notes.append(f"{short}; no tighter solution was worth its work")
        last = levels[-1]
        if self.watch is not None:
            self.watch(name, None)
        self.results[name] = StudyResult(last.solution, last.record, levels[-2].record, excess <= 1.0, self.costs[name])

    def _in_doubt(self, name: str, coarse: _Level, fine: _Level) -> bool:
        """Whether the studies solved so far leave a question open that this one may close."""
        records = [{key: getattr(each, which) for key, each in self.results.items()} for which in ("coarse", "fine")]
        return self.doubtful(name, records[0] | {name: coarse.record}, records[1] | {name: fine.record})

    def _at_worst(self, study: PlannedStudy, figure: Expression, tolerance: float) -> PlannedStudy:
        """The study at the phase that makes a figure highest."""

        def at(angle: float) -> float:
            level = self._level(replace(study, angle=angle, worst=None), tolerance, 0, None)
            value = figure_of(figure, study.name, {study.name: level.record}).value
            return value if not math.isnan(value) else -math.inf

        return replace(study, angle=worst_angle(at), worst=None)

    def _level(self, study: PlannedStudy, tolerance: float, which: int, earlier: _Level | None) -> _Level:
        """One solution, held to Kirchhoff's current law; a settled state is looked for from where the looser solution
        found it."""
        before = self.pairs[study.after][which].left if study.after is not None else None
        if study.nature is Nature.PERIOD and earlier is not None:
            before = replace(earlier.left, changes=before.changes if before is not None else ())
        if self.work > WORK_OF_ALL:
            raise NoSolution(study.name, Reason.WORK, detail="of all studies together")
        if self.watch is not None:
            self.watch(study.name, 0.0)
        watch = None if self.watch is None else partial(self.watch, study.name)
        solution, left = solve_warm(study, self.variant, before, tolerance, self.kernels, watch)
        self.work += solution.work
        if not solution.kirchhoff <= LARGEST_SUM:
            share, node = solution.kirchhoff, solution.worst_node[1]
            detail = f"at {node} they leave {share:.1e} of the largest one, allowed are {LARGEST_SUM:g}"
            raise NoSolution(study.name, Reason.KIRCHHOFF, detail=detail)
        cost = self.costs.setdefault(study.name, Counter({"solutions": 0}))
        cost.update({"solutions": 1, **solution.statistics})
        return _Level(solution, left)

    def _excess(self, study: PlannedStudy, coarse: _Level, fine: _Level) -> float:
        """The worst bound over what the accuracy allows, of the figures required of the study, else of what is
        observed; with neither, nothing asks for accuracy. Where it is not above 1 it may be less than this says."""
        records = ({study.name: coarse.record}, {study.name: fine.record})
        mine = [requirement for requirement in self.circuit.requirements if requirement.study == study.name]
        figures = [
            (bounded(*(figure(study.name, record) for record in records)), _limit(requirement, records[1]))
            for requirement in mine
            for figure in _asked(requirement, self.circuit)
        ]
        if not figures and self.circuit.observes:
            rows = signal_rows(fine.record, coarse.record)
            figures = [(figure, 0.0) for row in rows for figure in row.figures.values()]
        floors = _Floors(fine.solution)
        return max((_share(figure, study.accuracy, floors, limit) for figure, limit in figures), default=0.0)


_Asked = Callable[[str, Mapping[str, Record]], Figure]


def _asked(requirement: Requirement, circuit: Circuit) -> list[_Asked]:
    """What a requirement asks to be accurate, each a function of the study and the records."""
    if requirement.relation == "ratings":
        elements = rated_elements(circuit, requirement)
        return [_stress(element, stress) for element in elements for stress, _, _ in rated_stresses(element)]
    figure = requirement.figure
    if isinstance(figure, Call) and figure.name in TABLED:
        figure = Call("rms", (Call(TABLED[figure.name], figure.arguments),))
    return [] if figure is None else [lambda study, records: figure_of(figure, study, records)]


def _limit(requirement: Requirement, records: Mapping[str, Record]) -> float:
    """The largest magnitude that a requirement allows, as far as the records tell; zero where it has none."""
    bounds = [each for each in (requirement.bound, requirement.upper) if each is not None]
    sizes = [abs(figure_of(each, requirement.study, records).value) for each in bounds]
    return max((size for size in sizes if math.isfinite(size)), default=0.0)


def _stress(element: Element, stress: Stress) -> _Asked:
    return lambda study, records: stress.of(records[study], element, element.name)


class _Floors:
    """What counts as nothing in a circuit, by dimension: a share of its largest voltage, current and power."""

    def __init__(self, solution: Solution):
        self._solution = solution
        self._ports = [(element, port) for element in solution.circuit.elements.values() for port in element.ports]

    @cached_property
    def _voltage(self) -> float:
        sizes = (np.max(np.abs(self._solution.voltage(port.a, port.b))) for _, port in self._ports)
        return max(map(float, sizes), default=0.0)

    @cached_property
    def _current(self) -> float:
        sizes = (np.max(np.abs(self._solution.current(each.name, port.name))) for each, port in self._ports)
        return max(map(float, sizes), default=0.0)

    def of(self, dimension: Dimension) -> float:
        """The floor of a dimension; zero where it has none."""
        if dimension == VOLT:
            return ABSENT * self._voltage
        if dimension == AMPERE:
            return ABSENT * self._current
        if dimension in (WATT, JOULE):
            span = float(self._solution.times[-1]) if dimension == JOULE else 1.0
            return ABSENT * (self._voltage * self._current * span)
        return 0.0


def _share(figure: Figure, accuracy: float, floors: _Floors, limit: float) -> float:
    """A figure's bound over the one allowed; what counts as nothing is looked up only where it can decide. Where the
    figure is near nothing (by symmetry, mostly), the limit that it is held to says what it is to be told from."""
    if figure.bound is None or not figure.defined or figure.bound <= figure.rounding:
        return 0.0
    size = max(abs(figure.value), NOTHING * figure.scale)
    if abs(figure.value) < NOTHING * figure.scale:
        size = max(size, min(limit, figure.scale))
    if figure.bound > accuracy * size + figure.rounding:
        size = max(size, floors.of(figure.dimension))
    return figure.bound / (accuracy * size + figure.rounding)


def solve_studies(
    project: Project,
    circuit: Circuit,
    names: Sequence[str],
    overrides: Mapping[str, Quantity | Expression | str] | None = None,
    kernels: KernelCache | None = None,
    doubtful: Doubtful = lambda name, coarse, fine: False,
    watch: Watch | None = None,
) -> dict[str, StudyResult]:
    """The named studies of a circuit, solved to their accuracy; overrides: the lets that were set from outside;
    kernels: where runs of earlier circuits of the same form are kept; doubtful: from a study and the records of all
    solved so far, at the looser and the tighter tolerance, whether it should be solved still more tightly; watch: who
    wants to know how far it is.

    Raises NoSolution where one cannot be solved, DescriptionError where a value set in it makes the design wrong, and
    Stopped at an interrupt from the keyboard.
    """
    proof = _Proof(circuit, Variants(project, circuit, overrides), kernels or KernelCache(), doubtful, watch)
    try:
        for name in names:
            proof.solve(name)
    except KeyboardInterrupt:
        raise Stopped(proof.results) from None
    return {name: proof.results[name] for name in names}
