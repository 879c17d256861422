"""A call of `bulkrail sweep`: opens a description, solves its sweeps, writes their tables and says what was found.

Everything wrong with the description is said before anything is solved.
"""

from __future__ import annotations

import json
import time
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path

from grammar.expressions import nearest
from grammar.mistakes import DescriptionError, Mistake, render
from simcore.campaign.demands import demands_of
from simcore.campaign.journal import Journal
from simcore.campaign.plan import Plan, plan_of
from simcore.campaign.results import Results
from simcore.campaign.rows import Row
from simcore.campaign.sensitivity import sensitivities
from simcore.campaign.solver import Task
from simcore.campaign.sweeping import Keeping, fingerprint, solved_rows
from simcore.campaign.workers import Crew, WorkersLost, crew_of
from simcore.design.circuit import Circuit, PlannedSweep
from simcore.design.overview import in_words
from simcore.judge.bill import bill_of
from simcore.judge.cautions import GENERAL, cautions
from simcore.judge.outcome import Outcome, worst
from simcore.opening import Opened, open_design
from simcore.proof import TAKEN, Proof, prove
from simcore.report.files import write_bill
from simcore.report.page import write_page
from simcore.report.progress import progress
from simcore.report.screen import present_screen
from simcore.report.session import Say
from simcore.report.sweeps import (
    for_programs,
    quiet_lines,
    sensitivity_lines,
    sweep_lines,
    swept,
    write_sensitivities,
    write_sweep,
)
from simcore.report.terminal import bill_lines, show_seconds
from simcore.solve.failure import NoSolution

_CURE = "Make room there, or name another folder with --out; --resume goes on with what is finished in this one."


def _warning(lines: Sequence[str]) -> list[str]:
    return ["Cautions", *(f"  {line}" for line in lines)]


@dataclass(frozen=True)
class Asked:
    """What a call asks for: the sweeps, none for all; lets with other values; workers, None for one a core; a
    scheduler's address, "" for none; whether to go on with an interrupted sweep; whether for a bill of ratings; a page
    to write; whether to say only what does not hold; whether to say one JSON object and nothing else."""

    sweeps: Sequence[str]
    settings: Mapping[str, str]
    workers: int | None = None
    scheduler: str = ""
    resume: bool = False
    bill: bool = False
    page: Path | None = None
    quiet: bool = False
    as_json: bool = False


def sweep_file(file: str, folder: Path, asked: Asked, say: Say, complain: Say) -> Outcome:
    """Solve the sweeps of a description and write their tables to a folder."""
    opened, mistakes = open_design(file, asked.settings)
    tell: Say = _unsaid if asked.quiet or asked.as_json else say
    try:
        if mistakes:
            raise DescriptionError(mistakes)
        sweeps = chosen_sweeps(opened.circuit, asked.sweeps, file)
        tasks = [
            (sweep, replace(task_of(opened, sweep), billed=asked.bill or asked.page is not None)) for sweep in sweeps
        ]
        crew = crew_of(asked.workers, asked.scheduler)
        tell("\n".join([opened.circuit.purpose, file] if opened.circuit.purpose else [file]))
        solved = [_solve(sweep, task, crew, folder, asked.resume, tell, complain) for sweep, task in tasks]
        warned: Sequence[str] = GENERAL
        if asked.bill or asked.page is not None:
            labelled = [(results, sweep.label) for sweep, (results, _) in zip(sweeps, solved, strict=True)]
            warned = cautions(_sign_off(opened, labelled, folder, asked, tell))
        for _, journal in solved:
            journal.end()
    except DescriptionError as error:
        complain(render(error.mistakes).rstrip("\n"))
        return Outcome.INPUT_WRONG
    except WorkersLost as fault:
        complain(f"{file}: {fault}")
        complain("    cure: give it fewer --workers, if memory is short; what is finished is kept, --resume goes on")
        return Outcome.NO_SOLUTION
    except NoSolution as failure:
        complain(f"{file}: {failure}")
        return Outcome.NO_SOLUTION
    tell("\n".join(present_screen().fitted(["", *_warning(warned), ""])))
    found = [(sweep, results) for sweep, (results, _) in zip(sweeps, solved, strict=True)]
    if asked.as_json:
        said = {"description": file, "sweeps": [for_programs(results) for _, results in found]}
        say(json.dumps(said, indent=2, ensure_ascii=False, allow_nan=False))
    elif asked.quiet:
        _say_quietly(file, found, say)
    return worst(results.outcome for _, results in found)


