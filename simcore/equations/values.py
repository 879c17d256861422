"""Scalar operations as a graph: what component physics and elimination write down instead of computing.

Ordinary operators on `Value` build the graph; equal expressions are shared, constants are folded, and every value knows
the slowest level at which its inputs change. Nothing here knows components, matrices or how the graph is run.
"""

from __future__ import annotations

import math
from enum import IntEnum


class Level(IntEnum):
    """How often an input changes, from never to at every Newton iteration, and to every direction of a response."""

    DESIGN = 0
    VARIANT = 1
    STEP = 2
    TIME = 3
    ITERATION = 4
    RESPONSE = 5


_FOLD = {
    "+": lambda a, b: a + b,
    "-": lambda a, b: a - b,
    "*": lambda a, b: a * b,
    "/": lambda a, b: a / b,
    "neg": lambda a: -a,
    "exp": math.exp,
    "log": math.log,
    "sqrt": math.sqrt,
    "sin": math.sin,
    "cos": math.cos,
}
FUNCTIONS = ("exp", "log", "sqrt", "sin", "cos")


class Value:
    """One scalar of the graph. Arithmetic with values and floats gives values.

    operation: "constant", "input" or a key of the operation table; arguments: values, or the payload of a leaf
    positive: known not to be below zero whatever the inputs are, by construction
    """

    __slots__ = ("graph", "operation", "arguments", "level", "positive", "index")

    def __init__(self, graph: Graph, operation: str, arguments: tuple, level: Level, positive: bool, index: int):
        self.graph = graph
        self.operation = operation
        self.arguments = arguments
        self.level = level
        self.positive = positive
        self.index = index

    @property
    def constant(self) -> float | None:
        """The number, where the value is one."""
        return self.arguments[0] if self.operation == "constant" else None

    def __add__(self, other: Value | float) -> Value:
        return self.graph.add(self, self.graph.lift(other))

    def __radd__(self, other: float) -> Value:
        return self.graph.add(self.graph.lift(other), self)

    def __sub__(self, other: Value | float) -> Value:
        return self.graph.subtract(self, self.graph.lift(other))

    def __rsub__(self, other: float) -> Value:
        return self.graph.subtract(self.graph.lift(other), self)

    def __mul__(self, other: Value | float) -> Value:
        return self.graph.multiply(self, self.graph.lift(other))

    def __rmul__(self, other: float) -> Value:
        return self.graph.multiply(self.graph.lift(other), self)

    def __truediv__(self, other: Value | float) -> Value:
        return self.graph.divide(self, self.graph.lift(other))

    def __rtruediv__(self, other: float) -> Value:
        return self.graph.divide(self.graph.lift(other), self)

    def __neg__(self) -> Value:
        return self.graph.negate(self)

    def __repr__(self) -> str:
        return f"Value({self.operation}, {self.index})"


class Graph:
    """Builds and shares values. Values are numbered in the order of their making, arguments first."""

    def __init__(self) -> None:
        self.values: list[Value] = []
        self._known: dict[tuple, Value] = {}
        self.zero = self.constant(0.0)
        self.one = self.constant(1.0)

    def constant(self, number: float) -> Value:
        number = float(number)
        return self._make("constant", (number,), Level.DESIGN, number >= 0.0)

    def input(self, name: str, level: Level, positive: bool = False) -> Value:
        return self._make("input", (name,), level, positive)

    def lift(self, value: Value | float) -> Value:
        return value if isinstance(value, Value) else self.constant(value)

    def _make(self, operation: str, arguments: tuple, level: Level, positive: bool) -> Value:
        key = (operation, *(a.index if isinstance(a, Value) else repr(a) for a in arguments))
        known = self._known.get(key)
        if known is None:
            known = Value(self, operation, arguments, level, positive, len(self.values))
            self.values.append(known)
            self._known[key] = known
        return known

    def _apply(self, operation: str, arguments: tuple[Value, ...], positive: bool) -> Value:
        if all(a.operation == "constant" for a in arguments):
            return self.constant(_FOLD[operation](*(a.arguments[0] for a in arguments)))
        return self._make(operation, arguments, max(a.level for a in arguments), positive)

    def add(self, a: Value, b: Value) -> Value:
        if a.constant == 0.0:
            return b
        if b.constant == 0.0:
            return a
        if b.operation == "neg":
            return self.subtract(a, b.arguments[0])
        return self._apply("+", (a, b), a.positive and b.positive)

    def subtract(self, a: Value, b: Value) -> Value:
        if b.constant == 0.0:
            return a
        if a.constant == 0.0:
            return self.negate(b)
        if a is b:
            return self.zero
        if b.operation == "neg":
            return self.add(a, b.arguments[0])
        return self._apply("-", (a, b), False)

    def multiply(self, a: Value, b: Value) -> Value:
        if a.constant == 0.0 or b.constant == 0.0:
            return self.zero
        if a.constant == 1.0:
            return b
        if b.constant == 1.0:
            return a
        if a.constant == -1.0:
            return self.negate(b)
        if b.constant == -1.0:
            return self.negate(a)
        return self._apply("*", (a, b), (a.positive and b.positive) or a is b)

    def divide(self, a: Value, b: Value) -> Value:
        if a.constant == 0.0:
            return self.zero
        if b.constant == 1.0:
            return a
        if b.constant == -1.0:
            return self.negate(a)
        return self._apply("/", (a, b), a.positive and b.positive)

    def negate(self, a: Value) -> Value:
        if a.operation == "neg":
            return a.arguments[0]
        return self._apply("neg", (a,), False)

    def call(self, function: str, a: Value) -> Value:
        return self._apply(function, (a,), function in ("exp", "sqrt"))

    def choose(self, decides: Value, a: Value, b: Value, positive: bool) -> Value:
        """a where `decides` is above zero, else b; both are computed, so neither may fail where it is not chosen.
        positive: as of a value."""
        if decides.constant is not None or a is b:
            return a if a is b or decides.arguments[0] > 0.0 else b
        level = max(decides.level, a.level, b.level)
        return self._make("where", (decides, a, b), level, positive)

    def total(self, terms: list[Value]) -> Value:
        """Sum of terms, slow levels first, so that a partial sum is computed as seldom as its inputs change."""
        result = self.zero
        for term in sorted(terms, key=lambda value: value.level):
            result = self.add(result, term)
        return result


