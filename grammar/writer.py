"""Statements as canonical text: what is read from it means the same, and writing that again changes nothing.

Knows descriptions only; `grammar.layout` puts the lines of a whole text together.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import singledispatch

from grammar.axes import Axis, ExtremesAxis, FaultsAxis, OverAxis, RangeAxis, SamplesAxis
from grammar.description import (
    Action,
    Ambient,
    Amplitude,
    Binary,
    Block,
    Branch,
    Call,
    Comparison,
    Datasheet,
    Each,
    Element,
    Event,
    Expression,
    Given,
    Item,
    Let,
    Listed,
    Name,
    Negative,
    Number,
    Observe,
    Parameter,
    Part,
    Point,
    Purpose,
    Range,
    Ratings,
    Ratio,
    Reference,
    Repeat,
    Require,
    Setting,
    Spread,
    Statement,
    Study,
    Sweep,
    Terminals,
    Text,
    Use,
    Worst,
)

_INDENT = "    "
_SUM, _PRODUCT, _SIGN, _POWER, _ATOM = range(1, 6)
_STRENGTH = {"+": _SUM, "-": _SUM, "*": _PRODUCT, "/": _PRODUCT, "^": _POWER}

# --- expressions -----------------------------------------------------------------------------------------------------


def write_expression(expression: Expression) -> str:
    """An expression with as few parentheses as its meaning needs."""
    return _expression(expression)[0]


def _expression(expression: Expression) -> tuple[str, int]:
    """The text, and how strongly its outermost operator binds."""
    match expression:
        case Number():
            return write_number(expression), _ATOM
        case Name():
            return ".".join(_part(part) for part in expression.parts), _ATOM
        case Negative():
            return "-" + _within(expression.operand, _SIGN), _SIGN
        case Binary():
            return _binary(expression)
        case Branch():
            return f"{write_expression(expression.start)} -> {write_expression(expression.end)}", _SUM
        case Each():
            return f"each {expression.kind}", _ATOM
        case Call():
            arguments = ", ".join(write_expression(argument) for argument in expression.arguments)
            at = f" at {expression.study}" if expression.study else ""
            return f"{expression.name}({arguments}){at}", _ATOM
    raise TypeError(f"{type(expression).__name__} is no expression")


def _within(expression: Expression, least: int) -> str:
    text, strength = _expression(expression)
    return text if strength >= least else f"({text})"


def _binary(expression: Binary) -> tuple[str, int]:
    operator = expression.operator
    strength = _STRENGTH[operator]
    if operator == "^":
        base = _within(expression.left, _ATOM)
        if isinstance(expression.left, Number) and expression.left.unit:
            base = f"({base})"
        return f"{base}^{_within(expression.right, _SIGN)}", _POWER
    left, right = _within(expression.left, strength), _within(expression.right, strength + 1)
    return f"{left} {operator} {right}", strength


def write_number(number: Number) -> str:
    """A literal with its unit, exact: reading it gives the same double."""
    text = repr(float(number.value)).removesuffix(".0")
    return f"{text} {number.unit}" if number.unit else text


def _part(part: Part) -> str:
    return part.name + "".join(f"[{_index(index)}]" for index in part.indices)


def _index(index: Expression | Range) -> str:
    if isinstance(index, Range):
        return f"{_index(index.first)}..{_index(index.last)}"
    text = write_expression(index)
    return text.replace(" ", "") if _is_count(index) else text


def _is_count(index: Expression | Range) -> bool:
    """Whether an index is made of names and plain numbers, as `k-1`; it is written without gaps."""
    match index:
        case Range():
            return _is_count(index.first) and _is_count(index.last)
        case Binary():
            return _is_count(index.left) and _is_count(index.right)
        case Name():
            return all(_is_count(each) for part in index.parts for each in part.indices)
    return isinstance(index, Number) and not index.unit


# --- settings --------------------------------------------------------------------------------------------------------


def write_given(given: Given) -> str:
    """What stands behind a key's `=`."""
    match given:
        case Point():
            return f"{write_expression(given.value)} @ {write_expression(given.at)}"
        case Ratio():
            return " : ".join(write_expression(value) for value in given.values)
        case Amplitude():
            words = [given.of, given.measure] if given.of else [given.measure]
            return " : ".join(write_expression(value) for value in given.values) + " " + " ".join(words)
        case Listed():
            return "[" + ", ".join(_item(item) for item in given.items) + "]"
        case Text():
            return f'"{given.text}"'
        case Worst():
            return f"worst for {write_expression(given.figure)}"
    return write_expression(given)


def _item(item: Item) -> str:
    key = "" if item.key is None else f"{write_expression(item.key)}: "
    at = "" if item.at is None else f" @ {write_expression(item.at)}"
    return key + write_expression(item.value) + at


def write_setting(setting: Setting) -> str:
    return f"{setting.key} = {write_given(setting.value)}"


def _settings(settings: Iterable[Setting]) -> str:
    return "".join(f", {write_setting(setting)}" for setting in settings)


def _names(names: Iterable[Name | Each]) -> str:
    return ", ".join(write_expression(name) for name in names)


def _label(label: str | None) -> str:
    return "" if label is None else f' as "{label}"'


# --- statements ------------------------------------------------------------------------------------------------------


@singledispatch
def write_statement(statement: Statement) -> list[str]:
    """A statement's lines."""
    raise TypeError(f"{type(statement).__name__} is no statement")


def _braced(head: str, body: Iterable[str]) -> list[str]:
    return [head + " {", *(_INDENT + line if line else line for line in body), "}"]