def _unsaid(_: str) -> None:
    """What nobody asked to be told."""


def _say_quietly(file: str, found: Sequence[tuple[PlannedSweep, Results]], say: Say) -> None:
    screen = present_screen()
    lines = [line for sweep, results in found for line in quiet_lines(results, sweep.label, screen.width)]
    if lines:
        say("\n".join(screen.painted(screen.fitted([file, *lines]))))


def _sign_off(
    opened: Opened, solved: Sequence[tuple[Results, str | None]], folder: Path, asked: Asked, say: Say
) -> Proof:
    """The bill of ratings over all studies of the design as described and all variants of sweeps, and a page with
    both. Returns the proof of the design as described. Raises NoSolution."""
    proof = prove(opened, list(opened.circuit.studies))
    variants = [demand for results, _ in solved for demand in demands_of(results, opened.circuit)]
    bill = bill_of(proof, variants)
    said = [""]
    with writing(folder):
        if asked.bill:
            path, screen = write_bill(bill, folder), present_screen()
            said += bill_lines(bill, screen.width)
            if any(results.plan.faulted for results, _ in solved):
                said.append("  variants with a fault are left out")
            said.append(f"  Table: {path}.")
    if asked.page is not None:
        with writing(asked.page):
            write_page(asked.page, proof, opened.project, [swept(*each) for each in solved], bill)
        said.append(f"  Page: {asked.page}.")
    say("\n".join(present_screen().fitted(said)))
    return proof


def sensitivity_of_file(file: str, folder: Path, asked: Asked, say: Say, complain: Say) -> Outcome:
    """Find how far each required figure follows each let, and write the table to a folder."""
    opened, mistakes = open_design(file, asked.settings)
    path = folder / "sensitivity.csv"
    try:
        if mistakes:
            raise DescriptionError(mistakes)
        studies = judged_studies(opened.circuit, (), file)
        crew = crew_of(asked.workers, asked.scheduler)

        def solve(plan: Plan) -> list[Row]:
            with progress(plan.name, len(plan), complain) as tell:
                return list(solved_rows(Task(opened, plan, studies), crew, tell=tell))

        nominal, found = sensitivities(opened.circuit.lets, solve)
        if not nominal.solved:
            complain(f"{file}: {nominal.ended}")
            return Outcome.NO_SOLUTION
        with writing(folder):
            write_sensitivities(found, path)
    except DescriptionError as error:
        complain(render(error.mistakes).rstrip("\n"))
        return Outcome.INPUT_WRONG
    except WorkersLost as fault:
        complain(f"{file}: {fault}\n    cure: give it fewer --workers, if memory is short")
        return Outcome.NO_SOLUTION
    title = [opened.circuit.purpose, file] if opened.circuit.purpose else [file]
    lines = [*title, *sensitivity_lines(found), "", f"  Table: {path}.", "", *_warning(GENERAL), ""]
    say("\n".join(present_screen().fitted(lines)))
    return Outcome.ALL_HOLD if nominal.passes else Outcome.NOT_ALL_HOLD


def task_of(opened: Opened, sweep: PlannedSweep) -> Task:
    """What solving a sweep takes. Raises DescriptionError where nothing is required of its studies."""
    studies = judged_studies(opened.circuit, sweep.studies, f"sweep {sweep.name}")
    sentence = in_words(sweep.written) if sweep.written is not None else ""
    return Task(opened, plan_of(sweep, opened.circuit.lets, sentence), studies)


