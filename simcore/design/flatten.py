"""Repeats and blocks written out: every statement of a design with the place it stands in, once for each copy.

It counts copies and knows names, and nothing of element values, graphs or studies.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from grammar.description import (
    Ambient,
    Block,
    Datasheet,
    Element,
    Let,
    Name,
    Observe,
    Parameter,
    Purpose,
    Reference,
    Repeat,
    Require,
    Span,
    Statement,
    Study,
    Sweep,
    Use,
)
from grammar.expressions import nearest
from simcore.components import KINDS
from simcore.design.scopes import Place, Poisoned, Scope, Space, at_word, rename_cure, span_of, suggest
from simcore.design.values import EXPRESSIONS

MOST_ELEMENTS = 20_000
MOST_COPIES = 10_000
MOST_STATEMENTS = 50_000
DEEPEST_BLOCK = 16
DEEPEST_BODY = 32

_IN_REPEAT = (Let, Element, Repeat, Observe, Require)
_IN_BLOCK = (Let, Element, Repeat, Observe)


@dataclass
class Flat:
    """The statements of a design, each with its place; joins: a block's terminal -> the node outside, both in full."""

    elements: list[tuple[Element, Place]] = field(default_factory=list)
    observes: list[tuple[Observe, Place]] = field(default_factory=list)
    requires: list[tuple[Require, Place]] = field(default_factory=list)
    references: list[Reference] = field(default_factory=list)
    ambients: list[Ambient] = field(default_factory=list)
    studies: list[Study] = field(default_factory=list)
    sweeps: list[Sweep] = field(default_factory=list)
    purposes: list[Purpose] = field(default_factory=list)
    joins: dict[str, str] = field(default_factory=dict)
    copies: dict[str, Element] = field(default_factory=dict)
    blocks_used: dict[str, Block] = field(default_factory=dict)


class TooLarge(Exception):
    """The design has more of something than can be written out; its mistake is reported already."""


