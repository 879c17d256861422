"""The emitted run made callable, and the names of what it carries and records."""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence
from functools import cached_property

from simcore.components.frame import Frame
from simcore.equations.assemble import assemble
from simcore.equations.run_interface import saved_count, watched_columns
from simcore.equations.run_source import RunSource

Run = Callable[[list[float], list[float], list[float], tuple[float, ...]], tuple[int, ...]]


EMITTED_AT_MOST = 60_000
"""Operations up to which a run is emitted; beyond, source and compilation outweigh the sparse LU's overhead."""


class Kernel:
    """A circuit's run, for any numbers its parameters may take.

    system: the equations; run: the function (see run_source); source: the emitted text, "" where the run is on arrays;
    watched: columns it watches
    """

    def __init__(self, frame: Frame, references: Sequence[Hashable]):
        self._frame, self._references = frame, references
        self.system = assemble(frame, references)
        self.source = ""
        if len(frame.graph.values) > EMITTED_AT_MOST:
            self.use_sparse()
            return
        self.watched, self.saved_count = watched_columns(self.system), saved_count(self.system)
        self.source = RunSource(self.system).source
        self.run: Run = compile_function(self.source, "run")

    @cached_property
    def responding_run(self) -> Callable | None:
        """The run that also carries the derivative of the states (see run_source); None where the run is on arrays."""
        return compile_function(RunSource(self.system, responses=True).source, "run") if self.source else None

    def use_sparse(self) -> None:
        """From here on solve with the sparse LU, which may pivot; the columns and saved numbers stay as they are."""
        from simcore.equations.sparse_run import SparseRun

        self.source = ""
        self.system = assemble(self._frame, self._references, eliminate=False)
        self.watched = watched_columns(self.system)
        self.saved_count = saved_count(self.system)
        self.run = SparseRun(self.system, compile_function, self.watched)


def compile_function(source: str, name: str) -> Callable:
    """A function that an emitted source defines. The source is made of our own names and numbers only."""
    names: dict = {function.__name__: function for function in (math.exp, math.log, math.sqrt, math.sin, math.cos)}
    exec(compile(source, "<emitted>", "exec"), names)  # noqa: S102
    return names[name]


class KernelCache:
    """Kernels by the form of their equations, so that a change of numbers costs no new emission."""

    def __init__(self) -> None:
        self._kernels: dict[tuple, Kernel] = {}

    def kernel(self, frame: Frame, references: Sequence[Hashable]) -> Kernel:
        key = (frame.signature(), tuple(references))
        if key not in self._kernels:
            self._kernels[key] = Kernel(frame, references)
        return self._kernels[key]