def judged_studies(circuit: Circuit, wanted: Sequence[str], where: str) -> tuple[str, ...]:
    """Those of the wanted studies, or of all, on which anything is required. Raises DescriptionError for none."""
    judged = {requirement.study for requirement in circuit.requirements}
    names = wanted or tuple(circuit.studies)
    studies = tuple(name for name in circuit.studies if name in names and name in judged)
    if not studies:
        cure = "Add a `require` line for one of its studies; its limits may be wide."
        raise DescriptionError([Mistake("nothing is required, so there is nothing to find", cure, file=where)])
    return studies


@contextmanager
def writing(folder: Path, cure: str = "Name a folder that can be written to with --out.") -> Iterator[None]:
    """Turns what the system says of files that can't be written into a mistake."""
    try:
        yield
    except OSError as error:
        what = f"the results can't be written: {error.strerror}"
        raise DescriptionError([Mistake(what, cure, file=str(folder))]) from error


def chosen_sweeps(circuit: Circuit, wanted: Sequence[str], file: str) -> list[PlannedSweep]:
    """The sweeps of these names, all for none. Raises DescriptionError for a name that no sweep has, and for a sweep
    whose table would take the place of another file."""
    known = {sweep.name: sweep for sweep in circuit.sweeps}
    mistakes = [_unknown(name, known, file) for name in wanted if name not in known]
    if not known:
        cure = "Add one, such as `sweep corners: extremes of each let`."
        mistakes.append(Mistake("there is no sweep in it", cure, file=file))
    for name, sweep in known.items():
        if name in (*TAKEN, *circuit.studies):
            what = f"the table of sweep {name} would take the place of {name}.csv of a run"
            mistakes.append(Mistake(what, "Give the sweep another name.", sweep.span))
    if mistakes:
        raise DescriptionError(mistakes)
    return [sweep for name, sweep in known.items() if not wanted or name in wanted]


def _unknown(name: str, known: Mapping[str, PlannedSweep], file: str) -> Mistake:
    near = nearest(name, known)
    cure = f"Did you mean {near}?" if near else f"Its sweeps: {', '.join(known) or 'none'}."
    return Mistake(f"no sweep is called {name}", cure, file=file)


def _solve(
    sweep: PlannedSweep, task: Task, crew: Crew, folder: Path, resume: bool, say: Say, complain: Say
) -> tuple[Results, Journal]:
    """Solve one sweep; its table is written once all of it is there, and its journal kept."""
    start = time.perf_counter()
    journal = Journal(folder / f"{sweep.name}.journal", fingerprint(task))
    path = folder / f"{sweep.name}.csv"
    try:
        with writing(folder, _CURE):
            keeping = Keeping(journal, _goes_on(journal, resume, complain))
            with progress(sweep.name, len(task.plan), complain) as tell:
                rows = list(solved_rows(task, crew, keeping, tell=tell))
            results = Results(task.plan, rows, task.claims, task.designs)
            write_sweep(results, path)
    except KeyboardInterrupt:
        complain(f"what is finished of {sweep.name} is kept in {journal.path}; run it again with --resume to go on")
        raise
    seconds = show_seconds(time.perf_counter() - start)
    screen = present_screen()
    lines = ["", *sweep_lines(results, sweep.label, screen.width), f"  Table: {path}. Solved in {seconds}."]
    say("\n".join(screen.painted(screen.fitted(lines))))
    return results, journal


def _goes_on(journal: Journal, resume: bool, complain: Say) -> bool:
    """Whether a sweep goes on with its journal. Finished work is not thrown away unasked, and what was damaged is
    told."""
    left = journal.left_by()
    if left and not resume:
        cure = "Add --resume to go on with it, or delete the file to start over."
        raise DescriptionError([Mistake("an interrupted run of this sweep is here", cure, file=str(journal.path))])
    damaged = journal.damaged() if resume else 0
    if damaged:
        lines = f"{damaged} damaged line{'s' * (damaged > 1)}"
        complain(f"{journal.path}: {lines} left out; the variants in question are solved again")
    return resume and journal.path.exists()
