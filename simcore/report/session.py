"""A call of the command: opens descriptions, proves them, writes their files and says what came out.

Everything wrong with any description is said before anything is solved, and then nothing is written.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from grammar.mistakes import DescriptionError, Mistake, render
from simcore.judge.outcome import Outcome, worst
from simcore.opening import Opened, open_design
from simcore.proof import PartProved, Proof, chosen_studies, prove
from simcore.report.writing import why_unwritable
from simcore.solve.failure import NoSolution

if TYPE_CHECKING:
    from simcore.judge.bill import BillLine

Say = Callable[[str], None]


@dataclass(frozen=True)
class Wishes:
    """What a run is asked for beside its results.

    bill: the bill of ratings; page, junit: files to write; quiet: say only what does not hold; as_json: say the
    summaries as JSON and nothing else
    """

    bill: bool = False
    page: Path | None = None
    junit: Path | None = None
    quiet: bool = False
    as_json: bool = False


@dataclass(frozen=True)
class Job:
    """A description to prove: the file, where its results go, the design and its studies."""

    file: str
    folder: Path
    opened: Opened
    studies: list[str]


@dataclass(frozen=True)
class Ended:
    """How a job ended; proof: what it came to, else None and why as text."""

    job: Job
    outcome: Outcome
    proof: Proof | None = None
    why: str = ""


def open_jobs(
    folders: Mapping[str, Path], wanted: Sequence[str], settings: Mapping[str, str], complain: Say
) -> list[Job] | None:
    """Open every description; None, with all mistakes said, where one is wrong.

    folders: description's file -> folder of its results; wanted: studies to solve, none for all; settings: let -> value
    """
    jobs, mistakes = [], []
    for file, folder in folders.items():
        opened, wrong = open_design(file, settings)
        studies: list[str] = []
        if not wrong:
            studies, wrong = chosen_studies(opened.circuit, wanted, file)
        jobs.append(Job(file, folder, opened, studies))
        mistakes += wrong
        if against := why_unwritable(folder):
            mistakes.append(_unwritable(folder, against))
    if mistakes:
        complain(rendered(mistakes))
        return None
    return jobs


def proved(job: Job, complain: Say) -> Ended:
    """Prove one description; what stops that is said."""
    from simcore.report.progress import watching

    try:
        with watching(job.file, job.opened.circuit, job.studies, complain) as watch:
            proof = prove(job.opened, job.studies, watch)
    except DescriptionError as error:
        complain(rendered(error.mistakes))
        return Ended(job, Outcome.INPUT_WRONG, why=str(error))
    except NoSolution as failure:
        complain(f"{job.file}: {failure}")
        return Ended(job, Outcome.NO_SOLUTION, why=str(failure))
    return Ended(job, proof.outcome, proof)


def run_files(
    folders: Mapping[str, Path],
    wanted: Sequence[str],
    settings: Mapping[str, str],
    say: Say,
    complain: Say,
    wishes: Wishes | None = None,
) -> Outcome:
    """Prove each description and write its results; say is for what was asked, complain for mistakes and progress."""
    wishes = wishes or Wishes()
    jobs = open_jobs(folders, wanted, settings, complain)
    if jobs is None:
        return Outcome.INPUT_WRONG
    ended = [_run(job, wishes, say, complain) for job in jobs]
    if wishes.as_json:
        from simcore.report.files import summaries

        say(summaries({each.job.file: (each.outcome, each.proof) for each in ended}))
    elif len(jobs) > 1 and not wishes.quiet:
        from simcore.report.screen import present_screen
        from simcore.report.terminal import summary

        say(summary({each.job.file: (each.outcome, each.proof) for each in ended}, present_screen().width))
    outcomes = [each.outcome for each in ended]
    if wishes.junit is not None and not _report_tests(wishes.junit, ended, complain):
        outcomes.append(Outcome.INPUT_WRONG)
    return worst(outcomes)


def _run(job: Job, wishes: Wishes, say: Say, complain: Say) -> Ended:
    """Prove one description; its files are written only once all of it is there, or an interrupt ends it after some of
    its studies. Then it goes on as an interrupt."""
    try:
        ended = proved(job, complain)
    except PartProved as part:
        _tell(Ended(job, part.proof.outcome, part.proof), wishes, say, complain)
        raise
    return ended if ended.proof is None else _tell(ended, wishes, say, complain)


def _tell(ended: Ended, wishes: Wishes, say: Say, complain: Say) -> Ended:
    """Write the files of a proof, and say what was found."""
    from simcore.report.screen import present_screen
    from simcore.report.terminal import failures, report

    job, proof = ended.job, ended.proof
    assert proof is not None
    bill: list[BillLine] = []
    files: list[Path] = []
    if wishes.bill:
        from simcore.judge.bill import bill_of

        bill = bill_of(proof)

    def write() -> None:
        from simcore.report.files import write_results

        files.extend(write_results(proof, job.folder, job.file, bill))
        if wishes.page is not None:
            from simcore.report.page import write_page

            write_page(wishes.page, proof, job.opened.project)

    if not written(write, wishes.page or job.folder, complain):
        return Ended(job, Outcome.INPUT_WRONG, why="the results can't be written")
    if wishes.quiet:
        text = failures(proof, job.file, present_screen())
        if text:
            say(text)
    elif not wishes.as_json:
        say(report(proof, job.file, files, bill, present_screen()) + "\n")
    return ended


def written(write: Callable[[], None], place: Path, complain: Say) -> bool:
    """Write, or say why that can't be done."""
    try:
        write()
    except OSError as error:
        complain(rendered([_unwritable(place, error.strerror or str(error))]))
        return False
    return True


def _report_tests(path: Path, ended: Sequence[Ended], complain: Say) -> bool:
    from simcore.report.junit import Suite, verdict_case, write_junit

    suites = [
        Suite(each.job.file, [], each.why)
        if each.proof is None
        else Suite(each.job.file, [verdict_case(verdict) for verdict in each.proof.verdicts], "", each.proof.seconds)
        for each in ended
    ]
    return written(lambda: write_junit(path, suites), path, complain)


def _unwritable(folder: Path, reason: str) -> Mistake:
    cure = "Name a folder that can be written to with --out."
    return Mistake(f"the results can't be written: {reason}", cure, file=str(folder))


def look_at(file: str, settings: Mapping[str, str], say: Say, complain: Say) -> Outcome:
    """Say how a description was understood, and solve nothing."""
    opened, mistakes = open_design(file, settings)
    if mistakes:
        complain(rendered(mistakes))
        return Outcome.INPUT_WRONG
    from simcore.design.overview import describe
    from simcore.report.look import look
    from simcore.report.screen import present_screen

    say(look(describe(opened.circuit), file, present_screen()))
    return Outcome.ALL_HOLD


def rendered(mistakes: Sequence[Mistake]) -> str:
    """Mistakes as a person reads them."""
    return render(mistakes).rstrip("\n")
