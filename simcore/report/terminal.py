"""What a person reads of a run: purpose, what each study found and how sure it is, what it cost, and the verdicts.

Knows proofs and how numbers are written; works nothing out.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from grammar.quantities import show
from grammar.writer import write_expression
from simcore.design.overview import sentence
from simcore.figures.figure import Figure
from simcore.figures.overview import Balance, Row
from simcore.judge.outcome import Outcome, State
from simcore.judge.verdict import Verdict
from simcore.proof import Proof, ProvedStudy
from simcore.report.tables import INDENT, table

CAUTION = (
    "Caution: this speaks of the description, not of what is built. Mains voltage and charged capacitors kill; keep to"
    " local codes and licensed practice."
)

DIODE_HEADINGS = {"mean": "mean current", "rms": "rms current", "peak": "peak current"}
"""Where a column of the diode table needs more words than its figure has."""

BOUND_DIGITS = 2


def report(proof: Proof, description: str, files: Sequence[Path]) -> str:
    """The whole report of one description."""
    lines = [proof.circuit.purpose, description] if proof.circuit.purpose else [description]
    for name, study in proof.studies.items():
        lines += ["", *study_lines(name, study)]
    lines += ["", *verdict_lines(proof.verdicts), *unrated_lines(proof.unrated), ""]
    lines.append(f"{closing(proof.verdicts)} Solved in {show_seconds(proof.seconds)}.")
    lines += [f"Files in {files[0].parent}: {', '.join(path.name for path in files)}", CAUTION]
    return "\n".join(lines)


# --- a study ---------------------------------------------------------------------------------------------------------


def study_lines(name: str, study: ProvedStudy) -> list[str]:
    """What one study found: its signals, its diodes, its energy and what it cost."""
    title = f"{name} ({study.study.label})" if study.study.label else name
    lines = [f"{title}: {sentence(study.study)}"]
    lines += figure_table("signal", study.signals, {})
    if study.diodes:
        lines += ["", *figure_table("diode", study.diodes, DIODE_HEADINGS)]
    lines += ["", INDENT + energy_line(study.balance), INDENT + cost_line(study)]
    return lines + [INDENT + note for note in study.notes]


def figure_table(subject: str, rows: Sequence[Row], wording: Mapping[str, str]) -> list[str]:
    """A table of figures, with the largest bound of each column below it."""
    columns = list(rows[0].figures)
    cells = [[_row_name(row), *(_value(row.figures[column]) for column in columns)] for row in rows]
    bounds = [_largest_bound(row.figures[column] for row in rows) for column in columns]
    headings = [subject, *(wording.get(column, column) for column in columns)]
    notes = dict.fromkeys(
        f"{row.name}, {column}: {figure.note}" for row in rows for column, figure in row.figures.items() if figure.note
    )
    return table(headings, [*cells, ["± at most", *bounds]]) + [INDENT + note for note in notes]


def _row_name(row: Row) -> str:
    return f"{row.name} ({row.label})" if row.label else row.name


def _value(figure: Figure) -> str:
    if not figure.defined:
        return "undefined"
    if math.isinf(figure.value):
        return "never" if figure.beyond is None else f"later than {show(figure.beyond, figure.dimension)}"
    return show(figure.value, figure.dimension)


def _largest_bound(figures: Iterable[Figure]) -> str:
    known = [figure for figure in figures if figure.bound is not None and figure.defined]
    if not known:
        return "-"
    largest = max(known, key=lambda figure: figure.bound or 0.0)
    return _bound(largest)


def _bound(figure: Figure) -> str:
    if figure.bound is None:
        return "-"
    if math.isinf(figure.bound):
        return "unknown"
    return show(figure.bound, figure.dimension, BOUND_DIGITS)


def energy_line(balance: Balance) -> str:
    """The energy books of a study, in one sentence."""
    went = ((balance.loads, "loads"), (balance.diodes, "diodes"), (balance.windings_and_leads, "windings and leads"))
    parts = ", ".join(f"{_value(figure)} to {where}" for figure, where in went)
    closes = f"the books close to {_share(balance.share)}" if balance.share.defined else balance.share.note
    if balance.note:
        closes += f" ({balance.note})"
    return f"energy: {_value(balance.delivered)} delivered; {parts}; {_value(balance.stored)} more stored; {closes}"


def _share(figure: Figure) -> str:
    return f"{figure.value:.1e} of it"


def cost_line(study: ProvedStudy) -> str:
    """What a study cost, and the worst sum of currents."""
    counts = ", ".join(f"{name} {count:.0f}" for name, count in study.statistics.items() if count)
    return f"cost: {counts}; worst Kirchhoff sum {study.kirchhoff:.1e} of the currents at its node"


# --- verdicts --------------------------------------------------------------------------------------------------------


def verdict_lines(verdicts: Sequence[Verdict]) -> list[str]:
    """The table of requirements, and below it why any was not decided."""
    if not verdicts:
        return ["No requirement was judged."]
    headings = ["verdict", "study", "requirement", "required", "found", "margin"]
    lines = ["Requirements", *table(headings, [_verdict_cells(verdict) for verdict in verdicts], left=3)]
    reasons: dict[str, dict[str, None]] = {}
    for verdict in verdicts:
        if verdict.reason:
            reasons.setdefault(verdict.reason, {})[_subject(verdict)] = None
    return lines + [f"{INDENT}{', '.join(subjects)}: {reason}" for reason, subjects in reasons.items()]


def unrated_lines(names: Sequence[str]) -> list[str]:
    """Which elements had no rating to be held against."""
    return [f"{INDENT}no rating is given of {', '.join(names)}"] if names else []


def _verdict_cells(verdict: Verdict) -> list[str]:
    margin = _value(verdict.margin) if verdict.margin is not None else "-"
    required = _required(verdict)
    return [str(verdict.state), verdict.requirement.study, _subject(verdict), required, _found(verdict), margin]


def _subject(verdict: Verdict) -> str:
    requirement = verdict.requirement
    if requirement.label:
        return requirement.label
    return requirement.wording if requirement.figure is None else write_expression(requirement.figure)


def _required(verdict: Verdict) -> str:
    if verdict.limit is None:
        return "-"
    if verdict.upper is not None:
        return f"{_value(verdict.limit)} to {_value(verdict.upper)}"
    return f"{verdict.requirement.relation} {_value(verdict.limit)}"


def _found(verdict: Verdict) -> str:
    if verdict.figure is None:
        return "-"
    value = _value(verdict.figure)
    if not verdict.figure.defined or math.isinf(verdict.figure.value):
        return value
    return f"{value} ± {_bound(verdict.figure)}"


def closing(verdicts: Sequence[Verdict]) -> str:
    """How many requirements came to what, in one sentence."""
    if not verdicts:
        return "Nothing was required."
    counts = {state: sum(verdict.state is state for verdict in verdicts) for state in State}
    if counts[State.HOLDS] == len(verdicts):
        return f"All {len(verdicts)} requirements hold." if len(verdicts) > 1 else "The requirement holds."
    return f"Of {len(verdicts)}: " + ", ".join(f"{count} {state}" for state, count in counts.items() if count) + "."


def show_seconds(seconds: float) -> str:
    """A stretch of wall-clock time, as exact as it is worth."""
    return f"{seconds:.2f} s"


# --- several files ---------------------------------------------------------------------------------------------------


def summary(outcomes: Mapping[str, tuple[Outcome, Proof | None]]) -> str:
    """One line a description, for a run over several."""
    rows = [
        [description, outcome.sentence if proof is None else closing(proof.verdicts)]
        for description, (outcome, proof) in outcomes.items()
    ]
    return "\n".join(["Summary", *table(["description", "outcome"], rows, left=2)])
