"""What an observe may hold, worked out on a solution: names become signals, arithmetic becomes that of signals.

Names are full names of nodes, elements, observes and lets, and units have been checked before; what is still wrong is
said by an exception. Figures, and how studies were solved, are not known here.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import reduce

import numpy as np

from grammar.description import Binary, Branch, Call, Expression, Name, Negative, Number, Part
from grammar.expressions import evaluate
from grammar.quantities import ANGLE, NONE, Dimension, Quantity
from simcore.figures.catalogue import SIGNALS
from simcore.figures.record import Record, UnknownName
from simcore.figures.signal import Signal, SignalError, fitted, larger, power, smaller

Operand = Signal | Quantity


def name_text(name: Name) -> str:
    """A name as the circuit's tables hold it: `B[2].mid[1]`; its indices are plain numbers by now."""
    return ".".join(_part_text(part) for part in name.parts)


def _part_text(part: Part) -> str:
    return part.name + "".join(f"[{_index(index)}]" for index in part.indices)


def _index(index: object) -> int:
    if not isinstance(index, Number):
        raise UnknownName("an index is not a number here")
    return int(index.value)


def quantity_of(number: Number) -> Quantity:
    """A literal in SI units."""
    return evaluate(number, _no_names)


def _no_names(name: Name) -> Quantity:
    raise UnknownName(f"{name_text(name)} is no number")


# --- signals ---------------------------------------------------------------------------------------------------------


def signal_of(expression: Expression, record: Record) -> Signal:
    """The signal an expression stands for, over the whole study.

    UnknownName for a name that the circuit does not have, SignalError where it has a pole or its units do not agree.
    """
    operand = _operand(expression, record)
    if isinstance(operand, Signal):
        return operand
    return Signal.constant(record.times, operand.value, operand.dimension)


def observed(name: str, record: Record) -> Signal:
    """An observed signal by name, over the whole study."""
    found = record.circuit.observes.get(name)
    if found is None:
        raise UnknownName(f"nothing observed is called {name}")
    return record.keep(("observe", name), lambda: signal_of(found.value, record))


def _operand(expression: Expression, record: Record) -> Operand:
    if isinstance(expression, Number):
        return quantity_of(expression)
    if isinstance(expression, Name):
        return _named(name_text(expression), record)
    if isinstance(expression, Negative):
        inner = _operand(expression.operand, record)
        return -inner if isinstance(inner, Signal) else Quantity(-inner.value, inner.dimension)
    if isinstance(expression, Binary):
        left, right = _operand(expression.left, record), _operand(expression.right, record)
        return _binary(expression.operator, left, right)
    if isinstance(expression, Call):
        if expression.name in SIGNALS:
            return _signal_call(expression, record)
        if expression.name in FUNCTIONS:
            return _function(expression.name, [_operand(argument, record) for argument in expression.arguments])
        raise UnknownName(f"{expression.name} is no signal")
    raise UnknownName("this is no signal")


def _named(name: str, record: Record) -> Operand:
    if name in record.circuit.observes:
        return observed(name, record)
    return let_value(name, record)


def let_value(name: str, record: Record) -> Quantity:
    """The value of a let, or pi."""
    if name == "pi":
        return Quantity(math.pi, NONE)
    found = record.circuit.lets.get(name)
    if found is None or not isinstance(found.value, Quantity):
        raise UnknownName(f"{name} is neither a signal nor a value")
    return found.value


def _signal_call(call: Call, record: Record) -> Signal:
    (argument,) = call.arguments
    if call.name == "voltage" and isinstance(argument, Branch):
        return record.between(name_text(argument.start), name_text(argument.end))
    if not isinstance(argument, Name):
        raise UnknownName(f"{call.name} takes a name")
    name = name_text(argument)
    if call.name == "voltage":
        return record.between(name) if name in record.nodes else record.voltage(name)
    if call.name == "current":
        return record.current(name)
    return record.power(name) if call.name == "power" else record.temperature(name)


