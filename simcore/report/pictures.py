"""What `bulkrail draw` does: solve, draw every study and every table of harmonics, and say where the pictures are.

Knows proofs and pictures; draws nothing itself.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from simcore.judge.outcome import Outcome
from simcore.proof import Proof
from simcore.report.diagram import diagram_of
from simcore.report.panels import bars_of, picture_of
from simcore.report.session import Say, open_jobs, proved, written
from simcore.report.writing import whole_bytes


def draw_file(
    file: str,
    folder: Path,
    form: str,
    wanted: Sequence[str],
    settings: Mapping[str, str],
    say: Say,
    complain: Say,
) -> Outcome:
    """Draw the studies of a description; form: "png" or "svg". Whether requirements hold does not matter here."""
    try:
        import matplotlib  # noqa: F401  (only whether it is there)
    except ImportError:
        complain("pictures need matplotlib, which is not installed")
        complain('    cure: install the extra: pip install "bulkrail[view]"; `run --page` draws without it')
        return Outcome.INPUT_WRONG
    jobs = open_jobs({file: folder}, wanted, settings, complain)
    if jobs is None:
        return Outcome.INPUT_WRONG
    ended = proved(jobs[0], complain)
    if ended.proof is None:
        return ended.outcome
    pictures = {folder / f"{name}.{form}": content for name, content in _pictures(ended.proof, form).items()}
    if not pictures:
        say(f"{file}: no study has a course to draw")
        return Outcome.ALL_HOLD

    def write() -> None:
        for path, content in pictures.items():
            whole_bytes(path, content)

    if not written(write, folder, complain):
        return Outcome.INPUT_WRONG
    say(f"Pictures in {folder}: {', '.join(path.name for path in pictures)}")
    return Outcome.ALL_HOLD


def _pictures(proof: Proof, form: str) -> dict[str, bytes]:
    """File stem -> content."""
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
