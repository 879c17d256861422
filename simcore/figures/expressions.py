"""What an observe may hold, worked out on a solution: names become signals, arithmetic becomes that of signals.

Names are full names of nodes, elements and observes, values are numbers, and units have been checked before; what is
still wrong is said by an exception. Figures, and how studies were solved, are not known here.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import reduce

import numpy as np

from grammar.description import Binary, Branch, Call, Expression, Name, Negative, Number, Part
from grammar.quantities import ANGLE, NONE, Dimension, Quantity, quantity
from simcore.figures.catalogue import SIGNALS
from simcore.figures.record import Record, UnknownName
from simcore.figures.signal import Signal, SignalError, fitted, larger, power, smaller


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
    return quantity(number.value, number.unit)


def signal_of(expression: Expression, record: Record) -> Signal:
    """The signal an expression stands for, over the whole study.

    UnknownName for a name that the circuit does not have, SignalError where it has a pole or its units do not agree.
    """
    if isinstance(expression, Number):
        quantity = quantity_of(expression)
        return Signal.constant(record.times, quantity.value, quantity.dimension)
    if isinstance(expression, Name):
        return observed(name_text(expression), record)
    if isinstance(expression, Negative):
        return -signal_of(expression.operand, record)
    if isinstance(expression, Binary):
        return _binary(expression, record)
    if isinstance(expression, Call) and expression.name in SIGNALS:
        return _of_circuit(expression, record)
    if isinstance(expression, Call) and expression.name in FUNCTIONS:
        return _function(expression.name, [signal_of(argument, record) for argument in expression.arguments])
    raise UnknownName(f"{expression.name if isinstance(expression, Call) else 'this'} is no signal")


def observed(name: str, record: Record) -> Signal:
    """An observed signal by name, over the whole study."""
    found = record.circuit.observes.get(name)
    if found is None:
        raise UnknownName(f"nothing observed is called {name}")
    return record.keep(("observe", name), lambda: signal_of(found.value, record))


def _of_circuit(call: Call, record: Record) -> Signal:
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
    if call.name == "heat":
        return record.heat(name)
    return record.power(name) if call.name == "power" else record.temperature(name)


def _binary(expression: Binary, record: Record) -> Signal:
    left, operator = signal_of(expression.left, record), expression.operator
    if operator == "^":
        exponent = expression.right
        if not isinstance(exponent, Number) or quantity_of(exponent).dimension != NONE:
            raise SignalError("an exponent is a plain number")
        value = quantity_of(exponent).value
        return power(left, value, left.dimension**value)
    right = signal_of(expression.right, record)
    if operator == "*":
        return left * right
    if operator == "/":
        return left / right
    if left.dimension != right.dimension:
        raise SignalError(f"the two sides of {operator} have different units")
    return left + right if operator == "+" else left - right


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


def function_dimension(name: str, dimensions: list[Dimension]) -> Dimension:
    """The dimension of a function's result from those of its arguments; SignalError where it takes none such."""
    first = dimensions[0]
    if any(dimension != first for dimension in dimensions):
        raise SignalError(f"what {name} compares has different units")
    if name == "sqrt":
        return first**0.5
    if name in ("abs", "min", "max"):
        return first
    if first == NONE or (first == ANGLE and name in ("sin", "cos")):
        return NONE
    raise SignalError(f"{name} takes a plain number")


def _function(name: str, signals: list[Signal]) -> Signal:
    dimension = function_dimension(name, [signal.dimension for signal in signals])
    if name in ("min", "max"):
        return reduce(smaller if name == "min" else larger, signals)
    (only,) = signals
    if name == "abs":
        return abs(only)
    if name == "sqrt":
        return power(only, 0.5, dimension)
    return fitted(FUNCTIONS[name], (only,), dimension)
