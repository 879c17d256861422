"""Every settled study of the worked circuits against brute force: cycle after cycle from rest until nothing is left of the start."""

from __future__ import annotations

import math
from dataclasses import replace

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
NEAREST = {"controlled_charger": 3e-3}
"""A battery held by an angle alone follows small differences of its instants a long way: the looser tolerances leave more to forget."""
MOST = 480
SHARP = {"six_pulse": 1e-8}
"""A current that a bridge without inductance switches in a step needs a tighter last tolerance for its peak."""
SLOW = {"twelve_pulse": 1e-5, "transformer_switch_on": 1e-6, "universal_input": 1e-6}
"""Cores whose flux, and a limiter whose heat, take thousands of periods to forget how they were switched on: out of reach of cycling
from rest, so that the settled state is held between two starts that cycle towards it from either side, at this tolerance of a step."""
APART, WATCHED = 3e-7, 4
"""How far from the settled state these starts lie, of the flux or of the peak of the currents observed, and periods followed."""


def cycles(multiplier: float, left: float) -> int:
    """How many periods leave a share of a disturbance."""
    if multiplier >= 1.0:
        return MOST + 1
    return 3 if multiplier < 1e-3 else max(3, math.ceil(math.log(left) / math.log(multiplier)))


def cycled(study: PlannedStudy, variant: Variants, found: Solution, last: float, nearer: float, most: int = MOST) -> Solution:
    """The last period of many, with what the study changes from the start."""
    kernels, before, solution, spent = KernelCache(), None, None, 0
    assert found.period is not None and found.multiplier is not None
    for tolerance in (*TOLERANCES[:-1], last):
        count = cycles(found.multiplier, nearer if before else NEAR)
        spent += count
        changes = () if before else study.changes
        run = PlannedStudy("cycled", "transient", changes=changes, duration=count * found.period, last=1)
        solution, before = solved(run, variant, before, tolerance, kernels)
    assert spent <= most, f"{spent} cycles"
    assert solution is not None
    return solution


def solved(
    study: PlannedStudy, variant: Variants, before: Reached | None, tolerance: float, kernels: KernelCache
) -> tuple[Solution, Reached]:
    return Course(study, variant, before, tolerance, kernels).solve()


def agree(found: Solution, wanted: Solution) -> None:
    """Mean, rms, peak, valley and ripple of everything observed agree to 1e-6 of its peak."""
    pairs = list(zip(signal_rows(Record(found)), signal_rows(Record(wanted)), strict=True))
    assert pairs
    for ours, theirs in pairs:
        peak = theirs.figures["peak"].value
        for figure, value in ours.figures.items():
            assert value.value == pytest.approx(theirs.figures[figure].value, abs=1e-6 * peak), (ours.name, figure)


def planned(name: str, study: str) -> tuple[PlannedStudy, Variants]:
    design = simcore.read(simcore.library_folder() / f"{name}.rect")
    return design.circuit.studies[study], Variants(design.project, design.circuit, {})


@pytest.mark.parametrize(
    ("name", "study"), [pytest.param(*each, id="-".join(each)) for each in SETTLED if each[0] not in SLOW]
)
def test_the_settled_state_is_that_of_cycling(name: str, study: str) -> None:
    """Cycled from rest, every worked circuit that forgets within MOST periods comes to the state that Newton finds."""
    asked, variant = planned(name, study)
    last = SHARP.get(name, TOLERANCES[-1])
    found, _ = solved(asked, variant, None, last, KernelCache())
    agree(found, cycled(asked, variant, found, last, NEAREST.get(name, NEARER)))


@pytest.mark.parametrize(("name", "study"), [pytest.param(*each, id="-".join(each)) for each in SETTLED if each[0] in SLOW])
def test_a_slow_settled_state_lies_between_starts_that_cycle_towards_it(name: str, study: str) -> None:
    """What magnetises the cores or warms the limiter, put up and put down by less than 1e-6 of what is observed, comes back from both sides: what
    cycling would end in lies between, without the derivative of the period map being asked."""
    asked, variant = planned(name, study)
    kernels = KernelCache()
    found, reached = solved(asked, variant, None, SLOW[name], kernels)
    assert found.period is not None and found.multiplier is not None
    assert cycles(found.multiplier, NEAR) > MOST
    peak = max(row.figures["peak"].value for row in signal_rows(Record(found)) if row.name.startswith("i_"))
    slow = ("current", "flux", "temperature")
    cores = {key: value for key, value in reached.memory.items() if key[2] in slow and (key[1] == "core" or key[2] == "temperature")}
    run = PlannedStudy("cycled", "transient", duration=WATCHED * found.period, last=1)
    moved = {key: APART * (peak if key[2] == "current" else abs(value)) for key, value in cores.items()}
    assert moved
    for side in (1.0, -1.0):
        start = replace(reached, memory={**reached.memory, **{key: cores[key] + side * moved[key] for key in cores}})
        _, ended = solved(run, variant, start, SLOW[name], kernels)
        for key in cores:
            assert 0.9 < side * (ended.memory[key] - cores[key]) / moved[key] < 1.0, (key, side)


@pytest.mark.nightly
def test_a_core_is_cycled_until_it_has_forgotten() -> None:
    """Of the core that forgets within some thousand periods all are followed; the looser tolerances leave their own offset to forget."""
    asked, variant = planned("transformer_switch_on", "settled")
    found, _ = solved(asked, variant, None, 1e-6, KernelCache())
    agree(found, cycled(asked, variant, found, 1e-6, 1e-3, most=8_000))


def test_every_worked_circuit_is_there() -> None:
    assert len(SETTLED) >= 16 and len({name for name, _ in SETTLED}) >= 11
    assert {name for name, _ in SETTLED} >= set(SLOW)