def where(decides: Value, a: Value | float, b: Value | float) -> Value:
    """a where `decides` is above zero, else b."""
    first, second = decides.graph.lift(a), decides.graph.lift(b)
    return decides.graph.choose(decides, first, second, first.positive and second.positive)


def larger(a: Value, b: Value | float) -> Value:
    """The larger of two."""
    other = a.graph.lift(b)
    return a.graph.choose(a - other, a, other, a.positive or other.positive)


def exp(a: Value) -> Value:
    return a.graph.call("exp", a)


def log(a: Value) -> Value:
    return a.graph.call("log", a)


def sqrt(a: Value) -> Value:
    return a.graph.call("sqrt", a)


def sin(a: Value) -> Value:
    return a.graph.call("sin", a)


def cos(a: Value) -> Value:
    return a.graph.call("cos", a)


def derivative(value: Value, variable: Value) -> Value:
    """d value / d variable."""
    return changes([value], {variable.index: value.graph.one})[0]


def changes(values: list[Value], directions: dict[int, Value]) -> list[Value]:
    """How values change along a direction in their inputs, given as input's index -> its change, by forward
    accumulation over the graph (Wengert, Comm. ACM 7, 1964). Inputs that are not named stand still."""
    slopes: dict[int, Value] = {}
    for node in ancestors(values):
        slopes[node.index] = directions.get(node.index) or _slope(node, slopes)
    return [slopes[value.index] for value in values]


def _slope(node: Value, slopes: dict[int, Value]) -> Value:
    graph, arguments = node.graph, node.arguments
    if node.operation in ("constant", "input"):
        return graph.zero
    inner = slopes[arguments[0].index]
    match node.operation:
        case "+":
            return inner + slopes[arguments[1].index]
        case "-":
            return inner - slopes[arguments[1].index]
        case "*":
            return inner * arguments[1] + arguments[0] * slopes[arguments[1].index]
        case "/":
            return (inner - node * slopes[arguments[1].index]) / arguments[1]
        case "neg":
            return -inner
        case "exp":
            return node * inner
        case "log":
            return inner / arguments[0]
        case "sqrt":
            return inner / (2.0 * node)
        case "sin":
            return cos(arguments[0]) * inner
        case "cos":
            return -(sin(arguments[0]) * inner)
        case "where":
            return where(arguments[0], slopes[arguments[1].index], slopes[arguments[2].index])
    raise ValueError(f"no derivative is known for {node.operation}")


def ancestors(targets: list[Value]) -> list[Value]:
    """All values the targets depend on, themselves included, in an order in which they can be computed."""
    found: dict[int, Value] = {}
    pending = list(targets)
    while pending:
        node = pending.pop()
        if node.index not in found:
            found[node.index] = node
            if node.operation not in ("constant", "input"):
                pending.extend(node.arguments)
    return [found[index] for index in sorted(found)]
