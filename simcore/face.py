"""Designs as Python objects: read one, give its lets other values, run its studies, ask for traces and figures.

It holds what a caller sees and works nothing out itself.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from grammar.description import Description
from grammar.mistakes import DescriptionError
from grammar.quantities import show, unit_of
from grammar.writer import write
from simcore.design.circuit import Circuit, PlannedStudy
from simcore.design.files import Project, load, load_text
from simcore.design.graph import graph_of
from simcore.figures.figure import Figure
from simcore.judge.verdict import Verdict
from simcore.opening import Opened, open_project
from simcore.proof import Proof, ProvedStudy, prove

if TYPE_CHECKING:
    import networkx


def read(path: str | Path) -> Design:
    """The design that a description file holds. Raises DescriptionError with all its mistakes."""
    return _sound(*load(path))


def read_text(text: str, name: str = "text", folder: str | Path | None = None) -> Design:
    """The design that a text holds; name: what messages call it; folder: where its `use` lines look first.

    >>> divider = read_text('''
    ... a -> b: source cell, constant = 9 V
    ... a -> mid: resistor R_top, 2 kOhm
    ... mid -> b: resistor R_bottom, 1 kOhm
    ... reference b
    ... study rest: operating_point
    ... ''')
    >>> print(divider.run("rest").figure("mean(voltage(mid))"))
    3 V ± 5 pV
    """
    return _sound(*load_text(text, name, folder))


def _sound(project: Project, mistakes: list) -> Design:
    if mistakes:
        raise DescriptionError(mistakes)
    return Design(project)


@dataclass(frozen=True)
class Design:
    """A design, with the values some of its lets are given instead of those written.

    Whatever is wrong with it is raised, as a DescriptionError with all mistakes, where it is first made use of.
    """

    project: Project
    settings: Mapping[str, str] = field(default_factory=dict)
