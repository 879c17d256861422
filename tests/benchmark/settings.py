"""What each device of the stepping is worth: Newton iterations a cycle at equal measured error with it and without.

Counts, not times, so that a busy machine changes nothing. A device is taken out of the emitted source as it is compiled.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from unittest import mock

from simcore.equations import kernel
from simcore.equations.kernel import KernelCache
from simcore.report.tables import table
from simcore.solve import course
from tests.benchmark.circuits import Bridge, Ladder
from tests.benchmark.own import circuit_of, run_own
from tests.benchmark.stepping import ERRORS, Reference

CASES: tuple[tuple[Bridge | Ladder, int], ...] = ((Bridge(), 10), (Ladder(3), 10))
_TOLERANCES = [10.0 ** (-exponent / 4.0) for exponent in range(8, 27)]
_ATTEMPTS = 400_000
"""Iterations of a run after which no tighter one is tried."""
SETTINGS: dict[str, tuple[int, str, str]] = {
    "as it is: order 3, growth to 2": (3, "", ""),
    "extrapolation to order 2": (2, "", ""),
    "no extrapolation": (1, "", ""),
    "no step cut where a branch turns on": (3, r"if n(\d+) < g\1 - w\1 and n\1 > u\1:", "if False:"),
    "no step cut where a current comes to zero": (3, r"if 0\.0 < q(\d+) < h\1 and u\d+ > g\d+:", "if False:"),
    "no short step across a kink": (3, r"if kink > 0\.0 and order > 1 and size > 1\.01 \* kink_size", "if False"),
    "no guess from the step before": (3, r"(n\d+) \+= a\d+ / division", r"\1 += 0.0"),
    "growth to 4": (3, r"min\(2\.0, max\(0\.2, factor\)\)", "min(4.0, max(0.2, factor))"),
    "growth to 1.5": (3, r"min\(2\.0, max\(0\.2, factor\)\)", "min(1.5, max(0.2, factor))"),
}
"""What is tried -> order, and what is replaced in the source by what."""


def _changed(pattern: str, replacement: str) -> Callable[[str, str], Callable]:
    """Compiles a source after the replacement, which must find its place."""
    plain = kernel.compile_function

    def compiled(source: str, name: str) -> Callable:
        source, found = re.subn(pattern, replacement, source) if pattern else (source, 1)
        if not found:
            raise RuntimeError(f"{pattern} is not in the emitted source")
        return plain(source, name)

    return compiled


def _counts(spec: Bridge | Ladder, cycles: int, reference: Reference, setting: tuple[int, str, str]) -> list[str]:
    """Iterations a cycle of the cheapest run that reaches each error."""
    order, pattern, replacement = setting
    best: dict[float, float] = {}
    with (
        mock.patch.object(kernel, "compile_function", _changed(pattern, replacement)),
        mock.patch.object(course, "EXTRAPOLATION_ORDER", order),
    ):
        kernels = KernelCache()
        for tolerance in _TOLERANCES:
            run = run_own(circuit_of(spec.text), spec, cycles / spec.frequency, tolerance, kernels)
            error, count = reference.error(run), run.counts.iterations / cycles
            best |= {wanted: min(count, best.get(wanted, count)) for wanted in ERRORS if error <= wanted}
            if error <= ERRORS[-1] or run.counts.iterations > _ATTEMPTS:
                break
    return [f"{best[wanted]:.0f}" if wanted in best else "not reached" for wanted in ERRORS]


def tables() -> Iterator[str]:
    """The lines of this part."""
    yield "Newton iterations a cycle from rest, at equal measured error of the output"
    rows = [[name] for name in SETTINGS]
    for spec, cycles in CASES:
        reference = Reference(spec, cycles)
        for row, setting in zip(rows, SETTINGS.values(), strict=True):
            row += _counts(spec, cycles, reference, setting)
    headings = [f"{spec.name}, {error:g}" for spec, _ in CASES for error in ERRORS]
    yield from table(["setting", *headings], rows, left=1)
