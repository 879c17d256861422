"""The files of a run: traces, figures and verdicts as CSV by RFC 4180, and a summary for programs.

Knows proofs and how they are laid out in columns; works nothing out.
"""

from __future__ import annotations

import csv
import json
import math
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from pathlib import Path

from grammar.quantities import ANGLE, Quantity, unit_of
from simcore.figures.figure import Figure
from simcore.judge.bill import BillLine
from simcore.judge.cautions import cautions
from simcore.judge.outcome import Outcome
from simcore.judge.verdict import Verdict
from simcore.proof import Proof, ProvedStudy
from simcore.report.traces import TIME, recorded, traces
from simcore.report.writing import Opened, together, whole_file

FIGURE_COLUMNS = ("study", "subject", "figure", "value", "unit", "bound", "note")
VERDICT_COLUMNS = (
    "study",
    "requirement",
    "label",
    "verdict",
    "value",
    "unit",
    "bound",
    "limit",
    "upper limit",
    "margin",
    "margin bound",
    "reason",
)


BILL_COLUMNS = (
    "element",
    "kind",
    "stress",
    "study",
    "variant",
    "value",
    "unit",
    "bound",
    "rating",
    "unused share",
    "margin",
    "suggested rating",
)


def write_results(proof: Proof, folder: Path, description: str, bill: Sequence[BillLine] = ()) -> list[Path]:
    """Write all files of a proof to a folder, made where it is missing; description: the file that was proved; bill:
    where it was asked for. They take their names together, so that they are of one run."""
    with together() as opened:
        written = [path for write in WRITERS for path in write(proof, folder, description, opened)]
        return [*written, write_bill(bill, folder, opened)] if bill else written


def _write_traces(proof: Proof, folder: Path, description: str, opened: Opened) -> list[Path]:
    for name, study in proof.studies.items():
        write_table(folder / f"{name}.csv", *_trace(study), opened)
    return [folder / f"{name}.csv" for name in proof.studies]


def _write_figures(proof: Proof, folder: Path, description: str, opened: Opened) -> list[Path]:
    write_table(folder / "figures.csv", FIGURE_COLUMNS, _figure_rows(proof), opened)
    return [folder / "figures.csv"]


def _write_verdicts(proof: Proof, folder: Path, description: str, opened: Opened) -> list[Path]:
    rows = [_verdict_row(verdict) for verdict in proof.verdicts]
    write_table(folder / "verdicts.csv", VERDICT_COLUMNS, rows, opened)
    return [folder / "verdicts.csv"]


def _write_summary(proof: Proof, folder: Path, description: str, opened: Opened) -> list[Path]:
    with opened(folder / "summary.json") as file:
        json.dump(_summary(proof, description), file, indent=2, ensure_ascii=False, allow_nan=False)
        file.write("\n")
    return [folder / "summary.json"]


WRITERS: tuple[Callable[[Proof, Path, str, Opened], list[Path]], ...] = (
    _write_traces,
    _write_figures,
    _write_verdicts,
    _write_summary,
)
"""What every run writes: each from the proof, the folder, the description's file and what opens a file to
the files it wrote."""


def write_bill(bill: Sequence[BillLine], folder: Path, opened: Opened = whole_file) -> Path:
    """Write a bill of ratings to a folder, and say where it is."""
    path = folder / "bill.csv"
    write_table(path, BILL_COLUMNS, [_bill_row(line) for line in bill], opened)
    return path


def write_table(
    path: Path, columns: Sequence[str], rows: Iterable[Sequence[object]], opened: Opened = whole_file
) -> None:
    """Write a table as CSV; opened: what opens the file."""
    with opened(path) as file:
        writer = csv.writer(file)
        writer.writerow(columns)
        writer.writerows([_cell(value) for value in row] for row in rows)


def _cell(value: object) -> str:
    """A number in full double precision; nothing where there is none (a note or reason says why)."""
    if value is None:
        return ""
    return repr(value) if isinstance(value, float) else str(value)


def _trace(study: ProvedStudy) -> tuple[list[str], Iterator[Sequence[float]]]:
    sampled = traces(recorded(study.record), study.study.record_every)
    columns = [values.tolist() for values in (sampled.times, *sampled.columns.values())]
    return [TIME, *sampled.columns], zip(*columns, strict=True)


