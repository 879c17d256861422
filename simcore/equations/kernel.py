"""The emitted run made callable, and the names of what it carries and records."""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence
from functools import cached_property
from typing import Any

import numpy as np

from simcore.components.frame import Frame
from simcore.equations.assemble import System, assemble
from simcore.equations.compiled import CompiledRun, seconds_for
from simcore.equations.eliminate import TooLarge
from simcore.equations.run_interface import saved_count, watched_columns
from simcore.equations.run_source import RunSource

Run = Callable[[list[float], list[float], list[float], tuple[float, ...]], tuple[int, ...]]


EMITTED_AT_MOST = 60_000
"""Operations up to which a run is emitted; beyond, source and compilation outweigh the sparse LU's overhead."""


class Equations:
    """What the equations of a form of circuit come to, each part made at its first use: the emitted run, the one that
    carries derivatives, the one on arrays."""

    def __init__(self, frame: Frame, references: Sequence[Hashable]):
        self._frame, self._references = frame, references
        self._functions: dict[str, Callable] = {}

    @cached_property
    def eliminated(self) -> System | None:
        """The equations with the free unknowns eliminated; None where that would be too large to be emitted."""
        try:
            system = assemble(self._frame, self._references, most=EMITTED_AT_MOST)
        except TooLarge:
            return None
        return system if len(self._frame.graph.values) <= EMITTED_AT_MOST else None

    @property
    def system(self) -> System:
        """These, or where there are none those without elimination."""
        return self.eliminated or self.sparse[0]

    @cached_property
    def source(self) -> str:
        """The emitted text of the run."""
        return RunSource(self.system).source

    @cached_property
    def responding_source(self) -> str:
        """The emitted text of the run that also carries the derivative of the states (see run_source)."""
        return RunSource(self.system, responses=True).source

    @property
    def run(self) -> Run:
        """The emitted run."""
        return self._function("run", self.source)

    @property
    def responding_run(self) -> Callable:
        """The emitted run that also carries the derivative of the states."""
        return self._function("responding run", self.responding_source)

    def _function(self, name: str, source: str) -> Callable:
        if name not in self._functions:
            self._functions[name] = compile_function(source, "run")
        return self._functions[name]

    @property
    def compilation(self) -> float:
        """About how many seconds compiling the runs that have been used would take."""
        return seconds_for(self._source_of_all) if self._functions else 0.0

    @property
    def _source_of_all(self) -> str:
        """The source that serves for all runs that have been used."""
        return self.responding_source if "responding run" in self._functions else self.source

    def compile(self) -> None:
        """Turn the runs that have been used into machine code. It gives the same bits."""
        if self._functions:
            compiled = CompiledRun(self._source_of_all, "responding run" in self._functions)
            self._functions = dict.fromkeys(self._functions, compiled)

    @cached_property
    def sparse(self) -> tuple[System, Run]:
        """The equations without elimination, and the run on arrays that solves them with the sparse LU."""
        from simcore.equations.sparse_run import SparseRun

        system = assemble(self._frame, self._references, eliminate=False)
        return system, SparseRun(system, compile_function, watched_columns(system))


class Kernel:
    """A circuit's run, for any numbers its parameters may take.

    system: the equations; run: the function (see run_source); source: the emitted text, "" where the run is on arrays;
    watched: columns it watches
    equations: where these were made before
    """

    def __init__(self, frame: Frame, references: Sequence[Hashable], equations: Equations | None = None):
        self.equations = equations or Equations(frame, references)
        self.system = self.equations.system
        self.watched, self.saved_count = watched_columns(self.system), saved_count(self.system)
        self.source = ""
        if self.equations.eliminated is None:
            self.use_sparse()
            return
        self.source = self.equations.source
        self.run: Run = self.equations.run

    def room(self, count: int) -> Any:
        """Somewhere for the run to record so many numbers."""
        return np.zeros(count) if isinstance(self.run, CompiledRun) else [0.0] * count

    @property
    def responding_run(self) -> Callable | None:
        """The run that also carries the derivative of the states (see run_source); None where the run is on arrays."""
        return self.equations.responding_run if self.source else None

    def use_sparse(self) -> None:
        """From here on solve with the sparse LU, which may pivot; the columns and saved numbers stay as they are."""
        self.source = ""
        self.system, self.run = self.equations.sparse
        self.watched, self.saved_count = watched_columns(self.system), saved_count(self.system)


def compile_function(source: str, name: str) -> Callable:
    """A function that an emitted source defines. The source is made of our own names and numbers only."""
    names: dict = {function.__name__: function for function in (math.exp, math.log, math.sqrt, math.sin, math.cos)}
    exec(compile(source, "<emitted>", "exec"), names)  # noqa: S102
    return names[name]


class KernelCache:
    """Kernels by the form of their equations, so that a change of numbers costs no new emission."""

    def __init__(self, equations: dict[tuple, Equations] | None = None) -> None:
        self._equations: dict[tuple, Equations] = {} if equations is None else equations
        self._kernels: dict[tuple, Kernel] = {}
        self._frames: dict[tuple[int, float], tuple[Any, Frame]] = {}
        self._of_frames: dict[int, tuple[Frame, Kernel]] = {}

    def afresh(self) -> KernelCache:
        """A cache that shares what was emitted, and in which no kernel has gone over to the sparse LU: what one variant
        needed must not change the next."""
        return KernelCache(self._equations)

    @property
    def compilation(self) -> float:
        """About how many seconds compiling what has been used would take."""
        return sum(equations.compilation for equations in self._equations.values())

    def compile(self) -> None:
        """Turn the runs that have been used into machine code, as the extra `fast` can. It gives the same bits."""
        for equations in self._equations.values():
            equations.compile()

    def frame(self, circuit: Any, moment: float, build: Callable[[], Frame]) -> Frame:
        """The frame of a circuit (told by identity) from a moment of a study on, built once."""
        key = (id(circuit), moment)
        if key not in self._frames:
            self._frames[key] = (circuit, build())
        return self._frames[key][1]

    def kernel(self, frame: Frame, references: Sequence[Hashable]) -> Kernel:
        """The kernel of a frame with its references; a frame has one for good."""
        if id(frame) not in self._of_frames:
            self._of_frames[id(frame)] = (frame, self._kernel(frame, references))
        return self._of_frames[id(frame)][1]

    def _kernel(self, frame: Frame, references: Sequence[Hashable]) -> Kernel:
        key = (frame.signature(), tuple(references))
        if key not in self._kernels:
            if key not in self._equations:
                self._equations[key] = Equations(frame, references)
            self._kernels[key] = Kernel(frame, references, self._equations[key])
        return self._kernels[key]
