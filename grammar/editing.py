"""Statements of a description replaced, added and left out by name. Knows descriptions, not what they mean."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from grammar.description import Ambient, Description, Name, Purpose, Statement
from grammar.expressions import nearest
from grammar.mistakes import Mistake
from grammar.reader import read_text
from grammar.writer import write_expression

_SINGLE = (Purpose, Ambient)
"""Statements that stand once, and need no name for one to take the place of another."""


def edited(
    description: Description, lines: Sequence[str], without: Iterable[str] = ()
) -> tuple[Description, list[Mistake]]:
    """A description after changes.

    lines: statements; one of the kind and name of another takes its place, any other is added at the end
    without: what is left out: the name of whatever bears it, or a whole statement, such as a requirement
    """
    statements, mistakes = list(description.statements), []
    for text in without:
        left = _left(statements, text)
        if len(left) == len(statements):
            mistakes.append(_unknown(text, statements))
        statements = left
    read, wrong = read_text("\n".join(lines), "change")
    mistakes += wrong
    for statement in read.statements:
        key = _key(statement)
        places = [] if key is None else [place for place, old in enumerate(statements) if _key(old) == key]
        if places:
            statements[places[0]] = statement
        else:
            statements.append(statement)
    return Description(tuple(statements)), mistakes


def _left(statements: Sequence[Statement], text: str) -> list[Statement]:
    """Those that a name, or else a whole statement, does not mean."""
    left = [each for each in statements if name_of(each) != text]
    if len(left) == len(statements):
        read, mistakes = read_text(text, "change")
        gone = [] if mistakes else read.statements
        left = [each for each in statements if each not in gone]
    return left


def name_of(statement: Statement) -> str | None:
    """The name that a statement gives to what it says; None where it gives none."""
    name = getattr(statement, "name", None)
    return write_expression(name) if isinstance(name, Name) else name


def _key(statement: Statement) -> tuple[type, str | None] | None:
    name = name_of(statement)
    return (type(statement), name) if name is not None or isinstance(statement, _SINGLE) else None


def _unknown(text: str, statements: Sequence[Statement]) -> Mistake:
    known = [name for name in map(name_of, statements) if name is not None]
    near = nearest(text, known)
    cure = f"Did you mean {near}?" if near else "Give the name of what is left out, or its whole statement."
    return Mistake(f"there is no {text} that could be left out", cure, file="change")
