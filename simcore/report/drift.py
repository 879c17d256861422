"""Figures kept and compared: what `bulkrail keep` and `bulkrail compare` say and write.

Knows proofs and kept files; works no figure out.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from pathlib import Path

from grammar.mistakes import Mistake
from grammar.quantities import quantity, show
from simcore.judge.outcome import Outcome, worst
from simcore.proof import Proof
from simcore.report.baseline import (
    Drift,
    Kept,
    KeptFileError,
    Key,
    compared,
    figures_to_keep,
    kept_path,
    read_kept,
    write_kept,
)
from simcore.report.junit import Case, Suite, write_junit
from simcore.report.screen import Screen, present_screen
from simcore.report.session import Say, open_jobs, proved, rendered, written
from simcore.report.tables import INDENT, table

HEADINGS = ("study", "figure", "was", "is", "moved", "bounds allow")
MOST_SHOWN = 30
"""Figures that drifted: more are counted, and all are in the test report."""


def keep_files(files: Sequence[str], say: Say, complain: Say) -> Outcome:
    """Solve designs and keep their figures beside them; nothing is kept where one can't be solved."""
    jobs = open_jobs({file: Path() for file in files}, [], {}, complain)
    if jobs is None:
        return Outcome.INPUT_WRONG
    ended = [proved(job, complain) for job in jobs]
    stopped = [each.outcome for each in ended if each.proof is None]
    if stopped:
        return worst(stopped)
    for each in ended:
        assert each.proof is not None
        path, figures = kept_path(Path(each.job.file)), figures_to_keep(each.proof)
        if not written(lambda path=path, figures=figures: write_kept(path, figures), path, complain):  # type: ignore[misc]
            return Outcome.INPUT_WRONG
        say(f"{each.job.file}: {len(figures)} figures kept in {path}")
    return Outcome.ALL_HOLD


def compare_files(
    files: Sequence[str], junit: Path | None, say: Say, complain: Say, quiet: bool = False, as_json: bool = False
) -> Outcome:
    """Solve designs again and say what drifted from the kept figures; also write it as a test report where asked.

    quiet: say only what drifted or is missing; as_json: say it as JSON and nothing else
    """
    kept: dict[str, dict[Key, Kept]] = {}
    mistakes = []
    for file in files:
        try:
            kept[file] = read_kept(kept_path(Path(file)))
        except KeptFileError as error:
            cure = f"Run `bulkrail keep {file}` while the figures are right."
            mistakes.append(Mistake(str(error), cure, file=str(kept_path(Path(file)))))
    jobs = open_jobs({file: Path() for file in files}, [], {}, complain)
    if mistakes:
        complain(rendered(mistakes))
    if jobs is None or mistakes:
        return Outcome.INPUT_WRONG
    outcomes, suites, listed, screen = [], [], [], present_screen()
    for job in jobs:
        ended = proved(job, complain)
        outcomes.append(ended.outcome)
        if ended.proof is None:
            suites.append(Suite(job.file, [], ended.why))
            listed.append({"description": job.file, "outcome": ended.outcome.status, "why": ended.why})
            continue
        outcomes[-1], text, suite = _one(job.file, kept[job.file], ended.proof, screen)
        if not (as_json or quiet and outcomes[-1] is Outcome.ALL_HOLD):
            say(text)
        suites.append(suite)
        listed.append(_listed(job.file, outcomes[-1], kept[job.file], ended.proof))
    if as_json:
        say(json.dumps(listed, indent=2, ensure_ascii=False, allow_nan=False))
    if junit is not None and not written(lambda: write_junit(junit, suites), junit, complain):
        outcomes.append(Outcome.INPUT_WRONG)
    return worst(outcomes)