def _binary(operator: str, left: Operand, right: Operand) -> Operand:
    if operator in "+-":
        if left.dimension != right.dimension:
            raise SignalError(f"the two sides of {operator} have different units")
        return _sum(left, right if operator == "+" else _binary("*", Quantity(-1.0, NONE), right))
    if operator == "*":
        return _product(left, right)
    if operator == "/":
        return _quotient(left, right)
    if isinstance(right, Signal) or right.dimension != NONE:
        raise SignalError("an exponent is a plain number")
    dimension = left.dimension**right.value
    if isinstance(left, Signal):
        return power(left, right.value, dimension)
    return Quantity(guarded(lambda: left.value**right.value), dimension)


def _sum(left: Operand, right: Operand) -> Operand:
    if isinstance(left, Signal):
        return left + (right if isinstance(right, Signal) else right.value)
    return right + left.value if isinstance(right, Signal) else Quantity(left.value + right.value, left.dimension)


def _product(left: Operand, right: Operand) -> Operand:
    if isinstance(left, Signal) and isinstance(right, Signal):
        return left * right
    dimension = left.dimension * right.dimension
    if isinstance(left, Signal):
        return left.scaled(right.value, dimension)  # type: ignore[union-attr]
    if isinstance(right, Signal):
        return right.scaled(left.value, dimension)
    return Quantity(left.value * right.value, dimension)


def _quotient(left: Operand, right: Operand) -> Operand:
    if isinstance(right, Signal):
        return left / right if isinstance(left, Signal) else _product(left, 1.0 / right)
    if right.value == 0.0:
        raise SignalError("it divides by zero")
    return _product(left, Quantity(1.0 / right.value, NONE / right.dimension))


def guarded(work: Callable[[], float]) -> float:
    """The finite real number that work gives, else SignalError."""
    try:
        result = work()
    except (ValueError, OverflowError, ZeroDivisionError):
        raise SignalError("a function is not defined there") from None
    if isinstance(result, complex) or not math.isfinite(result):
        raise SignalError("a function is not defined there")
    return result


FUNCTIONS: dict[str, Callable[..., np.ndarray]] = {
    "sqrt": np.sqrt,
    "exp": np.exp,
    "log": np.log,
    "sin": np.sin,
    "cos": np.cos,
    "abs": np.abs,
    "min": np.minimum,
    "max": np.maximum,
}


def function_dimension(name: str, dimension: Dimension) -> Dimension:
    """The dimension that a function makes of its argument's."""
    if name == "sqrt":
        return dimension**0.5
    if name in ("abs", "min", "max"):
        return dimension
    if dimension == NONE or (dimension == ANGLE and name in ("sin", "cos")):
        return NONE
    raise SignalError(f"{name} takes a plain number")


def _function(name: str, operands: list[Operand]) -> Operand:
    dimension = function_dimension(name, operands[0].dimension)
    if any(operand.dimension != operands[0].dimension for operand in operands):
        raise SignalError(f"what {name} compares has different units")
    if not any(isinstance(operand, Signal) for operand in operands):
        numbers = [np.asarray(operand.value) for operand in operands]  # type: ignore[union-attr]
        with np.errstate(all="ignore"):
            value = reduce(FUNCTIONS[name], numbers) if name in ("min", "max") else FUNCTIONS[name](*numbers)
        return Quantity(guarded(lambda: float(value)), dimension)
    if name == "abs":
        return abs(operands[0])  # type: ignore[arg-type]
    if name in ("min", "max"):
        return _chosen(smaller if name == "min" else larger, operands)
    (only,) = operands
    if name == "sqrt":
        return power(only, 0.5, dimension)  # type: ignore[arg-type]
    return fitted(FUNCTIONS[name], (only,), dimension)  # type: ignore[arg-type]


def _chosen(choose: Callable[[Signal, Signal], Signal], operands: list[Operand]) -> Signal:
    """The smallest or largest of several, numbers among them turned into constant signals."""
    times = next(operand.times for operand in operands if isinstance(operand, Signal))
    signals = [
        operand if isinstance(operand, Signal) else Signal.constant(times, operand.value, operand.dimension)
        for operand in operands
    ]
    return reduce(choose, signals)
