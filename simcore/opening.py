"""A description opened: read, its lets replaced where asked, and understood as a circuit, or all that is wrong with it.

The one way in, for the command and for Python alike. It solves nothing.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TypeGuard

from grammar.description import Expression, Name
from grammar.expressions import nearest
from grammar.mistakes import Mistake
from grammar.quantities import Quantity, unit_of
from grammar.reader import read_expression
from simcore.design.circuit import Circuit
from simcore.design.elaborate import elaborate
from simcore.design.files import Project, load


@dataclass(frozen=True)
class Opened:
    """A design as read and the circuit that it describes with some lets replaced by overrides."""

    project: Project
    circuit: Circuit
    overrides: Mapping[str, Quantity | Expression | str]


def open_design(file: str | Path, settings: Mapping[str, str]) -> tuple[Opened, list[Mistake]]:
    """Open a description file; settings: let -> its new value as text, an expression or a data sheet's name."""
    project, mistakes = load(file)
    opened, more = open_project(project, settings)
    return opened, mistakes + more


def open_project(project: Project, settings: Mapping[str, str]) -> tuple[Opened, list[Mistake]]:
    """Understand a design that is read, some of its lets replaced; see open_design."""
    overrides: dict[str, Expression | str] = {}
    mistakes: list[Mistake] = []
    for name, text in settings.items():
        expression, wrong = read_expression(text, f"{name}={text}")
        mistakes += wrong
        if expression is not None:
            overrides[name] = expression.parts[0].name if _names_sheet(expression) else expression
    circuit, more = elaborate(project, overrides)
    mistakes += more
    if project.sound and not more:
        mistakes += [_unknown(name, circuit, project.name) for name in overrides if name not in circuit.lets]
    if overrides and not mistakes:
        mistakes = _unlike(project, circuit, overrides)
    return Opened(project, circuit, overrides), mistakes


def _unlike(project: Project, circuit: Circuit, names: Iterable[str]) -> list[Mistake]:
    """A let that is set keeps its dimension, and a data sheet stays one."""
    written, _ = elaborate(project, {}, again=True)
    found = []
    for name in names:
        old, new = (each.lets[name].value for each in (written, circuit) if name in each.lets)
        if _sort(old) != _sort(new):
            cure = f"Give {name} a value of the sort it has in the description."
            what = f"{name} is {_sort(old)}, and what it is set to is {_sort(new)}"
            found.append(Mistake(what, cure, file=project.name))
    return found


def _sort(value: Quantity | str) -> str:
    if isinstance(value, str):
        return "a data sheet"
    return f"in {unit_of(value.dimension)}" if unit_of(value.dimension) else "a plain number"


def _names_sheet(expression: Expression) -> TypeGuard[Name]:
    """Whether a setting is the bare name of a data sheet."""
    return isinstance(expression, Name) and len(expression.parts) == 1 and not expression.parts[0].indices


def _unknown(name: str, circuit: Circuit, file: str) -> Mistake:
    near = nearest(name, circuit.lets)
    cure = f"Did you mean {near}?" if near else f"Its lets: {', '.join(circuit.lets) or 'none'}."
    return Mistake(f"no let is called {name}", cure, file=file)
