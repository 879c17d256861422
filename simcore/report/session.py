"""A call of the command: opens descriptions, proves them, writes their files and says what came out.

Everything wrong with any description is said before anything is solved, and then nothing is written.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from grammar.mistakes import DescriptionError, Mistake, render
from simcore.judge.outcome import Outcome, worst
from simcore.opening import Opened, open_design
from simcore.proof import Proof, chosen_studies, prove
from simcore.report.writing import why_unwritable
from simcore.solve.failure import NoSolution

Say = Callable[[str], None]


@dataclass(frozen=True)
class _Job:
    """A description to prove: the file, where its results go, the design and its studies."""

    file: str
    folder: Path
    opened: Opened
    studies: list[str]


def run_files(
    folders: Mapping[str, Path], wanted: Sequence[str], settings: Mapping[str, str], say: Say, complain: Say
) -> Outcome:
    """Prove each description and write its results; say is for people, complain for mistakes and progress.

    folders: description's file -> folder of its results; wanted: studies to solve, none for all; settings: let -> value
    """
    jobs, mistakes = [], []
    for file, folder in folders.items():
        opened, wrong = open_design(file, settings)
        studies: list[str] = []
        if not wrong:
            studies, wrong = chosen_studies(opened.circuit, wanted, file)
        jobs.append(_Job(file, folder, opened, studies))
        mistakes += wrong
        if against := why_unwritable(folder):
            mistakes.append(_unwritable(folder, against))
    if mistakes:
        complain(_rendered(mistakes))
        return Outcome.INPUT_WRONG
    outcomes = {job.file: _run(job, say, complain) for job in jobs}
    if len(jobs) > 1:
        from simcore.report.terminal import summary

        say(summary(outcomes))
    return worst(outcome for outcome, _ in outcomes.values())


def _run(job: _Job, say: Say, complain: Say) -> tuple[Outcome, Proof | None]:
    """Prove one description; its files are written only once all of it is there."""
    from simcore.report.files import write_results
    from simcore.report.terminal import report

    try:
        proof = prove(job.opened, job.studies)
    except DescriptionError as error:
        complain(_rendered(error.mistakes))
        return Outcome.INPUT_WRONG, None
    except NoSolution as failure:
        complain(f"{job.file}: {failure}")
        return Outcome.NO_SOLUTION, None
    try:
        files = write_results(proof, job.folder, job.file)
    except OSError as error:
        complain(_rendered([_unwritable(job.folder, error.strerror or str(error))]))
        return Outcome.INPUT_WRONG, None
    say(report(proof, job.file, files) + "\n")
    return proof.outcome, proof


def _unwritable(folder: Path, reason: str) -> Mistake:
    cure = "Name a folder that can be written to with --out."
    return Mistake(f"the results can't be written: {reason}", cure, file=str(folder))


def look_at(file: str, settings: Mapping[str, str], say: Say, complain: Say) -> Outcome:
    """Say how a description was understood, and solve nothing."""
    opened, mistakes = open_design(file, settings)
    if mistakes:
        complain(_rendered(mistakes))
        return Outcome.INPUT_WRONG
    from simcore.design.overview import describe
    from simcore.report.look import look

    say(look(describe(opened.circuit), file))
    return Outcome.ALL_HOLD


def _rendered(mistakes: Sequence[Mistake]) -> str:
    return render(mistakes).rstrip("\n")