def _body(statements: Iterable[Statement]) -> list[str]:
    return [line for statement in statements for line in write_statement(statement)]


@write_statement.register
def _(statement: Purpose) -> list[str]:
    return [f'purpose "{statement.text}"']


@write_statement.register
def _(statement: Use) -> list[str]:
    return [f'use "{statement.path}"']


@write_statement.register
def _(statement: Reference) -> list[str]:
    return [f"reference {_names(statement.nodes)}"]


@write_statement.register
def _(statement: Ambient) -> list[str]:
    return [f"ambient {write_expression(statement.temperature)}"]


@write_statement.register
def _(statement: Let) -> list[str]:
    spread = "" if statement.spread is None else f" tolerance {_spread(statement.spread)}"
    return [
        f"let {write_expression(statement.name)} = {write_expression(statement.value)}{spread}{_label(statement.label)}"
    ]


def _spread(spread: Spread) -> str:
    high = "" if spread.high is None else f" .. {write_expression(spread.high)}"
    return write_expression(spread.low) + high + (f" {spread.distribution}" if spread.distribution else "")


@write_statement.register
def _(statement: Datasheet) -> list[str]:
    head = f"datasheet {statement.name}: {statement.kind}{_label(statement.label)}"
    return _braced(head, [write_setting(setting) for setting in statement.settings])


@write_statement.register
def _(statement: Block) -> list[str]:
    parameters = ", ".join(_parameter(parameter) for parameter in statement.parameters)
    given = f" with {parameters}" if parameters else ""
    head = f"block {statement.name}({_names(statement.terminals)}){given}{_label(statement.label)}"
    return _braced(head, _body(statement.body))


def _parameter(parameter: Parameter) -> str:
    return parameter.name if parameter.default is None else f"{parameter.name} = {write_expression(parameter.default)}"


@write_statement.register
def _(statement: Repeat) -> list[str]:
    head = f"repeat {statement.variable} from {write_expression(statement.first)} to {write_expression(statement.last)}"
    return _braced(head, _body(statement.body))


@write_statement.register
def _(statement: Element) -> list[str]:
    value = "" if statement.value is None else f", {write_expression(statement.value)}"
    head = f"{write_terminals(statement.terminals)}: {statement.kind} {write_expression(statement.name)}"
    return [head + value + _settings(statement.settings) + _label(statement.label)]


def write_terminals(terminals: Terminals) -> str:
    nodes = [write_expression(node) for node in terminals.nodes]
    if terminals.form == "branch":
        return " -> ".join(nodes)
    if terminals.form == "windings":
        pairs = zip(nodes[::2], nodes[1::2], strict=True)
        return " : ".join(f"({first} -> {second})" for first, second in pairs)
    star = "" if terminals.star is None else f" -> {write_expression(terminals.star)}"
    return f"({', '.join(nodes)}){star}"


@write_statement.register
def _(statement: Observe) -> list[str]:
    return [
        f"observe {write_expression(statement.name)} = {write_expression(statement.value)}{_label(statement.label)}"
    ]


@write_statement.register
def _(statement: Study) -> list[str]:
    items = [write_setting(setting) for setting in statement.settings]
    items += [_action(action) for action in statement.actions]
    head = f"study {statement.name}: {', '.join([statement.kind, *items])}{_label(statement.label)}"
    return _braced(head, [write_event(event) for event in statement.events]) if statement.events else [head]


def write_event(event: Event) -> str:
    return f"at {write_expression(event.time)}: {_action(event.action)}"


def _action(action: Action) -> str:
    value = "" if action.value is None else f" = {write_expression(action.value)}"
    return f"{action.verb} {write_expression(action.target)}{value}"


@write_statement.register
def _(statement: Require) -> list[str]:
    studies = ", ".join(statement.studies) or "each study"
    return [f"require {studies}: {_claim(statement.claim)}{_label(statement.label)}"]


def _claim(claim: Comparison | Ratings) -> str:
    if isinstance(claim, Ratings):
        of = f" of {_names(claim.of)}" if claim.of else ""
        return f"ratings{of}{_settings(claim.settings)}"
    figure = write_expression(claim.figure)
    if claim.relation == "within":
        return f'{figure} within "{claim.table}"'
    assert claim.bound is not None
    if claim.relation == "between":
        assert claim.upper is not None
        return f"{figure} between {write_expression(claim.bound)} and {write_expression(claim.upper)}"
    return f"{figure} {claim.relation} {write_expression(claim.bound)}"


@write_statement.register
def _(statement: Sweep) -> list[str]:
    axes = " by ".join(_axis(axis) for axis in statement.axes)
    return [f"sweep {statement.name}: {axes}{_settings(statement.settings)}{_label(statement.label)}"]


def _axis(axis: Axis) -> str:
    match axis:
        case RangeAxis():
            ends = f"from {write_expression(axis.first)} to {write_expression(axis.last)}"
            spacing = "log " if axis.logarithmic else ""
            return f"{write_expression(axis.let)} {ends} in {write_expression(axis.count)} {spacing}steps"
        case OverAxis():
            return f"{write_expression(axis.let)} over {write_given(axis.values)}"
        case ExtremesAxis():
            return f"extremes of {_names(axis.names) or 'each let'}"
        case SamplesAxis():
            return f"{write_expression(axis.count)} samples of {_names(axis.names) or 'each let'}"
        case FaultsAxis():
            of = f"each {axis.each}" if axis.each else f"each of {_names(axis.names)}"
            return f"{' or '.join(axis.faults)} {of}"
    raise TypeError(f"{type(axis).__name__} is no axis")
