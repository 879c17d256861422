"""Turns the parse tree of one statement into the description's nodes.

It knows the rules of bulkrail.lark by name, and what a node means to nobody.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from typing import TYPE_CHECKING, Any, cast

from grammar import description as nodes
from grammar.axes import Axis, ExtremesAxis, FaultsAxis, OverAxis, RangeAxis, SamplesAxis
from grammar.description import Expression, Given, Name, Setting, Statement
from grammar.spans import Source, Span

if TYPE_CHECKING:
    from lark import Tree

DEEPEST_EXPRESSION = 100
SMALLEST_NUMBER = 1e-300
_OPERATORS = {"add": "+", "subtract": "-", "multiply": "*", "divide": "/", "power": "^"}


class Unbuildable(Exception):
    """Well formed, but out of bounds: what is wrong, the cure and where."""

    def __init__(self, what: str, cure: str, span: Span):
        super().__init__(what)
        self.what, self.cure, self.span = what, cure, span


def _is(tree: Any, *rules: str) -> bool:
    return getattr(tree, "data", None) in rules


class Builder:
    """Builds the nodes of one source. Each method of a rule takes that rule's tree."""

    def __init__(self, source: Source):
        self.source = source
        self._depth = 0

    def span(self, tree: Any) -> Span:
        meta = getattr(tree, "meta", tree)
        return Span(self.source, meta.start_pos, meta.end_pos)

    def statement(self, tree: Tree, body: tuple[Any, ...]) -> Statement:
        """The node of a statement; body holds the settings, statements or events of its braces."""
        build: Callable[..., Statement] = getattr(self, f"_{tree.data}")
        return build(tree, body) if tree.data in ("datasheet", "block", "repeat", "study") else build(tree)

    def setting(self, tree: Tree) -> Setting:
        if _is(tree, "worst"):
            worst = nodes.Worst(self.expression(tree.children[1]), self.span(tree))
            return Setting(str(tree.children[0]), worst, self.span(tree))
        return Setting(str(tree.children[0]), self._given(tree.children[1]), self.span(tree))

    def event(self, tree: Tree) -> nodes.Event:
        return nodes.Event(self.expression(tree.children[0]), self._action(tree.children[1]), self.span(tree))

    # --- statements ----------------------------------------------------------------------------------------------

    def _text(self, token: Any) -> str:
        return str(token)[1:-1]

    def _label(self, tree: Any) -> str | None:
        return None if tree is None else self._text(tree.children[0])

    def _names(self, trees: Iterable[Any]) -> tuple[Name, ...]:
        return tuple(self._ref(tree) for tree in trees if _is(tree, "ref"))

    def _settings(self, trees: Iterable[Any]) -> tuple[Setting, ...]:
        return tuple(self.setting(tree) for tree in trees if _is(tree, "setting", "worst"))

    def _purpose(self, tree: Tree) -> Statement:
        return nodes.Purpose(self._text(tree.children[0]), self.span(tree))

    def _use(self, tree: Tree) -> Statement:
        return nodes.Use(self._text(tree.children[0]), self.span(tree))

    def _reference(self, tree: Tree) -> Statement:
        return nodes.Reference(self._names(tree.children), self.span(tree))

    def _ambient(self, tree: Tree) -> Statement:
        return nodes.Ambient(self.expression(tree.children[0]), self.span(tree))

    def _let(self, tree: Tree) -> Statement:
        name, value, spread, label = tree.children
        return nodes.Let(
            self._ref(name),
            self.expression(value),
            None if spread is None else self._spread(cast("Tree", spread)),
            self._label(label),
            self.span(tree),
        )

    def _spread(self, tree: Tree) -> nodes.Spread:
        low, high, distribution = cast("list[Any]", tree.children)
        return nodes.Spread(
            self.expression(low),
            None if high is None else self.expression(high),
            "" if distribution is None else str(distribution.children[0]),
        )

    def _datasheet(self, tree: Tree, body: tuple[Setting, ...]) -> Statement:
        name, kind, label = tree.children
        return nodes.Datasheet(str(name), str(kind), body, self._label(label), self.span(tree))

    def _block(self, tree: Tree, body: tuple[Statement, ...]) -> Statement:
        name, *terminals, parameters, label = cast("list[Any]", tree.children)
        listed = [] if parameters is None else parameters.children
        return nodes.Block(
            str(name),
            self._names(terminals),
            tuple(self._parameter(each) for each in listed),
            body,
            self._label(label),
            self.span(tree),
        )

    def _parameter(self, tree: Tree) -> nodes.Parameter:
        name, default = tree.children
        return nodes.Parameter(str(name), None if default is None else self.expression(default), self.span(tree))

    def _repeat(self, tree: Tree, body: tuple[Statement, ...]) -> Statement:
        variable, first, last = tree.children
        return nodes.Repeat(str(variable), self.expression(first), self.expression(last), body, self.span(tree))

    def _element(self, tree: Tree) -> Statement:
        terminals, kind, name, *arguments, label = cast("list[Any]", tree.children)
        values = [each for each in arguments if _is(each, "value")]
        if len(values) > 1:
            cure = "Give at most one value without a key; write the others as `key = value`."
            raise Unbuildable("this is a second value without a key", cure, self.span(values[1]))
        value = self.expression(values[0].children[0]) if values else None
        settings = self._settings(arguments)
        return nodes.Element(
            self._terminals(terminals), str(kind), self._ref(name), value, settings, self._label(label), self.span(tree)
        )

    def _terminals(self, tree: Tree) -> nodes.Terminals:
        if _is(tree, "set"):
            listed, star = cast("list[Any]", tree.children)
            centre = None if star is None else self._ref(star)
            return nodes.Terminals("set", self._names(listed.children), centre, self.span(tree))
        if _is(tree, "windings"):
            ends = [end for winding in cast("list[Tree]", tree.children) for end in winding.children]
            return nodes.Terminals("windings", self._names(ends), None, self.span(tree))
        return nodes.Terminals("branch", self._names(tree.children), None, self.span(tree))

    def _observe(self, tree: Tree) -> Statement:
        name, value, label = tree.children
        return nodes.Observe(self._ref(name), self.expression(value), self._label(label), self.span(tree))

    def _study(self, tree: Tree, body: tuple[nodes.Event, ...]) -> Statement:
        name, kind, *items, label = cast("list[Any]", tree.children)
        actions = tuple(self._action(each) for each in items if _is(each, "action"))
        settings = self._settings(items)
        return nodes.Study(str(name), str(kind), settings, actions, body, self._label(label), self.span(tree))

    def _action(self, tree: Any) -> nodes.Action:
        verb, target, *rest = tree.children
        value = self.expression(rest[-1]) if rest else None
        return nodes.Action(str(verb), self._ref(target), value, self.span(tree))

    def _require(self, tree: Tree) -> Statement:
        studies, judged, label = cast("list[Any]", tree.children)
        claim = self._comparison(judged) if _is(judged, "judged") else self._ratings(judged)
        names = tuple(str(name) for name in studies.children)
        return nodes.Require(names, claim, self._label(label), self.span(tree))

    def _comparison(self, tree: Tree) -> nodes.Comparison:
        figure, relation = cast("list[Any]", tree.children)
        found = self.expression(figure)
        if _is(relation, "within"):
            return nodes.Comparison(found, "within", table=self._text(relation.children[0]))
        if _is(relation, "between"):
            low, high = (self.expression(bound) for bound in relation.children)
            return nodes.Comparison(found, "between", low, high)
        compare, bound = relation.children
        return nodes.Comparison(found, str(compare.children[0]), self.expression(bound))

    def _ratings(self, tree: Tree) -> nodes.Ratings:
        of = tuple(self.expression(each) for each in tree.children if _is(each, "ref", "each"))
        return nodes.Ratings(cast("tuple[Name | nodes.Each, ...]", of), self._settings(tree.children))

    # --- sweeps --------------------------------------------------------------------------------------------------

    def _sweep(self, tree: Tree) -> Statement:
        name, *axes, label = cast("list[Any]", tree.children)
        settings: list[Setting] = []
        for axis in axes:
            listed = axis.children[-1].children if _is(axis, "extremes", "samples") else axis.children
            settings += self._settings(listed)
        built = tuple(self._axis(axis) for axis in axes)
        return nodes.Sweep(str(name), built, tuple(settings), self._label(label), self.span(tree))

    def _axis(self, tree: Any) -> Axis:
        parts = tree.children
        if _is(tree, "range"):
            let, first, last, count, log = parts[:5]
            ends = self.expression(first), self.expression(last)
            return RangeAxis(self._ref(let), *ends, self.expression(count), log is not None)
        if _is(tree, "over"):
            return OverAxis(self._ref(parts[0]), self._list(parts[1]))
        if _is(tree, "extremes"):
            return ExtremesAxis(self._names(parts[0].children))
        if _is(tree, "samples"):
            return SamplesAxis(self.expression(parts[0]), self._names(parts[1].children))
        faults = tuple(dict.fromkeys(str(each.children[0]) for each in parts if _is(each, "fault")))
        kind = next((str(each.children[0]) for each in parts if _is(each, "each")), None)
        return FaultsAxis(faults, self._names(parts), kind)

    # --- what a key is given -------------------------------------------------------------------------------------

    def _given(self, tree: Any) -> Given:
        span = self.span(tree)
        if _is(tree, "text"):
            return nodes.Text(self._text(tree.children[0]), span)
        if _is(tree, "opened"):
            return Name((nodes.Part("open"),), span)
        if _is(tree, "point"):
            value, at = (self.expression(each) for each in tree.children)
            return nodes.Point(value, at, span)
        if _is(tree, "ratio"):
            return nodes.Ratio(tuple(self.expression(each) for each in tree.children), span)
        if _is(tree, "list"):
            return self._list(tree)
        if _is(tree, "amplitude"):
            *values, measure = tree.children
            of, kind = measure.children
            listed = tuple(self.expression(each) for each in values)
            return nodes.Amplitude(listed, str(kind), "" if of is None else str(of), span)
        return self.expression(tree)

    def _list(self, tree: Any) -> nodes.Listed:
        return nodes.Listed(tuple(self._item(each) for each in tree.children if each is not None), self.span(tree))

    def _item(self, tree: Any) -> nodes.Item:
        first, second, at = tree.children
        position = None if at is None else self.expression(at)
        if second is None:
            return nodes.Item(self.expression(first), None, position)
        return nodes.Item(self.expression(second), self.expression(first), position)

    # --- expressions ---------------------------------------------------------------------------------------------

    def expression(self, tree: Any) -> Expression:
        """An expression, up to a depth that every reader of it can follow."""
        if self._depth >= DEEPEST_EXPRESSION:
            what = f"the expression has more than {DEEPEST_EXPRESSION} steps in one another"
            raise Unbuildable(what, "Give parts of it names by `let` or `observe`.", self.span(tree))
        self._depth += 1
        try:
            return self._expression(tree)
        finally:
            self._depth -= 1

    def _expression(self, tree: Any) -> Expression:
        parts = tree.children
        match str(tree.data):
            case "ref":
                return self._ref(tree)
            case "quantity" | "number":
                return self._number(tree)
            case "figure":
                return self._call(tree)
            case "each":
                return nodes.Each(str(parts[0]), self.span(tree))
            case "negative":
                return nodes.Negative(self.expression(parts[0]), self.span(tree))
            case "branch":
                return nodes.Branch(self._ref(parts[0]), self._ref(parts[1]), self.span(tree))
            case "unary" | "expression":
                return self.expression(parts[0])
        left, right = self.expression(parts[0]), self.expression(parts[1])
        return nodes.Binary(_OPERATORS[str(tree.data)], left, right, self.span(tree))

    def _number(self, tree: Any) -> nodes.Number:
        digits, *unit = tree.children
        value = float(digits)
        if not math.isfinite(value):
            raise Unbuildable("the number is too large", "Give one below 1e300.", self.span(tree))
        if value < SMALLEST_NUMBER and any(digit in "123456789" for digit in digits.lower().partition("e")[0]):
            raise Unbuildable("the number is too small", "Give one above 1e-300, or 0.", self.span(tree))
        return nodes.Number(value, "".join(str(each) for each in unit if each is not None), self.span(tree))

    def _call(self, tree: Any) -> nodes.Call:
        name, operands, study = tree.children
        listed = () if operands is None else tuple(self.expression(each) for each in operands.children)
        return nodes.Call(str(name), listed, None if study is None else str(study), self.span(tree))

    def _ref(self, tree: Any) -> Name:
        return Name(tuple(self._part(part) for part in tree.children), self.span(tree))

    def _part(self, tree: Any) -> nodes.Part:
        name, *indices = tree.children
        return nodes.Part(str(name), tuple(self._index(index) for index in indices))

    def _index(self, tree: Any) -> Expression | nodes.Range:
        first, last = tree.children
        if last is None:
            return self.expression(first)
        return nodes.Range(self.expression(first), self.expression(last))
