"""What `bulkrail draw` does: draw the circuit, every study and every table of harmonics, or sweeps from their tables.

Knows proofs, sweeps' tables and pictures; draws nothing itself.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from grammar.mistakes import DescriptionError
from simcore.judge.outcome import Outcome
from simcore.opening import Opened
from simcore.proof import Proof
from simcore.report.diagram import diagram_of
from simcore.report.panels import bars_of, picture_of
from simcore.report.screen import present_screen
from simcore.report.session import Say, open_jobs, proved, rendered, written
from simcore.report.writing import whole_bytes


def draw_file(
    file: str,
    folder: Path,
    form: str,
    wanted: Sequence[str],
    sweeps: Sequence[str],
    settings: Mapping[str, str],
    say: Say,
    complain: Say,
) -> Outcome:
    """Draw a description: its sweeps of these names where there are any, from their tables in the folder; else the
    circuit and its studies, solved anew. form: "png" or "svg". Whether requirements hold does not matter here."""
    try:
        import matplotlib  # noqa: F401  (only whether it is there)
    except ImportError:
        complain("pictures need matplotlib, which is not installed")
        complain('    cure: install the extra: pip install "bulkrail[view]"; `run --page` draws without it')
        return Outcome.INPUT_WRONG
    jobs = open_jobs({file: folder}, wanted, settings, complain)
    if jobs is None:
        return Outcome.INPUT_WRONG
    if sweeps:
        try:
            pictures = _sweep_pictures(jobs[0].opened, file, sweeps, folder, form)
        except DescriptionError as error:
            complain(rendered(error.mistakes))
            return Outcome.INPUT_WRONG
    else:
        ended = proved(jobs[0], complain)
        if ended.proof is None:
            return ended.outcome
        pictures = drawn(ended.proof, form)
    paths = {folder / f"{name}.{form}": content for name, content in pictures.items()}

    def write() -> None:
        for path, content in paths.items():
            whole_bytes(path, content)

    if not written(write, folder, complain):
        return Outcome.INPUT_WRONG
    said = f"Pictures in {folder}: {', '.join(path.name for path in paths)}" if paths else f"{file}: nothing to draw"
    say("\n".join(present_screen().fitted([said])))
    return Outcome.ALL_HOLD


def _sweep_pictures(opened: Opened, file: str, wanted: Sequence[str], folder: Path, form: str) -> dict[str, bytes]:
    """File stem -> content. Raises DescriptionError where a sweep can't be drawn, with the reason."""
    from grammar.mistakes import Mistake
    from simcore.report.drawing import sweep_bytes
    from simcore.report.sweep_panels import sweep_picture
    from simcore.report.sweep_session import chosen_sweeps, task_of

    found = {}
    for sweep in chosen_sweeps(opened.circuit, wanted, file):
        picture = sweep_picture(sweep, task_of(opened, sweep), folder / f"{sweep.name}.csv")
        if picture is None or not picture.panels:
            what = f"sweep {sweep.name} neither varies one let alone nor draws samples alone, so no curve shows it"
            raise DescriptionError([Mistake(what, "Its table holds everything that was found.", sweep.span)])
        found[sweep.name] = sweep_bytes(picture, form)
    return found


def drawn(proof: Proof, form: str) -> dict[str, bytes]:
    """The pictures of a proof: file stem -> content."""
    from simcore.report.drawing import bars_bytes, diagram_bytes, picture_bytes

    found = {}
    diagram = diagram_of(proof.circuit)
    if diagram is not None:
        found[f"{Path(proof.circuit.name).stem}.circuit"] = diagram_bytes(diagram, form)
    for name, study in proof.studies.items():
        picture = picture_of(name, study)
        if picture is not None:
            found[name] = picture_bytes(picture, form)
    for place, bars in enumerate(bars_of(proof), start=1):
        found[f"harmonics-{place}"] = bars_bytes(bars, form)
    return found
