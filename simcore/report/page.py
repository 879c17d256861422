"""The report as one HTML page that needs nothing else: no network, no scripts; what a user wrote is escaped.

Knows proofs, words and pictures; works nothing out.
"""

from __future__ import annotations

import platform
from collections.abc import Iterator, Sequence
from html import escape
from importlib.metadata import version
from pathlib import Path

from simcore import __version__
from simcore.design.files import Project, Unit
from simcore.design.overview import sentence
from simcore.figures.overview import Row
from simcore.judge.bill import BillLine, bill_of
from simcore.judge.cautions import cautions
from simcore.judge.outcome import State
from simcore.proof import Proof, ProvedStudy
from simcore.report import words
from simcore.report.diagram import diagram_of, diagram_svg
from simcore.report.panels import bars_of, picture_of
from simcore.report.svg import bars_svg, picture_svg
from simcore.report.sweeps import WORST_HEADINGS, Swept
from simcore.report.terminal import DIODE_HEADINGS, cost_line, energy_line, row_name
from simcore.report.writing import whole_file

_STYLE = """
body { font: 15px/1.45 sans-serif; color: #222; background: #fff; max-width: 72em; margin: 2em auto; padding: 0 1em; }
h1 { font-size: 1.5em; } h3 { font-size: 1em; } p, li { max-width: 60em; }
h2 { font-size: 1.15em; margin-top: 2em; border-bottom: 1px solid #bbb; }
table { border-collapse: collapse; margin: 0.6em 0 1em; font-size: 0.87em; display: block; overflow-x: auto; }
th, td { padding: 0.2em 1.3em 0.2em 0; text-align: left; vertical-align: top; }
th { border-bottom: 1px solid #888; font-weight: 600; } td.number, th.number { text-align: right; white-space: nowrap; }
.fails { color: #8a1f11; font-weight: 700; } .holds { color: #2b5d34; } .open { color: #7a5a00; font-weight: 600; }
pre { background: #f6f6f4; padding: 0.8em; overflow-x: auto; font-size: 0.85em; }
svg { width: 100%; height: auto; } .trace { max-width: 60em; }
.wide { overflow-x: auto; } .wide div { max-width: 100%; }
@media print {
  body { margin: 0; max-width: none; } h2 { break-after: avoid; } svg { break-inside: avoid; }
  .wide div { min-width: 0 !important; }
}
"""

SMALLEST = 0.55
"""Of its size: what a diagram is scaled down to before it has to be scrolled."""

_SURE = (
    "Every figure is an integral or an extremum of the solution, not of samples. What follows ± bounds its numerical "
    "error: each study was solved twice, and the bound is twice the difference of both solutions and what rounding "
    "leaves. A verdict holds or fails only where that bound lies on one side of the limit. The bound speaks of the "
    "arithmetic, not of the parts."
)

_STATES = {State.HOLDS: "holds", State.FAILS: "fails"}


def write_page(
    path: Path,
    proof: Proof,
    project: Project,
    sweeps: Sequence[Swept] = (),
    bill: Sequence[BillLine] | None = None,
) -> None:
    """Write the page of a proved design."""
    with whole_file(path) as file:
        file.write(page(proof, project, sweeps, bill))


def page(proof: Proof, project: Project, sweeps: Sequence[Swept] = (), bill: Sequence[BillLine] | None = None) -> str:
    """The page as text; sweeps: whose worst cases it shows; bill: over them too, else that of the proof alone."""
    title = proof.circuit.purpose or proof.circuit.name
    sections = [
        f"<h1>{escape(title)}</h1>",
        f"<p>{escape(words.closing(proof.verdicts))}</p>",
        *_required(proof),
        "<h2>How sure this is</h2>",
        f"<p>{escape(_SURE)}</p>",
        *_circuit(proof),
        *_found(proof),
        *_harmonics(proof),
        *_worst(sweeps),
        *_bill(bill_of(proof) if bill is None else bill),
        "<h2>Cautions</h2>",
        _list(cautions(proof)),
        "<h2>The description</h2>",
        *_texts(project),
        f"<p>{escape(_made())}</p>",
    ]
    head = (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'\">\n"
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{escape(title)}</title>\n<style>{_STYLE}</style>\n</head>\n<body>\n"
    )
    return head + "\n".join(sections) + "\n</body>\n</html>\n"


def _made() -> str:
    """By what the page was made: numbers may differ in their last digits with other versions."""
    versions = ", ".join(f"{name} {version(name)}" for name in ("numpy", "scipy"))
    return f"Made by Bulkrail {__version__}, with Python {platform.python_version()}, {versions}."


