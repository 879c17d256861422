"""What of a design can change with the value of a let: read off its text, so that what cannot is not worked out anew.

It errs on the side of change: names are told apart by their words alone, wherever they stand.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import fields, is_dataclass
from typing import Any

from grammar.description import Action, Block, Datasheet, Let, Name, Observe, Parameter, Repeat, Require, Setting, Study
from simcore.design.circuit import Circuit, Element
from simcore.design.files import Project, Unit

_ASKING = (Study, Require, Observe, Datasheet)


def asked_names(project: Project) -> frozenset[str]:
    """The words of all names on whose values the studies, requirements, observes and data sheets of a design depend,
    directly or through others. What a `set` gives a value does not depend on the one before."""
    statements = [each for unit in _units(project.top) for each in _inside(unit.description.statements)]
    found: set[str] = set()
    for statement in statements:
        if isinstance(statement, _ASKING):
            found |= _words(statement)
    definitions = [(word, _words(value)) for statement in statements for word, value in _defined(statement)]
    while True:
        more = {name for word, names in definitions if word in found for name in names} - found
        if not more:
            return frozenset(found)
        found |= more


def _units(top: Unit) -> Iterator[Unit]:
    yield top
    for unit in top.uses:
        yield from _units(unit)


def _inside(statements: Any) -> Iterator[Any]:
    """Statements with those in blocks and repeats."""
    for statement in statements:
        yield statement
        if isinstance(statement, Block | Repeat):
            yield from _inside(statement.body)


def _defined(statement: Any) -> Iterator[tuple[str, Any]]:
    """Names that a statement gives a value, with what it is made of: lets, and parameters of blocks."""
    if isinstance(statement, Let):
        yield statement.name.parts[-1].name, statement.value
    for node in _nodes(statement):
        if isinstance(node, Parameter):
            yield node.name, node.default
        elif isinstance(node, Setting):
            yield node.key, node.value


def _words(node: Any) -> set[str]:
    return {part.name for each in _nodes(node) if isinstance(each, Name) for part in each.parts}


def _nodes(node: Any) -> Iterator[Any]:
    """A piece of a description and all pieces in it."""
    if isinstance(node, tuple):
        for each in node:
            yield from _nodes(each)
    elif is_dataclass(node):
        yield node
        for field in fields(node):
            if field.name != "span" and not (isinstance(node, Action) and field.name == "target"):
                yield from _nodes(getattr(node, field.name))


def structure(circuit: Circuit) -> tuple:
    """All of a circuit on which its soundness depends: equal for circuits that differ in values only, zero being a
    value of its own."""
    return circuit.references, tuple(_shape(element) for element in circuit.elements.values())


def _shape(element: Element) -> tuple:
    ratios = ("turns", "rated_voltage")
    given = tuple((key, value if key in ratios else _zeros(value)) for key, value in element.given.items())
    return element.name, element.kind, element.ports, element.unit, given


def _zeros(value: Any) -> Any:
    """A value with its numbers replaced by whether they are zero."""
    if isinstance(value, float | int):
        return value == 0
    return tuple(map(_zeros, value)) if isinstance(value, tuple) else value
