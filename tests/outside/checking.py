"""What the outside checks share: solve a text through the whole chain, read figures, and keep count of honest bounds.

Every comparison goes through `close`, which also asks whether the printed bound covers the true error: it must never be missed by
more than three times, and a test at the end of the folder asks for 95 % of all.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import simcore
from grammar.reader import read_expression
from simcore.face import Design, Result
from simcore.figures.expressions import signal_of
from simcore.figures.signal import Signal

DIODE = "saturation_current = 1 nA, ideality_factor = 1.8, temperature = 300.15 K"
"""The exponential diode of most rows: I_S = 1 nA, n = 1.8 at 300.15 K."""

SHARP = "saturation_current = 1 pA, ideality_factor = 0.01, temperature = 300.15 K"
"""Nearly ideal: 1 pA, n = 0.01 drops 7 mV at 1 A."""


STEEP = "saturation_current = 1 pA, ideality_factor = 0.2, temperature = 300.15 K"
"""Steep, yet quick to solve: some 0.1 V at the currents of a multiplier."""


@dataclass
class Ledger:
    """How many comparisons were made, and in how many the bound covered the true error."""

    compared: int = 0
    covered: int = 0
    missed: list[str] = field(default_factory=list)


LEDGER = Ledger()


def design(text: str) -> Design:
    """The design that a text holds."""
    return simcore.read_text(text, "check")


def solved(text: str, study: str = "s") -> Result:
    """A study of a text, solved."""
    return design(text).run(study)


def course(result: Result, signal: str) -> Signal:
    """A signal of a result as the polynomials it is made of."""
    expression, mistakes = read_expression(signal, signal)
    assert expression is not None and not mistakes
    return signal_of(expression, result.solved.record)


def close(
    result: Result, figure: str, expected: float, relative: float, absolute: float = 0.0, exact_to: float | None = None
) -> None:
    """A figure (SI unit, angles in deg) agrees with an outside value; its own bound is judged for honesty where the outside
    value is exact for the very circuit solved (no absolute allowance for a model's difference), or exact to what is given."""
    found = result.figure(figure)
    error = abs(found.value - expected)
    assert error <= relative * abs(expected) + absolute, (
        f"{figure}: {found.value!r} against {expected!r}, {found.shown}"
    )
    if absolute == 0.0 or exact_to is not None:
        printed = 1e-8 * abs(expected) + (exact_to or 0.0)
        LEDGER.compared += 1
        LEDGER.covered += error <= found.bound + printed
        if error > found.bound + printed:
            LEDGER.missed.append(f"{figure}: {error:.3g} beyond {found.bound:.3g}")
        assert error <= 3.0 * found.bound + printed, (
            f"{figure}: error {error:.3g} is over three times {found.bound:.3g}"
        )