class Flattener:
    """Walks the statements; copies: names of block copies with the statement that made each."""

    def __init__(self, scope: Scope):
        self.scope = scope
        self.flat = Flat()
        self._repeated = 0
        self._written = 0
        self._deep = 0
        self._open: list[Block] = []

    def run(self) -> Flat:
        """All statements of the top file. Raises TooLarge."""
        unit = self.scope.root.unit
        self._kind_names()
        self._body(unit.description.statements, Place(self.scope.root))
        return self.flat

    def _kind_names(self) -> None:
        """A block's name is a kind: it stands for one thing, and a data sheet's likewise."""
        seen: dict[str, str] = dict.fromkeys(KINDS, "a kind of element")
        sheets: dict[str, str] = {}
        for statement in self.scope.root.unit.description.statements:
            names = seen if isinstance(statement, Block) else sheets if isinstance(statement, Datasheet) else None
            if names is None or not isinstance(statement, Block | Datasheet):
                continue
            if statement.name in names:
                cure = "Rename one of the two."
                self.scope.wrong(f"{statement.name} is {names[statement.name]} already", cure, statement.span)
            names[statement.name] = "a block" if isinstance(statement, Block) else "a data sheet"

    def _body(self, statements: Sequence[Statement], place: Place, span: Span | None = None) -> None:
        """The statements of a file, block or repeat; span: of what holds them."""
        self._written += 1 + len(statements)
        if self._written > MOST_STATEMENTS or self._deep >= DEEPEST_BODY:
            cure = f"At most {MOST_STATEMENTS} statements with all copies, {DEEPEST_BODY} repeats and blocks deep."
            self._too_large("the design is too large once its repeats and blocks are written out", cure, span)
        self._deep += 1
        try:
            self._statements(statements, place)
        finally:
            self._deep -= 1

    def _too_large(self, what: str, cure: str, span: Span | None) -> None:
        self.scope.wrong(what, cure, span)
        raise TooLarge(what)

    def _tear(self, statements: Sequence[Statement]) -> None:
        """What statements that are not written out would name is not unknown."""
        for statement in statements:
            if isinstance(statement, Let | Observe):
                self.scope.tear(statement.name)
            elif isinstance(statement, Element):
                self._tear_element(statement)
            elif isinstance(statement, Repeat):
                self._tear(statement.body)

    def _tear_element(self, node: Element) -> None:
        self.scope.tear(node.name, *node.terminals.nodes, node.terminals.star)

    def _statements(self, statements: Sequence[Statement], place: Place) -> None:
        for statement in statements:
            if isinstance(statement, Let | Observe):
                self.scope.declare(statement, place)
        for statement in statements:
            if self._stands_wrong(statement, place):
                continue
            if isinstance(statement, Repeat):
                self._repeat(statement, place)
            elif isinstance(statement, Element):
                self._element(statement, place)
            else:
                self._collect(statement, place)

    def _stands_wrong(self, statement: Statement, place: Place) -> bool:
        """Whether a statement stands in a repeat or block that can't hold it."""
        allowed = _IN_BLOCK if self._open else _IN_REPEAT if place.inward else None
        if allowed is None or isinstance(statement, allowed):
            return False
        where = "a block" if self._open else "a repeat"
        self.scope.wrong(f"this can't stand in {where}", "Move it out, into the file itself.", span_of(statement))
        return True

    def _collect(self, statement: Statement, place: Place) -> None:
        flat = self.flat
        if isinstance(statement, Observe):
            flat.observes.append((statement, place))
        elif isinstance(statement, Require):
            flat.requires.append((statement, place))
        elif isinstance(statement, Reference):
            flat.references.append(statement)
        elif isinstance(statement, Ambient):
            flat.ambients.append(statement)
        elif isinstance(statement, Study):
            flat.studies.append(statement)
        elif isinstance(statement, Sweep):
            flat.sweeps.append(statement)
        elif isinstance(statement, Purpose):
            flat.purposes.append(statement)
        else:
            assert isinstance(statement, Let | Datasheet | Block | Use)

    def _repeat(self, node: Repeat, place: Place) -> None:
        if node.variable in place.indices or self.scope.root.prefix + node.variable in self.scope.entries:
            self.scope.wrong(f"{node.variable} is named already", "Choose another index.", node.span)
            self._tear(node.body)
            return
        try:
            first = self.scope.whole(node.first, place, "the first copy of a repeat")
            last = self.scope.whole(node.last, place, "the last copy of a repeat")
        except Poisoned:
            self._tear(node.body)
            return
        self._repeated += max(0, last - first + 1)
        if self._repeated > MOST_COPIES:
            cure = f"At most {MOST_COPIES} copies in a design."
            self._too_large("the repeats make too many copies", cure, span_of(node.last))
        for index in range(first, last + 1):
            self._body(node.body, Place(place.space, {**place.indices, node.variable: index}), node.span)

    def _element(self, node: Element, place: Place) -> None:
        found = place.space.unit.blocks.get(node.kind)
        if node.kind in KINDS:
            if len(self.flat.elements) >= MOST_ELEMENTS:
                cure = f"At most {MOST_ELEMENTS} elements in a design."
                self._too_large("the design has too many elements", cure, node.span)
            self.flat.elements.append((node, place))
        elif found is None:
            self._tear_element(node)
            if self.scope.found and not self.scope.is_torn(node.kind):
                kinds = [*KINDS, *place.space.unit.blocks]
                where = at_word(node.span, node.kind, node.terminals.span)
                self.scope.wrong(f"there is no kind {node.kind}", suggest(node.kind, kinds, all_kinds(kinds)), where)
        else:
            unit, block = found
            try:
                self._copy(node, block, Space(unit, self._prefix(node, place), self.scope.file_space(unit)), place)
            except Poisoned:
                self._tear_element(node)

    def _prefix(self, node: Element, place: Place) -> str:
        full = place.space.prefix + self.scope.local(node.name, place)
        if full in self.flat.copies:
            self.scope.wrong(f"{full} is named twice", rename_cure(place, "S"), node.name.span)
            raise Poisoned
        self.flat.copies[full] = node
        return full + "."

    def _copy(self, node: Element, block: Block, space: Space, place: Place) -> None:
        """One copy of a block: its parameters, its terminals, its statements."""
        if any(block is other for other in self._open) or len(self._open) >= DEEPEST_BLOCK:
            cure = "A block can't hold itself; blocks may stand 16 deep in one another."
            self.scope.wrong(f"block {block.name} holds itself", cure, node.span)
            raise Poisoned
        self.flat.blocks_used[block.name] = block
        inner = Place(space)
        if not self._parameters(node, block, inner, place) or not self._terminals(node, block, inner, place):
            raise Poisoned
        self._open.append(block)
        try:
            self._body(block.body, inner, node.span)
        finally:
            self._open.pop()

    def _parameters(self, node: Element, block: Block, inner: Place, place: Place) -> bool:
        given = {setting.key: setting for setting in node.settings}
        known = [parameter.name for parameter in block.parameters]
        right = True
        if node.value is not None:
            cure = f"Name the parameter, as in `{known[0]} = ...`." if known else "Leave it out."
            self.scope.wrong(f"block {block.name} takes no unnamed value", cure, span_of(node.value))
            right = False
        for setting in node.settings:
            if setting.key not in known or not isinstance(setting.value, EXPRESSIONS):
                close = nearest(setting.key, known)
                takes = f"It takes {', '.join(known)}." if known else "It takes none."
                cure = f"Did you mean {close}?" if close and setting.key not in known else takes
                what = "has no parameter" if setting.key not in known else "takes a value or a data sheet for"
                self.scope.wrong(f"block {block.name} {what} {setting.key}", cure, setting.span)
                right = False
        for parameter in block.parameters:
            setting = given.get(parameter.name)
            if setting is not None and isinstance(setting.value, EXPRESSIONS):
                self._parameter(parameter, inner, setting.value, place)
            elif parameter.default is not None:
                self._parameter(parameter, inner, parameter.default, inner)
            elif setting is None:
                cure = f"Add `{parameter.name} = ...`: it has no default."
                self.scope.wrong(f"block {block.name} needs {parameter.name}", cure, node.name.span or node.span)
                right = False
        return right

    def _parameter(self, parameter: Parameter, inner: Place, expression: object, seen_from: Place) -> None:
        assert isinstance(expression, EXPRESSIONS)
        self.scope.declare(parameter, inner, expression)
        entry = self.scope.entries.get(inner.space.prefix + parameter.name)
        if entry is not None:
            entry.place = seen_from

    def _terminals(self, node: Element, block: Block, inner: Place, place: Place) -> bool:
        outside, names = node.terminals, [self.scope.local(name, inner) for name in block.terminals]
        form = f"({', '.join(names)}): {block.name}"
        if outside.form != "set" or outside.star is not None:
            cure = f"Write its terminals as `{form} ...`."
            self.scope.wrong(f"block {block.name} takes its terminals in one pair of parentheses", cure, outside.span)
            return False
        if len(outside.nodes) != len(names):
            what = f"block {block.name} has {len(names)} terminals, and {len(outside.nodes)} are given"
            self.scope.wrong(what, f"Write them as `{form} ...`.", outside.span)
            return False
        if len(dict.fromkeys(names)) != len(names):
            self.scope.wrong(f"two terminals of block {block.name} have one name", "Rename one.", block.span)
            return False
        for name, outer in zip(names, outside.nodes, strict=True):
            self.flat.joins[inner.space.prefix + name] = place.space.prefix + self.scope.local(outer, place)
        return True

    def canonical(self, full: str) -> str:
        """A node's name as the circuit has it: a block's terminal is the node that it joins, however deep."""
        for _ in range(DEEPEST_BLOCK + 1):
            if full not in self.flat.joins:
                return full
            full = self.flat.joins[full]
        return full


def all_kinds(kinds: Sequence[str]) -> str:
    """The cure for a kind that is like no known one."""
    return f"Known are {', '.join(kinds)}."


def is_dotted(name: Name) -> bool:
    """Whether a name leads into a block, winding or phase."""
    return len(name.parts) > 1
