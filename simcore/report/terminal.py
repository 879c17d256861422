"""What a person reads of a run: purpose, what each study found and how sure it is, what it cost, and the verdicts.

Knows proofs and how tables line up; works nothing out.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from grammar.quantities import Dimension
from simcore.design.overview import sentence
from simcore.figures.figure import Figure
from simcore.figures.overview import Balance, Row
from simcore.judge.bill import BillLine
from simcore.judge.cautions import cautions
from simcore.judge.outcome import Outcome, State
from simcore.judge.verdict import Verdict
from simcore.proof import Proof, ProvedStudy
from simcore.report import words
from simcore.report.screen import Screen
from simcore.report.tables import INDENT, table

DIODE_HEADINGS = {"mean": "mean current", "rms": "rms current", "peak": "peak current"}
"""Where a column of the diode table needs more words than its figure has."""


def report(
    proof: Proof, description: str, files: Sequence[Path], bill: Sequence[BillLine] = (), screen: Screen | None = None
) -> str:
    """The whole report of one description; bill: where it was asked for; screen: what it is shown on."""
    screen = screen or Screen()
    width = screen.width
    lines = [proof.circuit.purpose, description] if proof.circuit.purpose else [description]
    for name, study in proof.studies.items():
        lines += ["", *study_lines(name, study, width)]
    if bill:
        lines += ["", *bill_lines(bill, width)]
    lines += ["", *verdict_lines(proof.verdicts, width), *(INDENT + line for line in words.unrated(proof.unrated)), ""]
    if proof.unsolved:
        lines.append(f"Interrupted: {', '.join(proof.unsolved)} not solved. Of what was solved:")
    lines.append(f"{words.closing(proof.verdicts)} Solved in {show_seconds(proof.seconds)}.")
    lines.append(f"Files in {files[0].parent}: {', '.join(path.name for path in files)}")
    lines += ["", "Cautions", *(INDENT + caution for caution in cautions(proof))]
    return "\n".join(screen.painted(screen.fitted(lines)))


# --- a study ---------------------------------------------------------------------------------------------------------


def study_lines(name: str, study: ProvedStudy, width: int | None = None) -> list[str]:
    """What one study found: its signals, its diodes, its energy and what it cost."""
    title = f"{name} ({study.study.label})" if study.study.label else name
    lines = [f"{title}: {sentence(study.study)}"]
    lines += figure_table("signal", study.signals, {}, width)
    if study.diodes:
        lines += ["", *figure_table("diode", study.diodes, DIODE_HEADINGS, width)]
    lines += ["", INDENT + energy_line(study.balance), INDENT + cost_line(study)]
    return lines + [INDENT + note for note in study.notes]


def figure_table(subject: str, rows: Sequence[Row], wording: Mapping[str, str], width: int | None = None) -> list[str]:
    """A table of figures, with the largest bound of each column below it: one line for what is in V, one for what is in
    A, and so on."""
    columns = list(rows[0].figures)
    cells = [[row_name(row), *(words.row_value(row, column) for column in columns)] for row in rows]
    alike: dict[tuple[Dimension, ...], list[Row]] = {}
    for row in rows:
        alike.setdefault(tuple(figure.dimension for figure in row.figures.values()), []).append(row)
    bounds = [
        ["± at most", *(words.largest_bound(row.figures[column] for row in group) for column in columns)]
        for group in alike.values()
    ]
    headings = [subject, *(wording.get(column, column) for column in columns)]
    lines = table(headings, [*cells, *bounds], width=width)
    return lines + [INDENT + note for note in _notes(rows)]


def _notes(rows: Sequence[Row]) -> list[str]:
    """What must be known of figures, once for all rows that it is true of."""
    found: dict[tuple[str, str], list[str]] = {}
    for row in rows:
        for column, figure in row.figures.items():
            if figure.note:
                found.setdefault((column, figure.note), []).append(row.name)
    return [f"{column} of {', '.join(names)}: {note}" for (column, note), names in found.items()]


def row_name(row: Row) -> str:
    """What a row is about, with its wording."""
    return f"{row.name} ({row.label})" if row.label else row.name


def energy_line(balance: Balance) -> str:
    """The energy books of a study, in one sentence."""
    went = ((balance.loads, "loads"), (balance.diodes, "diodes"), (balance.windings_and_leads, "windings and leads"))
    parts = ", ".join(f"{words.value(figure)} to {where}" for figure, where in went)
    closes = f"the books close to {_share(balance.share)}" if balance.share.defined else balance.share.note
    if balance.note:
        closes += f" ({balance.note})"
    delivered, stored = words.value(balance.delivered), words.value(balance.stored)
    return f"energy: {delivered} delivered; {parts}; {stored} more stored; {closes}"


def _share(figure: Figure) -> str:
    return f"{figure.value:.1e} of what flowed"


def cost_line(study: ProvedStudy) -> str:
    """What a study cost, and the worst sum of currents."""
    counts = ", ".join(f"{count:.0f} {name}" for name, count in study.statistics.items() if count)
    return f"cost: {counts}; worst Kirchhoff sum {study.kirchhoff:.1e} of the currents at its node"


# --- ratings and verdicts --------------------------------------------------------------------------------------------


def bill_lines(bill: Sequence[BillLine], width: int | None = None) -> list[str]:
    """The bill of ratings; where it would not fit as one table, its bounds are left to the file."""
    lines = table(words.BILL_HEADINGS, [words.bill_cells(line) for line in bill], 3, width, 0)
    note = words.bill_note(bill)
    if "" in lines:
        lines = table(words.BILL_HEADINGS, [words.bill_cells(line, bounds=False) for line in bill], 3, width, 0)
        note += "; the bounds of what was found stand in bill.csv"
    return ["Bill of ratings", *lines, INDENT + note]


def verdict_lines(verdicts: Sequence[Verdict], width: int | None = None) -> list[str]:
    """The table of requirements, and below it why any was not decided."""
    if not verdicts:
        return ["No requirement was judged."]
    cells = [words.verdict_cells(verdict) for verdict in verdicts]
    lines = ["Requirements", *table(words.VERDICT_HEADINGS, cells, 3, width, 1)]
    return lines + [INDENT + reason for reason in words.reasons(verdicts)]


def failures(proof: Proof, description: str, screen: Screen) -> str:
    """Only what does not hold; "" where all does."""
    wrong = [verdict for verdict in proof.verdicts if verdict.state is not State.HOLDS]
    if not wrong:
        return ""
    lines = [description, *verdict_lines(wrong, screen.width)[1:]]
    return "\n".join(screen.painted(screen.fitted(lines)))


def show_seconds(seconds: float) -> str:
    """A stretch of wall-clock time, as exact as it is worth."""
    return f"{seconds:.2f} s"


# --- several files ---------------------------------------------------------------------------------------------------


def summary(outcomes: Mapping[str, tuple[Outcome, Proof | None]], width: int | None = None) -> str:
    """One line a description, for a run over several."""
    rows = [
        [description, outcome.sentence if proof is None else words.closing(proof.verdicts)]
        for description, (outcome, proof) in outcomes.items()
    ]
    return "\n".join(["Summary", *table(["description", "outcome"], rows, 2, width)])
