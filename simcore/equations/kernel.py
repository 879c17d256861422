"""The emitted run made callable, and the names of what it carries and records."""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence

from simcore.components.frame import Frame
from simcore.equations.assemble import System, assemble
from simcore.equations.run_source import RunSource

Run = Callable[[list[float], list[float], list[float], tuple[float, ...]], tuple[int, ...]]


class Kernel:
    """A circuit's run, for any numbers its parameters may take.

    system: the equations; source: the emitted text; run: the function (see run_source); watched: columns it watches
    """

    def __init__(self, system: System):
        written = RunSource(system)
        self.system = system
        self.source = written.source
        self.watched = written.watched
        self.saved_count = written.saved_count()
        self.run = compile_run(self.source)


def compile_run(source: str) -> Run:
    """The function that an emitted source defines. The source is made of our own names and numbers only."""
    names: dict = {function.__name__: function for function in (math.exp, math.log, math.sqrt, math.sin, math.cos)}
    exec(compile(source, "<emitted run>", "exec"), names)  # noqa: S102
    return names["run"]


class KernelCache:
    """Kernels by the form of their equations, so that a change of numbers costs no new emission."""

    def __init__(self) -> None:
        self._kernels: dict[tuple, Kernel] = {}

    def kernel(self, frame: Frame, references: Sequence[Hashable]) -> Kernel:
        key = (frame.signature(), tuple(references))
        if key not in self._kernels:
            self._kernels[key] = Kernel(assemble(frame, references))
        return self._kernels[key]