# --- figures and verdicts --------------------------------------------------------------------------------------------


def named_figures(study: ProvedStudy) -> Iterator[tuple[str, str, Figure]]:
    """What a study shows without being asked, as subject, name of the figure, and figure."""
    for row in study.signals:
        for name, figure in row.figures.items():
            yield row.name, name, figure
    for row in study.diodes:
        for name, figure in row.figures.items():
            yield row.name, name, figure
    for name, figure in vars(study.balance).items():
        if isinstance(figure, Figure):
            yield "energy", name.replace("_", " "), figure


def _figure_rows(proof: Proof) -> Iterator[Sequence[object]]:
    for name, study in proof.studies.items():
        for subject, title, figure in named_figures(study):
            yield (name, subject, title, *_numbers(figure), figure.note)


def _numbers(figure: Figure | None) -> tuple[float | None, str | None, float | None]:
    """Value, unit and bound, each None where there is none."""
    if figure is None:
        return None, None, None
    in_unit = math.degrees(1.0) if figure.dimension == ANGLE else 1.0
    bound = None if figure.bound is None else figure.bound * in_unit
    return _finite(figure.value * in_unit), unit_of(figure.dimension), _finite(bound)


def _finite(number: float | None) -> float | None:
    return None if number is None or not math.isfinite(number) else float(number)


def _verdict_row(verdict: Verdict) -> Sequence[object]:
    requirement = verdict.requirement
    margin, _, margin_bound = _numbers(verdict.margin)
    return (
        requirement.study,
        requirement.wording,
        requirement.label,
        str(verdict.state),
        *_numbers(verdict.figure),
        _numbers(verdict.limit)[0],
        _numbers(verdict.upper)[0],
        margin,
        margin_bound,
        verdict.reason,
    )


def _bill_row(line: BillLine) -> Sequence[object]:
    numbers = (line.rating, _finite(line.unused), line.margin, line.suggested)
    return line.name, line.kind, line.stress, line.study, line.variant, *_numbers(line.figure), *numbers


# --- the summary -----------------------------------------------------------------------------------------------------


def _summary(proof: Proof, description: str) -> dict[str, object]:
    circuit = proof.circuit
    return {
        "description": description,
        "purpose": circuit.purpose,
        "outcome": {"status": proof.outcome.status, "sentence": proof.outcome.sentence},
        "unsolved": list(proof.unsolved),
        "lets": {name: _value(let.value) for name, let in circuit.lets.items()},
        "studies": {name: _study_summary(study) for name, study in proof.studies.items()},
        "unrated": proof.unrated,
        "cautions": cautions(proof),
        "verdicts": [dict(zip(VERDICT_COLUMNS, _verdict_row(verdict), strict=True)) for verdict in proof.verdicts],
    }


def summaries(proofs: Mapping[str, tuple[Outcome, Proof | None]]) -> str:
    """The summaries of several descriptions as one JSON text: a list, also of one."""
    listed = [
        {"description": description, "outcome": {"status": outcome.status, "sentence": outcome.sentence}}
        if proof is None
        else _summary(proof, description)
        for description, (outcome, proof) in proofs.items()
    ]
    return json.dumps(listed, indent=2, ensure_ascii=False, allow_nan=False)


def _value(value: Quantity | str) -> object:
    if isinstance(value, str):
        return value
    number = math.degrees(value.value) if value.dimension == ANGLE else value.value
    return {"value": number, "unit": unit_of(value.dimension)}


def _study_summary(study: ProvedStudy) -> dict[str, object]:
    figures: dict[str, dict[str, object]] = {}
    for subject, title, figure in named_figures(study):
        value, unit, bound = _numbers(figure)
        figures.setdefault(subject, {})[title] = {"value": value, "unit": unit, "bound": bound, "note": figure.note}
    return {
        "kind": study.study.kind,
        "worst Kirchhoff sum": study.kirchhoff,
        "statistics": dict(study.statistics),
        "notes": list(study.notes),
        "figures": figures,
    }
