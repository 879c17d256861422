"""Designs as Python objects: read one, give its lets other values, run its studies, ask for traces and figures.

It holds what a caller sees and works nothing out itself.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from grammar.description import Expression
from grammar.editing import edited
from grammar.layout import write
from grammar.mistakes import DescriptionError
from grammar.quantities import ANGLE, show, unit_of
from grammar.reader import read_expression
from simcore.design.circuit import Circuit
from simcore.design.elaborate import elaborate
from simcore.design.files import Project, load, load_text
from simcore.design.graph import graph_of
from simcore.figures.evaluate import figure_of
from simcore.figures.expressions import signal_of
from simcore.figures.figure import bounded
from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict
from simcore.opening import Opened, open_project
from simcore.proof import Proof, ProvedStudy, prove
from simcore.report.traces import traces
from simcore.signing import SignOff

if TYPE_CHECKING:
    import networkx

    from simcore.campaign.face import What
    from simcore.campaign.results import Results
    from simcore.campaign.rows import Row
    from simcore.campaign.solver import Task


def read(path: str | Path) -> Design:
    """The design that a description file holds. Raises DescriptionError with all its mistakes."""
    return _sound(*load(path))


def read_text(text: str, name: str = "text", folder: str | Path | None = None) -> Design:
    """The design that a text holds; name: what messages call it; folder: where its `use` lines look first.

    >>> divider = read_text('''
    ... a -> b: source cell, constant = 9 V
    ... a -> mid: resistor R_top, 2 kOhm
    ... mid -> b: resistor R_bottom, 1 kOhm
    ... reference b
    ... study rest: operating_point
    ... ''')
    >>> print(divider.run("rest").figure("mean(voltage(mid))"))
    3 V ± 6 pV
    """
    return _sound(*load_text(text, name, folder))


def _sound(project: Project, mistakes: list) -> Design:
    if mistakes:
        raise DescriptionError(mistakes + elaborate(project)[1])
    return Design(project)


@dataclass(frozen=True)
class Design(SignOff):
    """A design, with the values some of its lets are given instead of those written.

    Whatever is wrong with it is raised, as a DescriptionError with all mistakes, where it is first made use of.
    """

    project: Project
    settings: Mapping[str, str] = field(default_factory=dict)

    @cached_property
    def _opened(self) -> Opened:
        opened, mistakes = open_project(self.project, self.settings)
        if mistakes:
            raise DescriptionError(mistakes)
        return opened

    @property
    def circuit(self) -> Circuit:
        """The circuit as understood: flat elements with SI values."""
        return self._opened.circuit

    @property
    def studies(self) -> list[str]:
        """Names of its studies, in the order written."""
        return list(self.circuit.studies)

    @property
    def graph(self) -> networkx.MultiDiGraph:
        """The circuit as a graph: nodes are its nodes, an edge is a port of an element; see simcore.design.graph."""
        return graph_of(self.circuit)

    @property
    def text(self) -> str:
        """The description as canonical text, as it was read: the values of a variant are not in it."""
        return write(self.project.top.description)

    def variant(self, **values: str | float) -> Design:
        """The same design with other values of lets: `variant(C_res="2200 uF")`, or a data sheet's name.

        >>> import simcore
        >>> bridge = simcore.read(simcore.library_folder() / "bench_supply.rect")
        >>> small = bridge.variant(C_res="2200 uF").run("full_load").figure("ripple(u_out)")
        >>> float(small) > float(bridge.run("full_load").figure("ripple(u_out)"))
        True
        """
        return Design(self.project, {**self.settings, **{name: str(value) for name, value in values.items()}})

    def edited(self, *lines: str, without: Sequence[str] = ()) -> Design:
        """The design with statements changed: those of the kind and name of another take its place, others are added;
        without: names of what is left out, or whole statements. The first design stays.

        >>> import simcore
        >>> bridge = simcore.read(simcore.library_folder() / "bench_supply.rect")
        >>> snubbed = bridge.edited("ac1 -> s: resistor R_s, 100 Ohm", "s -> ac2: capacitor C_s, 100 nF")
        >>> sorted(set(snubbed.graph.nodes) - set(bridge.graph.nodes))
        ['s']
        """
        project = self.project
        description, mistakes = edited(project.top.description, lines, without)
        if mistakes:
            raise DescriptionError(mistakes)
        changed, mistakes = load_text(write(description), project.top.name, project.folder)
        return Design(_sound(changed, mistakes).project, self.settings)

    def run(self, study: str) -> Result:
        """Solve a study, and those it starts from. KeyError for a name it does not have, NoSolution where it has
        none."""
        if study not in self.circuit.studies:
            raise KeyError(f"no study is called {study}; there are {', '.join(self.studies) or 'none'}")
        return Result(prove(self._opened, [study]), study)

    def prove(self) -> Proof:
        """Solve all studies and judge all requirements, once for a design."""
        return self._proof

    @cached_property
    def _proof(self) -> Proof:
        return prove(self._opened, self.studies)

    def sweep(
        self,
        what: What,
        *,
        studies: Sequence[str] = (),
        figures: Sequence[str] = (),
        workers: int | None = None,
        others: Mapping[str, Design] | None = None,
    ) -> Results:
        """Solve many variants: a sweep of the description by its name, arrays of values by let (every combination), or
        variants one by one, as mappings of lets to values.

        A value is text as the language has it, or a number in the let's own SI unit. studies: those whose requirements
        are judged, by default the sweep's; figures: found besides what is required, of the first study unless they say
        `at`; workers: processes, by default one a core; others: designs by name that take the same variants, such as
        edited ones. A variant that can't be solved has a row that says why.

        >>> import simcore
        >>> bridge = simcore.read(simcore.library_folder() / "bench_supply.rect")
        >>> loads = bridge.sweep({"R_load": [10.0, 20.0]}, studies=["full_load"], figures=["rms(u_out)"], workers=1)
        >>> [round(value, 1) for value in loads.columns["rms(u_out) [V]"]]
        [11.9, 13.0]
        >>> loads.table["R_load [Ohm]"].tolist()
        [10.0, 20.0]
        """
        from simcore.campaign import face

        return face.sweep(self._task(what, studies, figures, others), workers)

    def sweep_rows(
        self,
        what: What,
        *,
        studies: Sequence[str] = (),
        figures: Sequence[str] = (),
        workers: int | None = None,
        others: Mapping[str, Design] | None = None,
    ) -> Iterator[Row]:
        """The same one row after another, in the order of the variants and as soon as each is there.

        >>> import simcore
        >>> bridge = simcore.read(simcore.library_folder() / "bench_supply.rect")
        >>> loads = ({"R_load": f"{ohms} Ohm"} for ohms in (8, 15))
        >>> for row in bridge.sweep_rows(loads, studies=["full_load"], workers=1):
        ...     print(row.number, row.ended, row.passes)
        1 solved False
        2 solved True
        """
        from simcore.campaign import face

        return face.rows(self._task(what, studies, figures, others), workers)

    def _task(
        self, what: What, studies: Sequence[str], figures: Sequence[str], others: Mapping[str, Design] | None
    ) -> Task:
        from simcore.campaign import face

        opened = {name: other._opened for name, other in (others or {}).items()}
        return face.sweep_task(self._opened, what, studies, figures, opened)


@dataclass(frozen=True)
class Trace:
    """A signal over time: time in s and values in `unit`, one array each; a jump has its instant twice."""

    time: np.ndarray
    value: np.ndarray
    unit: str


@dataclass(frozen=True)
class Measured:
    """A figure: value and error bound in `unit` (an SI unit), nan with a note where it is undefined."""

    value: float
    bound: float
    unit: str
    note: str
    shown: str

    def __float__(self) -> float:
        return self.value

    def __str__(self) -> str:
        return self.shown


@dataclass(frozen=True)
class Result:
    """A solved study: traces, figures and the verdicts of the requirements on it."""

    proof: Proof
    study: str

    @property
    def solved(self) -> ProvedStudy:
        """All that is known of the study."""
        return self.proof.studies[self.study]

    @property
    def verdicts(self) -> list[Verdict]:
        """Of the requirements on this study."""
        return self.proof.verdicts

    @property
    def holds(self) -> bool:
        """Whether every requirement on this study holds."""
        return all(verdict.state is State.HOLDS for verdict in self.verdicts)

    def trace(self, signal: str) -> Trace:
        """A signal over the whole study: an observed name, or what an observe may hold, such as `current(D1)`."""
        record = self.solved.record
        formed = signal_of(_expression(signal), record)
        sampled = traces({signal: formed})
        return Trace(sampled.times, next(iter(sampled.columns.values())), unit_of(formed.dimension))

    def figure(self, text: str) -> Measured:
        """A figure of this study, such as `mean(u_out)` or `ripple(u_out) / mean(u_out)`, with its error bound."""
        expression = _expression(text)
        coarse, fine = self.proof.coarse, {name: study.record for name, study in self.proof.studies.items()}
        found = bounded(figure_of(expression, self.study, coarse), figure_of(expression, self.study, fine))
        bound = 0.0 if found.bound is None else found.bound
        shown = (
            f"{show(found.value, found.dimension)} ± {show(bound, found.dimension, 2)}" if found.defined else found.note
        )
        scale = math.degrees(1.0) if found.dimension == ANGLE else 1.0
        return Measured(found.value * scale, bound * scale, unit_of(found.dimension), found.note, shown)


def _expression(text: str) -> Expression:
    expression, mistakes = read_expression(text, text)
    if mistakes or expression is None:
        raise DescriptionError(mistakes)
    return expression
