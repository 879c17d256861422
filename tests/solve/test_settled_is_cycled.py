"""Every settled study of the worked circuits against brute force: cycle after cycle from rest until nothing is left of the start."""

from __future__ import annotations

import math

import pytest

import simcore
from simcore.design.changes import Variants
from simcore.design.circuit import PlannedStudy
from simcore.equations.kernel import KernelCache
from simcore.figures.overview import signal_rows
from simcore.figures.record import Record
from simcore.solve.course import Course, Reached
from simcore.solve.solution import Solution

SETTLED = [
    (path.stem, name)
    for path in sorted(simcore.library_folder().glob("*.rect"))
    for name, study in simcore.read(path).circuit.studies.items()
    if study.kind == "settled"
]
TOLERANCES = (1e-3, 1e-4, 1e-6)
"""Of a step: cycles at the loose ones come near, those at the last are compared."""
NEAR, NEARER = 1e-5, 3e-2
"""What is left of the start after the cycles at the first tolerance, and after those at each further one."""
MOST = 480
SHARP = {"six_pulse": 1e-8}
"""A current that a bridge without inductance switches in a step needs a tighter last tolerance for its peak."""
FIRED = {"controlled_charger"}
"""An instant of firing moves with the states, which the derivative of the period map leaves out: 1e-5 of the peak is allowed."""
SLOW = {"twelve_pulse", "transformer_switch_on"}
"""Cores whose flux takes thousands of periods to forget how they were switched on: out of reach of cycling."""


def cycles(multiplier: float, left: float) -> int:
    """How many periods leave a share of a disturbance."""
    if multiplier >= 1.0:
        return MOST + 1
    return 3 if multiplier < 1e-3 else max(3, math.ceil(math.log(left) / math.log(multiplier)))


def cycled(study: PlannedStudy, variant: Variants, multiplier: float, period: float, last: float) -> Solution:
    """The last period of many, with what the study changes from the start."""
    kernels, before, solution, spent = KernelCache(), None, None, 0
    for tolerance in (*TOLERANCES[:-1], last):
        count = cycles(multiplier, NEARER if before else NEAR)
        spent += count
        changes = () if before else study.changes
        run = PlannedStudy("cycled", "transient", changes=changes, duration=count * period, last=1)
        solution, before = solved(run, variant, before, tolerance, kernels)
    assert spent <= MOST, f"{spent} cycles"
    assert solution is not None
    return solution


def solved(
    study: PlannedStudy, variant: Variants, before: Reached | None, tolerance: float, kernels: KernelCache
) -> tuple[Solution, Reached]:
    return Course(study, variant, before, tolerance, kernels).solve()


@pytest.mark.parametrize(("name", "study"), SETTLED, ids=[f"{name}-{study}" for name, study in SETTLED])
def test_the_settled_state_is_that_of_cycling(name: str, study: str) -> None:
    """Mean, rms, peak, valley and ripple of everything observed agree to 1e-6 of its peak (see FIRED and SLOW)."""
    design = simcore.read(simcore.library_folder() / f"{name}.rect")
    planned, variant = design.circuit.studies[study], Variants(design.project, design.circuit, {})
    last = SHARP.get(name, TOLERANCES[-1])
    found, _ = solved(planned, variant, None, TOLERANCES[0] if name in SLOW else last, KernelCache())
    assert found.period is not None and found.multiplier is not None
    if name in SLOW:
        assert cycles(found.multiplier, NEAR) > MOST
        pytest.skip(f"of a disturbance {found.multiplier:.5f} is left after a period")
    wanted = cycled(planned, variant, found.multiplier, found.period, last)
    pairs = list(zip(signal_rows(Record(found)), signal_rows(Record(wanted)), strict=True))
    assert pairs
    for ours, theirs in pairs:
        for figure, value in ours.figures.items():
            peak = theirs.figures["peak"].value
            assert value.value == pytest.approx(theirs.figures[figure].value, abs=(1e-5 if name in FIRED else 1e-6) * peak), (ours.name, figure)


def test_every_worked_circuit_is_there() -> None:
    assert len(SETTLED) >= 16 and len({name for name, _ in SETTLED}) >= 11
