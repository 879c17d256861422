"""Data sheets and blocks of the top file that nothing uses: checked all the same, so that no mistake sleeps there.

It knows declarations and names, and no circuit.
"""

from __future__ import annotations

from collections.abc import Sequence

from grammar.description import Block, Datasheet, Element, Repeat, Statement
from simcore.components import KINDS
from simcore.design.flatten import Flat, all_kinds
from simcore.design.scopes import Scope, Sheet, at_word, suggest
from simcore.design.values import Reader


def check_unused(scope: Scope, reader: Reader, flat: Flat) -> None:
    """Report what is wrong in data sheets and blocks of the top file, whether or not an element needs them."""
    unit = scope.root.unit
    for statement in unit.description.statements:
        if isinstance(statement, Datasheet):
            kind = KINDS.get(statement.kind)
            if kind is None:
                _no_kind(scope, statement, list(KINDS))
            else:
                reader.sheet(Sheet(unit, statement), kind)
        elif isinstance(statement, Block) and statement.name not in flat.blocks_used:
            _kinds(scope, statement.body)


def _kinds(scope: Scope, statements: Sequence[Statement]) -> None:
    for statement in statements:
        if isinstance(statement, Repeat):
            _kinds(scope, statement.body)
        elif isinstance(statement, Element):
            known = [*KINDS, *scope.root.unit.blocks]
            if statement.kind not in known and scope.found and not scope.is_torn(statement.kind):
                _no_kind(scope, statement, known)


def _no_kind(scope: Scope, statement: Element | Datasheet, known: list[str]) -> None:
    after = statement.terminals.span if isinstance(statement, Element) else None
    where = at_word(statement.span, statement.kind, after)
    scope.wrong(f"there is no kind {statement.kind}", suggest(statement.kind, known, all_kinds(known)), where)
