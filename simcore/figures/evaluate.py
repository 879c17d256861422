"""Figure expressions worked out on the solutions of a file's studies, with bounds from a second, tighter solution.

Names and units have been checked before; what has no value becomes an undefined figure that says why. How studies are
solved is not known here.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from functools import reduce
from importlib import import_module

import numpy as np

from grammar.description import Binary, Call, Expression, Name, Negative, Number
from grammar.quantities import NONE, Quantity
from simcore.figures.catalogue import FIGURES, Measure
from simcore.figures.expressions import (
    FUNCTIONS,
    function_dimension,
    name_text,
    quantity_of,
    signal_of,
)
from simcore.figures.figure import Figure, bounded, formed, plain, undefined
from simcore.figures.record import Record, UnknownName
from simcore.figures.signal import Signal, SignalError

Records = Mapping[str, Record]
"""The record of each study that has been solved, by its name."""


def figure_of(expression: Expression, study: str, records: Records) -> Figure:
    """A figure expression at a study, figures `at` other studies taken from theirs.

    Returns the figure without a bound; an undefined one with its reason where a study was not solved, a name stands for
    nothing or the mathematics has no result.
    """
    try:
        return _figure(expression, study, records)
    except (SignalError, UnknownName) as fault:
        return undefined(NONE, str(fault))


def figures_with_bounds(asked: Iterable[tuple[str, Expression]], coarse: Records, fine: Records) -> list[Figure]:
    """Each (study, figure expression) on the fine solutions, bounded by its difference from the coarse ones."""
    return [
        bounded(figure_of(expression, study, coarse), figure_of(expression, study, fine)) for study, expression in asked
    ]


def _figure(expression: Expression, study: str, records: Records) -> Figure:
    if isinstance(expression, Number):
        number = quantity_of(expression)
        return plain(number.value, number.dimension)
    if isinstance(expression, Negative):
        return -_figure(expression.operand, study, records)
    if isinstance(expression, Binary):
        left, right = _figure(expression.left, study, records), _figure(expression.right, study, records)
        return _binary(expression.operator, left, right)
    if isinstance(expression, Call):
        if expression.name in FIGURES:
            return _figure_call(expression, _record(expression.study or study, records))
        if expression.name in FUNCTIONS:
            return _function(expression.name, [_figure(part, study, records) for part in expression.arguments])
        raise UnknownName(f"{expression.name} is no figure")
    raise UnknownName(f"{name_text(expression) if isinstance(expression, Name) else 'this'} is no figure")


def _record(study: str, records: Records) -> Record:
    if study not in records:
        raise UnknownName(f"study {study} was not solved")
    return records[study]


def _figure_call(call: Call, record: Record) -> Figure:
    if call not in record.figures:
        record.figures[call] = _computed(call, record)
    return record.figures[call]


def _computed(call: Call, record: Record) -> Figure:
    declared = FIGURES[call.name]
    pairs = zip(declared.arguments, call.arguments, strict=False)
    return record.granted(computing(declared)(record, *(_argument(kind, argument, record) for kind, argument in pairs)))


def computing(figure: Measure) -> Callable[..., Figure]:
    """What works a figure out, from a record and its arguments."""
    return getattr(import_module(figure.where), figure.name)


def _argument(kind: str, argument: Expression, record: Record) -> Signal | str | float | int:
    """One argument as the computation takes it."""
    if kind == "signal or branch" and isinstance(argument, Name) and name_text(argument) not in record.circuit.observes:
        return record.current(name_text(argument))
    if kind in ("signal", "signal or branch"):
        return signal_of(argument, record)
    if kind == "level":
        return _figure(argument, "", {}).value
    if kind == "count":
        if not isinstance(argument, Number):
            raise UnknownName("this figure takes a number")
        return _order(quantity_of(argument))
    if not isinstance(argument, Name):
        raise UnknownName("this figure takes the name of an element")
    return name_text(argument)


def _order(number: Quantity) -> int:
    if number.dimension != NONE or number.value < 1.0 or number.value != round(number.value):
        raise SignalError("the order of a harmonic is a whole number from 1 on")
    return int(number.value)


def _binary(operator: str, left: Figure, right: Figure) -> Figure:
    if operator in "+-":
        if left.dimension != right.dimension and left.defined and right.defined:
            raise SignalError(f"the two sides of {operator} have different units")
        return left + right if operator == "+" else left - right
    if operator == "*":
        return left * right
    if operator == "/":
        return left / right
    if right.dimension != NONE:
        raise SignalError("an exponent is a plain number")
    dimension = left.dimension ** (right.value if right.defined else 1.0)
    with np.errstate(all="ignore"):
        value = float(np.float64(left.value) ** right.value)
    return formed(value, dimension, (left, right), abs(value))


def _function(name: str, figures: list[Figure]) -> Figure:
    dimension = function_dimension(name, [figure.dimension for figure in figures])
    numbers = [np.asarray(figure.value) for figure in figures]
    with np.errstate(all="ignore"):
        value = float(reduce(FUNCTIONS[name], numbers) if name in ("min", "max") else FUNCTIONS[name](*numbers))
    return formed(value, dimension, figures, None if name in ("abs", "min", "max") else abs(value))
