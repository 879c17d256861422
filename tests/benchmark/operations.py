"""Operations of a Newton iteration, counted in the graph that is emitted."""

from __future__ import annotations

from simcore.equations.emit import operation_counts
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
        counts = operation_counts([value for value in values if value.level == Level.ITERATION])
        print(counts)
        functions = sum(count for operation, count in counts.items() if operation in FUNCTIONS and operation != "neg")
        plain = sum(counts.values()) - functions
        rows.append([name, str(len(system.reduction.free)), str(len(system.junctions)), str(plain), str(functions)])
    return ["Operations of one Newton iteration", *table(["circuit", "unknowns", "diodes", "arithmetic", "exp"], rows)]
