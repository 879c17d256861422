"""A variant in a sweep is the same variant written down and run alone, to the last bit, in all studies."""

from __future__ import annotations

import random
from collections.abc import Sequence
from dataclasses import replace

import pytest
from pasted_text import pasted

import simcore
from grammar.quantities import NONE, Quantity
from simcore.campaign.plan import Plan, Points
from simcore.campaign.results import Results
from simcore.campaign.rows import SOLVED, Found, Row, encode, found_of
from simcore.campaign.solver import Solver, Task
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import Here, Processes
from simcore.design.circuit import Change, LetValue
from simcore.equations.compiled import available
from simcore.face import Result

LIBRARY = simcore.library_folder()
WORKED = sorted(path.stem for path in LIBRARY.glob("*.rect"))
QUICK = ("half_wave", "bench_supply", "zener_supply")
"""Circuits that are looked at each time."""
OF_EACH = 14
"""Variants of each worked circuit that are looked at at night: more than 200 in all."""


def moved(let: LetValue, draw: random.Random) -> float:
    """A value within a let's tolerance, or else near its own; whole numbers are counts, and stay."""
    assert isinstance(let.value, Quantity)
    value = let.value.value
    if let.low is not None and let.high is not None:
        return draw.uniform(let.low, let.high)
    return value if value == round(value) and let.value.dimension == NONE else value * draw.uniform(0.9, 1.1)


def planned(design: simcore.Design, count: int, draw: random.Random) -> Plan:
    """Random values by random faults: as many variants as asked for, half of them sound, or one where no let is."""
    lets = {name: let for name, let in design.circuit.lets.items() if isinstance(let.value, Quantity)}
    rows = [tuple(moved(let, draw) for let in lets.values()) for _ in range(count // 2 if lets else 1)]
    dimensions = tuple(let.value.dimension for let in lets.values())  # type: ignore[union-attr]
    broken = [Change(verb, element) for element in design.circuit.elements for verb in ("open", "short")]
    faults = draw.sample(broken, min(count // len(rows) - 1, len(broken)))
    return Plan("random", (Points(tuple(lets), dimensions, rows), Points((), (), (), [None, *faults])))


def alone(design: simcore.Design, row: Row, lines: Sequence[str], figures: Sequence[str]) -> Row:
    """The row of a variant that stands in a text of its own and is proved from its first letter on."""
    settings = {}
    for line in lines:
        if line.startswith("# bulkrail run --set"):
            name, _, value = line.split('"')[1].partition("=")
            settings[name] = value
    try:
        text = pasted(design.text, [line for line in lines if not line.startswith("#")])
        written = simcore.read_text(text, "written.rect", LIBRARY).variant(**settings)
        proof = written.prove()
    except simcore.NoSolution as failure:
        return Row(row.number, str(failure))
    except simcore.DescriptionError as error:
        assert row.ended.startswith("not sound: ")
        assert all(mistake.what in row.ended for mistake in error.mistakes)
        return row
    first = Result(proof, written.studies[0])
    found = [found_of(verdict) for verdict in proof.verdicts]
    for figure, held in zip(figures, row.found[len(found) :], strict=True):
        measured = first.figure(figure)
        found.append(Found(replace(held.claim), measured.value, measured.bound, reason=measured.note))
    return Row(row.number, SOLVED, tuple(found))


def compared(name: str, count: int, workers: int) -> list[Row]:
    """The rows of random variants of a worked circuit, each found to be what the variant gives alone."""
    design = simcore.read(LIBRARY / f"{name}.rect")
    figures = [f"rms({observed}) at {study}" for study in design.studies for observed in design.circuit.observes]
    plan = planned(design, count, random.Random(name))
    task = task_of(design, plan, figures)
    rows = list(solved_rows(task, Processes(workers) if workers > 1 else Here(), block=3))
    results = Results(plan, rows, task.claims, task.designs)
    for row in rows:
        assert encode([alone(design, row, results.pasted(row), figures)], []) == encode([row], [])
    return rows


def task_of(design: simcore.Design, plan: Plan, figures: Sequence[str]) -> Task:
    from simcore.campaign.face import sweep_task

    asked = sweep_task(design._opened, [{}], design.studies, figures)
    return replace(asked, plan=plan)


@pytest.mark.parametrize("name", QUICK)
def test_a_variant_in_a_sweep_is_that_variant_alone(name: str) -> None:
    assert sum(row.solved for row in compared(name, 2, 1)) > 0


@pytest.mark.nightly
@pytest.mark.parametrize("name", WORKED)
def test_every_variant_of_every_worked_circuit_is_that_variant_alone(name: str) -> None:
    rows = compared(name, OF_EACH, 2)
    assert len(rows) >= 7 and any(row.solved for row in rows)


@pytest.mark.nightly
@pytest.mark.parametrize("name", WORKED)
def test_compiled_variants_of_every_worked_circuit_are_those_of_plain_runs(name: str) -> None:
    if not available():
        pytest.skip("the extra `fast` is not installed")
    design = simcore.read(LIBRARY / f"{name}.rect")
    plan = planned(design, 4, random.Random(name))
    solver = Solver(task_of(design, plan, ()))
    plain = solver.block(0, len(plan))
    solver.compile()
    assert solver.block(0, len(plan)) == plain
