"""Bulkrail from Python: a design is read, varied, run and asked.

The way of a description, stage by stage, with what each takes and gives:

1. `grammar.reader.read_text`     text -> Description, and all its mistakes at once
2. `simcore.design.files.load`    file -> Project: the description and every file it uses
3. `simcore.design.elaborate`     Project, values of lets -> Circuit: flat elements with SI values, checked as a graph
4. `simcore.components.build`     Circuit -> Frame: each kind's equations as branches between nodes
5. `simcore.equations.kernel`     Frame -> Kernel: the whole run as straight-line code
6. `simcore.solve`                Kernel, PlannedStudy -> Solution: traces as quadratic pieces
7. `simcore.figures`              Solution -> Figure: integrals and extrema with error bounds
8. `simcore.judge`                Requirement, Figure -> Verdict
9. `simcore.report`               Proof -> terminal text, CSV, JSON

`simcore.proof.prove` walks stages 4 to 8; `simcore.opening` stages 1 to 3. What stands below is the face of both:

>>> import simcore
>>> design = simcore.read(simcore.library_folder() / "half_wave.rect")
>>> list(design.studies)
['resting', 'working']
>>> rest = design.run("resting")
>>> 20.0 < rest.figure("mean_power(heater)").value < 24.0
True

Importing this module alone loads nothing heavy.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

__version__ = "0.1.0"

if TYPE_CHECKING:
    from grammar.mistakes import DescriptionError
    from simcore.building import Builder
    from simcore.design.files import library_folder
    from simcore.face import Design, Measured, Result, Trace, read, read_text
    from simcore.solve.failure import NoSolution

__all__ = [
    "Builder",
    "DescriptionError",
    "Design",
    "Measured",
    "NoSolution",
    "Result",
    "Trace",
    "library_folder",
    "read",
    "read_text",
]

_HOMES = {
    "Builder": "simcore.building",
    "DescriptionError": "grammar.mistakes",
    "Design": "simcore.face",
    "Measured": "simcore.face",
    "NoSolution": "simcore.solve.failure",
    "Result": "simcore.face",
    "Trace": "simcore.face",
    "library_folder": "simcore.design.files",
    "read": "simcore.face",
    "read_text": "simcore.face",
}
"""Where each public name lives; it is imported at its first use (PEP 562)."""


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    value = getattr(import_module(_HOMES[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted([*globals(), *__all__])
