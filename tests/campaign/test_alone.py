"""Nothing of a sweep's course shows in its rows: neither blocks, nor workers, nor what was solved before."""

from __future__ import annotations

import re
from pathlib import Path

from small_design import DESIGN

import simcore
from simcore.campaign.rows import Row, encode, found_of
from simcore.campaign.solver import Solver, Task
from simcore.campaign.sweeping import solved_rows
from simcore.campaign.workers import Here, Processes
from simcore.equations.kernel import KernelCache


def test_a_fault_is_what_a_study_that_begins_with_it_gives(design: simcore.Design) -> None:
    rows = design.sweep("broken", studies=["work"], workers=2)
    faults = rows.columns["fault"]
    assert faults[0] == "none" and "short D1" in faults and "open C1" in faults
    for number, fault in enumerate(faults):
        if fault == "none":
            continue
        text = re.sub(r"(study work: +settled)", rf"\1, {fault}", design.text)
        assert text != design.text
        try:
            alone = Row(number + 1, "solved", tuple(map(found_of, simcore.read_text(text).run("work").verdicts)))
        except simcore.NoSolution as failure:
            alone = Row(number + 1, str(failure))
        assert encode([rows.rows[number]], []) == encode([alone], [])


def test_what_is_asked_follows_the_values_of_the_variant() -> None:
    """Limits, durations and figures that a let stands behind, through another let, are those of the variant."""
    text = (
        DESIGN.replace("duration = 40 ms", "duration = span")
        + """
let share = 80 %
let floor = share * V
let span = 40 ms
require work: mean(u_out) >= floor
require start: time_until_above(u_out, floor) <= span
"""
    )
    design = simcore.read_text(text)
    variants = [{"V": "6 V"}, {"share": "50 %"}, {"span": "15 ms"}, {"R_load": "90 Ohm", "share": "91 %"}]
    results = design.sweep(variants, studies=["work", "start"], workers=1)
    assert [name for name in results.columns if "until" in name] == [
        "start: time_until_above(u_out, floor) [s]",
        "start: time_until_above(u_out, floor), bound [s]",
        "start: time_until_above(u_out, floor) <= span",
    ]
    rows, states = results.rows, set()
    for values, row in zip(variants, rows, strict=True):
        alone = design.variant(**values)
        found = [found_of(verdict) for study in ("work", "start") for verdict in alone.run(study).verdicts]
        assert sorted(map(repr, row.found)) == sorted(map(repr, found)) and len(found) == 6
        states.add(tuple(each.state for each in row.found))
    assert len(states) > 2, "the variants should differ in what holds"


def test_neither_blocks_nor_workers_show(spread: Task) -> None:
    plain = [encode([row], []) for row in solved_rows(spread, Here(), block=12)]
    assert len(set(plain)) == 12
    for crew, block in ((Here(), 1), (Here(), 7), (Processes(2), 3), (Processes(3), None)):
        assert [encode([row], []) for row in solved_rows(spread, crew, block=block)] == plain


def test_order_does_not_show(spread: Task) -> None:
    solver = Solver(spread)
    forwards = [solver.block(index, index + 1) for index in range(6)]
    assert [solver.block(index, index + 1) for index in reversed(range(6))] == forwards[::-1]


def test_a_run_that_lost_a_pivot_leaves_the_next_variant_alone(design: simcore.Design, monkeypatch) -> None:
    """What goes over to the sparse LU in one variant is emitted code again in the next."""
    kept: list[KernelCache] = []
    afresh = KernelCache.afresh

    def seen(cache: KernelCache) -> KernelCache:
        kept.append(afresh(cache))
        return kept[-1]

    monkeypatch.setattr(KernelCache, "afresh", seen)
    task = Task(design._opened, design_plan(design), ("work",))
    solver = Solver(task)
    first = solver.row(0)
    for kernel in kept[-1]._kernels.values():
        kernel.use_sparse()
        assert not kernel.source
    assert encode([solver.row(0)], []) == encode([first], [])
    assert all(kernel.source for kernel in kept[-1]._kernels.values())


def design_plan(design: simcore.Design):
    from simcore.campaign.plan import plan_of

    return plan_of(design.circuit.sweeps[1], design.circuit.lets)


def test_the_table_of_the_command_is_that_of_python(tmp_path: Path, design: simcore.Design) -> None:
    from simcore.report.sweeps import write_sweep

    results = design.sweep("loads", workers=1)
    write_sweep(results, tmp_path / "loads.csv")
    raw = (tmp_path / "loads.csv").read_bytes()
    assert raw.count(b"\r\n") == 7 and raw.startswith(b"variant,R_load [Ohm],valve,work: mean(u_out) [V],")
    import csv

    rows = list(csv.DictReader(raw.decode().splitlines()))
    assert [row["valve"] for row in rows] == ["weak", "strong"] * 3
    assert [float(row["R_load [Ohm]"]) for row in rows] == results.table["R_load [Ohm]"].tolist()
    assert [float(row["work: ripple(u_out) [V]"]) for row in rows] == results.columns["work: ripple(u_out) [V]"]
