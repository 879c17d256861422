"""Expressions of values: arithmetic with units, and the names in them.

Signals and figures are not values; what is wrong becomes a mistake with its place. Knows no circuit.
"""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable, Iterable

from grammar.description import Binary, Branch, Call, Each, Expression, Name, Negative, Number, Range
from grammar.mistakes import Mistake
from grammar.quantities import ANGLE, NONE, Quantity, quantity, unit_of
from grammar.spans import Span

Lookup = Callable[[Name], Quantity]
FUNCTIONS = ("sqrt", "exp", "log", "sin", "cos", "abs", "min", "max")
HIGHEST_POWER = 100.0
_LONGEST_WORD, _MOST_CANDIDATES = 100, 500
_PLAIN = {"sqrt": math.sqrt, "exp": math.exp, "log": math.log, "sin": math.sin, "cos": math.cos}


class Poisoned(Exception):
    """A value that can't be had; its mistake is reported already."""


def nearest(word: str, candidates: Iterable[str]) -> str | None:
    """The known word that a misspelt one most likely stands for, None where none is near."""
    known = list(candidates)[:_MOST_CANDIDATES]
    if len(word) > _LONGEST_WORD:
        return None
    folded = {name.lower(): name for name in reversed(known)}
    if word.lower() in folded and folded[word.lower()] != word:
        return folded[word.lower()]
    found = difflib.get_close_matches(word, known, 1, 0.6)
    return found[0] if found else None


def names_in(expression: Expression) -> list[Name]:
    """All names in an expression, in the order written, those in indices included."""
    match expression:
        case Name():
            inner = [name for part in expression.parts for index in part.indices for name in _index_names(index)]
            return [expression, *inner]
        case Negative():
            return names_in(expression.operand)
        case Binary():
            return names_in(expression.left) + names_in(expression.right)
        case Branch():
            return names_in(expression.start) + names_in(expression.end)
        case Call():
            return [name for argument in expression.arguments for name in names_in(argument)]
    return []


def _index_names(index: Expression | Range) -> list[Name]:
    if isinstance(index, Range):
        return names_in(index.first) + names_in(index.last)
    return names_in(index)


def evaluate(expression: Expression, lookup: Lookup, mistakes: list[Mistake] | None = None) -> Quantity:
    """The value of an expression; lookup gives that of a name.

    What is wrong is added to mistakes; then, or where lookup raises it, Poisoned is raised.
    """
    return _Evaluation(lookup, [] if mistakes is None else mistakes).value(expression)