def _worst(sweeps: Sequence[Swept]) -> Iterator[str]:
    for sweep in sweeps:
        yield f"<h2>Worst cases of {escape(sweep.title)}</h2>"
        yield _table(WORST_HEADINGS, sweep.worst, 3)
        yield _list(sweep.sums)
        if sweep.variants:
            yield f"<pre>{escape(chr(10).join(sweep.variants))}</pre>"


def _required(proof: Proof) -> Iterator[str]:
    yield "<h2>What was required and found</h2>"
    if not proof.verdicts:
        yield "<p>Nothing was required.</p>"
        return
    rows = [words.verdict_cells(verdict) for verdict in proof.verdicts]
    yield _table(words.VERDICT_HEADINGS, rows, 3)
    notes = [*words.reasons(proof.verdicts), *words.unrated(proof.unrated)]
    if notes:
        yield _list(notes)


def _circuit(proof: Proof) -> Iterator[str]:
    diagram = diagram_of(proof.circuit)
    if diagram is not None:
        yield "<h2>The circuit</h2>"
        sizes = f"width: {diagram.width:.0f}px; min-width: {SMALLEST * diagram.width:.0f}px"
        yield f'<div class="wide"><div style="{sizes}">{diagram_svg(diagram)}</div></div>'


def _framed(picture: str) -> str:
    """A picture no wider than it is good for."""
    return f'<div class="trace">{picture}</div>'


def _harmonics(proof: Proof) -> Iterator[str]:
    for bars in bars_of(proof):
        yield f"<h2>{escape(bars.title)}</h2>"
        yield _framed(bars_svg(bars))
        yield _table(words.HARMONIC_HEADINGS, [words.harmonic_cells(row) for row in bars.rows], 1)


def _found(proof: Proof) -> Iterator[str]:
    for name, study in proof.studies.items():
        title = f"{name} ({study.study.label})" if study.study.label else name
        yield f"<h2>{escape(title)}</h2>"
        yield f"<p>{escape(sentence(study.study))}</p>"
        picture = picture_of(name, study)
        if picture is not None:
            yield _framed(picture_svg(picture))
        yield from _figures(study)
        yield _list([energy_line(study.balance), cost_line(study), *study.notes])


def _figures(study: ProvedStudy) -> Iterator[str]:
    for subject, rows, wording in (("signal", study.signals, {}), ("diode", study.diodes, DIODE_HEADINGS)):
        if rows:
            columns = list(rows[0].figures)
            headings = [subject, *(wording.get(column, column) for column in columns)]
            yield _table(headings, [_figure_cells(row) for row in rows], 1)


def _figure_cells(row: Row) -> list[str]:
    return [row_name(row), *(words.row_with_bound(row, column) for column in row.figures)]


def _bill(lines: Sequence[BillLine]) -> Iterator[str]:
    if lines:
        yield "<h2>Ratings</h2>"
        yield _table(words.BILL_HEADINGS, [words.bill_cells(line) for line in lines], 3)
        yield f"<p>{escape(words.bill_note(lines))}</p>"


def _texts(project: Project) -> Iterator[str]:
    done: dict[str, None] = {}
    waiting: list[Unit] = [project.top]
    while waiting:
        unit = waiting.pop(0)
        if unit.name in done:
            continue
        done[unit.name] = None
        waiting += unit.uses
        spans = [statement.span for statement in unit.description.statements if statement.span is not None]
        text = spans[0].source.text if spans else ""
        yield f"<h3>{escape(unit.name)}</h3>\n<pre>{escape(text)}</pre>"


def _table(headings: Sequence[str], rows: Sequence[Sequence[str]], left: int) -> str:
    """A table whose first columns are text; a verdict in the first one is coloured."""
    lines = ["<table>", "<tr>" + "".join(_cell("th", text, at >= left) for at, text in enumerate(headings)) + "</tr>"]
    for row in rows:
        lines.append("<tr>" + "".join(_cell("td", text, at >= left) for at, text in enumerate(row)) + "</tr>")
    return "\n".join([*lines, "</table>"])


def _cell(tag: str, text: str, number: bool) -> str:
    kind = ' class="number"' if number else ""
    if tag == "td" and not number and text in set(State):
        kind = f' class="{_STATES.get(State(text), "open")}"'
    return f"<{tag}{kind}>{escape(text)}</{tag}>"


def _list(items: Sequence[str]) -> str:
    return "<ul>" + "".join(f"<li>{escape(item)}</li>" for item in items) + "</ul>"
