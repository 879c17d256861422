"""A signal that switches something, as a sum of voltages and currents.

It knows resolved expressions and elements, and nothing of equations.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from grammar.description import Binary, Branch, Call, Expression, Name, Negative, Number
from grammar.quantities import quantity
from grammar.writer import write_expression
from simcore.design.circuit import Element

UNSENSED = ("source", "three_phase", "transformer")
"""Kinds whose current may be forced by the rest of the circuit alone, so that it is not sensed."""


@dataclass(frozen=True)
class SensedTerm:
    """factor times the voltage of node a against node b (None: against its reference) in V, or the current into an
    element's port at its node a, in A."""

    factor: float
    a: str
    b: str | None = None
    element: str = ""
    port: str = ""


class NotLinear(ValueError):
    """An expression that is no sum of voltages and currents; the text says what it is, `cure` what to do."""

    def __init__(self, what: str):
        super().__init__(what)
        self.cure = "Write a voltage or current, or sums, differences and fixed multiples of such."


def sensed(
    expression: Expression, elements: Mapping[str, Element], observes: Mapping[str, Expression]
) -> list[SensedTerm]:
    """An expression in full names as terms. Raises NotLinear."""
    if isinstance(expression, Negative):
        return _scaled(sensed(expression.operand, elements, observes), -1.0)
    if isinstance(expression, Binary) and expression.operator in "+-":
        right = sensed(expression.right, elements, observes)
        sign = 1.0 if expression.operator == "+" else -1.0
        return sensed(expression.left, elements, observes) + _scaled(right, sign)
    if isinstance(expression, Binary) and expression.operator in "*/":
        left, right = expression.left, expression.right
        if isinstance(left, Number) and expression.operator == "*":
            left, right = right, left
        if isinstance(right, Number):
            value = quantity(right.value, right.unit).value
            return _scaled(sensed(left, elements, observes), value if expression.operator == "*" else 1.0 / value)
    if isinstance(expression, Name) and write_expression(expression) in observes:
        return sensed(observes[write_expression(expression)], elements, observes)
    if isinstance(expression, Call) and expression.name in ("voltage", "current"):
        return [_term(expression, elements)]
    raise NotLinear("what it senses is no sum of voltages and currents")


def _term(call: Call, elements: Mapping[str, Element]) -> SensedTerm:
    (argument,) = call.arguments
    if isinstance(argument, Branch):
        return SensedTerm(1.0, write_expression(argument.start), write_expression(argument.end))
    name = write_expression(argument)
    if name not in elements:
        owner, _, port_name = name.rpartition(".")
        port = next((p for p in elements[owner].ports if p.name == port_name), None) if owner in elements else None
        if port is None:
            return SensedTerm(1.0, name)
        element = elements[owner]
    else:
        element, port = elements[name], elements[name].ports[0]
    if call.name == "voltage":
        return SensedTerm(1.0, port.a, port.b)
    if element.kind in UNSENSED:
        raise NotLinear(f"the current of a {element.kind} can't be sensed")
    return SensedTerm(1.0, port.a, None, element.name, port.name)


def _scaled(terms: list[SensedTerm], factor: float) -> list[SensedTerm]:
    return [replace(term, factor=factor * term.factor) for term in terms]


def write_sensed(terms: Sequence[SensedTerm]) -> str:
    """A sensed signal in words."""
    return " + ".join(_written(term) for term in terms).replace("+ -", "- ")


def _written(term: SensedTerm) -> str:
    branch = term.a if term.b is None else f"{term.a} -> {term.b}"
    owner = f"{term.element}.{term.port}" if term.port else term.element
    text = f"current({owner})" if term.element else f"voltage({branch})"
    factor = {1.0: "", -1.0: "-"}.get(term.factor, f"{term.factor:g} * ")
    return factor + text