class _Evaluation:
    def __init__(self, lookup: Lookup, mistakes: list[Mistake]):
        self._lookup = lookup
        self._mistakes = mistakes

    def _wrong(self, what: str, cure: str, span: Span | None) -> Poisoned:
        self._mistakes.append(Mistake(what, cure, span))
        return Poisoned(what)

    def value(self, expression: Expression) -> Quantity:
        match expression:
            case Number():
                return self._literal(expression.value, expression)
            case Name():
                return self._name(expression)
            case Negative(operand=Number() as number):
                return self._literal(-number.value, number)
            case Negative():
                inner = self.value(expression.operand)
                return Quantity(-inner.value, inner.dimension)
            case Binary():
                return self._binary(expression)
            case Call():
                return self._call(expression)
            case Branch():
                what = "`->` has no place in a value"
                raise self._wrong(what, "It joins two nodes, as in `voltage(a -> b)`.", expression.span)
            case Each():
                what = f"`each {expression.kind}` has no place in a value"
                raise self._wrong(what, "It stands in the figure of a `require`.", expression.span)
        raise TypeError(f"{type(expression).__name__} is no expression")

    def _literal(self, value: float, number: Number) -> Quantity:
        try:
            result = quantity(value, number.unit)
        except ValueError:
            raise self._wrong(
                f"{number.unit} is no unit", "See the list of units in the README.", number.span
            ) from None
        return self._finite(result, number.span)

    def _name(self, name: Name) -> Quantity:
        if len(name.parts) == 1 and name.parts[0].name == "pi" and not name.parts[0].indices:
            return Quantity(math.pi, NONE)
        return self._lookup(name)

    def _binary(self, expression: Binary) -> Quantity:
        left, right = self._both(expression)
        match expression.operator:
            case "+" | "-":
                self._same_unit(expression, left, right)
                value = left.value + right.value if expression.operator == "+" else left.value - right.value
                return self._finite(Quantity(value, left.dimension), expression.span)
            case "*":
                return self._finite(
                    Quantity(left.value * right.value, left.dimension * right.dimension), expression.span
                )
            case "/":
                if right.value == 0.0:
                    raise self._wrong(
                        "it divides by zero", "Give a divisor above or below zero.", _operator(expression)
                    )
                return self._finite(
                    Quantity(left.value / right.value, left.dimension / right.dimension), expression.span
                )
        return self._power(expression, left, right)

    def _both(self, expression: Binary) -> tuple[Quantity, Quantity]:
        """Both sides, so that mistakes in either are found."""
        try:
            left = self.value(expression.left)
        except Poisoned:
            self.value(expression.right)
            raise
        return left, self.value(expression.right)

    def _same_unit(self, expression: Binary, left: Quantity, right: Quantity) -> None:
        if left.dimension == right.dimension:
            return
        what = f"the two sides of {expression.operator} have different units"
        sides = " and ".join(
            f"{_shown(side)} is {_unit_words(value)}"
            for side, value in ((expression.left, left), (expression.right, right))
        )
        raise self._wrong(what, f"{sides}: give both in one unit, or leave one out.", _operator(expression))

    def _power(self, expression: Binary, base: Quantity, exponent: Quantity) -> Quantity:
        if exponent.dimension != NONE:
            what = f"an exponent is a plain number, not {_unit_words(exponent)}"
            raise self._wrong(what, "Leave its unit out.", _operator(expression))
        try:
            value = base.value**exponent.value
        except (OverflowError, ZeroDivisionError):
            value = math.inf
        if isinstance(value, complex):
            cure = "Keep what stands before ^ at zero or above."
            raise self._wrong("a negative value has no such power", cure, _operator(expression))
        return self._finite(Quantity(value, base.dimension**exponent.value), expression.span)

    def _call(self, call: Call) -> Quantity:
        if call.name not in FUNCTIONS or call.study is not None:
            near = nearest(call.name, FUNCTIONS)
            cure = f"Did you mean {near}?" if near else f"A value may hold {', '.join(FUNCTIONS)}."
            raise self._wrong(f"{call.name} has no place in a value", cure, call.span)
        arguments = [self.value(argument) for argument in call.arguments]
        if call.name in ("min", "max"):
            return self._extreme(call, arguments)
        if len(arguments) != 1:
            raise self._wrong(
                f"{call.name} takes one value, not {len(arguments)}", f"Write `{call.name}(x)`.", call.span
            )
        return self._finite(self._function(call, arguments[0]), call.span)

    def _extreme(self, call: Call, arguments: list[Quantity]) -> Quantity:
        if len(arguments) < 2:
            raise self._wrong(f"{call.name} takes two or more values", f"Write `{call.name}(a, b)`.", call.span)
        if any(argument.dimension != arguments[0].dimension for argument in arguments):
            units = ", ".join(_unit_words(argument) for argument in arguments)
            raise self._wrong(f"the values of {call.name} have different units", f"They are {units}.", call.span)
        chosen = min if call.name == "min" else max
        return chosen(arguments, key=lambda argument: argument.value)

    def _function(self, call: Call, argument: Quantity) -> Quantity:
        if call.name == "abs":
            return Quantity(abs(argument.value), argument.dimension)
        dimension = argument.dimension**0.5 if call.name == "sqrt" else NONE
        allowed = (NONE, ANGLE) if call.name in ("sin", "cos") else (NONE,)
        if call.name != "sqrt" and argument.dimension not in allowed:
            what = f"{call.name} takes a {'number or an angle' if len(allowed) == 2 else 'plain number'}"
            raise self._wrong(
                f"{what}, not {_unit_words(argument)}", "Divide by a value of that unit first.", call.span
            )
        try:
            return Quantity(_PLAIN[call.name](argument.value), dimension)
        except OverflowError:
            return Quantity(math.inf, dimension)
        except ValueError:
            what = f"{call.name} of {argument.value:g} does not exist"
            raise self._wrong(what, "Keep what stands in it above zero.", call.span) from None

    def _finite(self, result: Quantity, span: Span | None) -> Quantity:
        if not all(abs(power) <= HIGHEST_POWER for power in result.dimension.powers):
            what = f"the value has a unit to a power above {HIGHEST_POWER:.0f}"
            raise self._wrong(what, "Check the exponents.", span)
        if math.isfinite(result.value):
            return result
        raise self._wrong("the value is too large to be a number", "Give a value below 1e300.", span)


def _shown(expression: Expression) -> str:
    from grammar.writer import write_expression

    return write_expression(expression)


def _unit_words(value: Quantity) -> str:
    unit = unit_of(value.dimension)
    return f"in {unit}" if unit else "a plain number"


def _operator(expression: Binary) -> Span | None:
    """Where the operator itself stands."""
    left, right = getattr(expression.left, "span", None), getattr(expression.right, "span", None)
    if left is None or right is None:
        return expression.span
    position = left.source.text.find(expression.operator, left.end, right.start)
    return Span(left.source, position, position + 1) if position >= 0 else expression.span