def _one(file: str, was: Mapping[Key, Kept], proof: Proof, screen: Screen) -> tuple[Outcome, str, Suite]:
    """How a design compares: the outcome, the text and the test report."""
    now = figures_to_keep(proof)
    drifted, missing, new = compared(was, now)
    same = len(was) - len(drifted) - len(missing)
    lines = [f"{file}: {same} figures as kept, {len(drifted)} drifted, {len(missing)} missing, {len(new)} new"]
    if drifted:
        shown = sorted(drifted, key=_share, reverse=True)[:MOST_SHOWN]
        lines += table(HEADINGS, [_cells(drift) for drift in shown], 2, screen.width)
        if len(drifted) > len(shown):
            left = f"and {len(drifted) - len(shown)} more that moved by a smaller share; `--junit FILE.xml` lists all"
            lines.append(INDENT + left)
    lines += [*_gathered("missing", missing), *_gathered("new", new)]
    if drifted or missing or new:
        lines.append(f"{INDENT}if this is right: `bulkrail keep {file}` takes today's figures")
    bad = {drift.key: drift for drift in (*drifted, *missing)}
    cases = [_case(key, bad.get(key)) for key in dict.fromkeys((*was, *now))]
    outcome = Outcome.NOT_ALL_HOLD if bad else Outcome.ALL_HOLD
    return outcome, "\n".join(screen.fitted(lines)), Suite(file, cases, "", proof.seconds)


def _listed(file: str, outcome: Outcome, was: Mapping[Key, Kept], proof: Proof) -> dict[str, object]:
    """How a design compares, for programs; a number that there is none of is null."""
    found: dict[str, object] = {"description": file, "outcome": outcome.status}
    for name, drifts in zip(("drifted", "missing", "new"), compared(was, figures_to_keep(proof)), strict=True):
        found[name] = [
            {
                **dict(zip(("study", "subject", "figure"), drift.key, strict=True)),
                "was": _plain(drift.was),
                "is": _plain(drift.now),
                "bounds allow": drift.allowed if math.isfinite(drift.allowed) else None,
                "unit": (drift.now or drift.was or _NOTHING).unit,
            }
            for drift in drifts
        ]
    return found


def _plain(kept: Kept | None) -> float | None:
    return kept.value if kept is not None and math.isfinite(kept.value) else None


def _share(drift: Drift) -> float:
    """By how much of itself a figure moved; what became or ceased to be a number moved most."""
    if drift.was is None or drift.now is None or not math.isfinite(drift.now.value - drift.was.value):
        return math.inf
    return abs(drift.now.value - drift.was.value) / max(abs(drift.was.value), abs(drift.now.value))


def _gathered(what: str, drifts: Sequence[Drift]) -> list[str]:
    """Figures that stand on one side only, one line for all of one signal or diode of a study."""
    found: dict[tuple[str, str], list[str]] = {}
    for drift in drifts:
        study, subject, title = drift.key
        found.setdefault((study, subject), []).append(title)
    return [f"{INDENT}{what} in {study}: {subject}, {', '.join(titles)}" for (study, subject), titles in found.items()]


def _cells(drift: Drift) -> list[str]:
    study, subject, title = drift.key
    unit = (drift.now or drift.was or _NOTHING).unit
    moved = "-"
    if drift.was is not None and drift.now is not None:
        moved = _number(drift.now.value - drift.was.value, unit, 3)
    figures = [_number((each or _NOTHING).value, unit) for each in (drift.was, drift.now)]
    return [study, f"{subject}, {title}", *figures, moved, _number(drift.allowed, unit, 2)]


_NOTHING = Kept(math.nan, "", 0.0)


def _number(value: float, unit: str, digits: int = 6) -> str:
    """A number with the prefix that suits it."""
    if math.isnan(value):
        return "undefined"
    if math.isinf(value):
        return "never"
    held = quantity(value, unit)
    return show(held.value, held.dimension, digits)


def _case(key: Key, drift: Drift | None) -> Case:
    study, subject, title = key
    failure = ""
    if drift is not None:
        failure = "missing" if drift.now is None else "drifted"
    text = "" if drift is None else ", ".join(f"{a} {b}" for a, b in zip(HEADINGS[2:], _cells(drift)[2:], strict=True))
    return Case(study, f"{subject}, {title}", failure, text)
