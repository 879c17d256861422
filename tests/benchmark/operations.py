"""Operations of a Newton iteration, counted in the graph that is emitted."""

from __future__ import annotations

from simcore.equations.values import FUNCTIONS, Level, ancestors
from simcore.report.tables import table
from tests.benchmark.circuits import HALF_WAVE, Bridge, Ladder
from tests.benchmark.own import kernel_of

CASES = {"half-wave": HALF_WAVE, **{spec.name: spec.text for spec in (Bridge(), Ladder(5), Ladder(20))}}


def tables() -> list[str]:
    """The lines of this part."""
    rows = []
    for name, text in CASES.items():
        system = kernel_of(text).system
        values = ancestors([junction.new for junction in system.junctions])
        values = [value for value in values if value.level == Level.ITERATION and value.operation != "input"]
        functions = sum(value.operation in FUNCTIONS for value in values)
        counts = [len(system.reduction.free), len(system.junctions), len(values) - functions, functions]
        rows.append([name, *map(str, counts)])
    title = "Operations of one Newton iteration, without limiting and tests of convergence"
    return [title, *table(["circuit", "unknowns", "diodes", "+ - * /", "exp"], rows)]
