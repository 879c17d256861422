"""Small changes to expressions: an element in the place of `each`, other names for names.

It knows the forms of expressions and nothing of what they mean.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from grammar.description import Binary, Branch, Call, Comparison, Each, Expression, Name, Negative


def eaches(claim: Comparison) -> list[Each]:
    """Every `each` in a claim, in the order written."""
    found: list[Each] = []

    def walk(expression: object) -> None:
        if isinstance(expression, Each):
            found.append(expression)
        for child in _children(expression):
            walk(child)

    for each in (claim.figure, claim.bound, claim.upper):
        walk(each)
    return found


def _children(expression: object) -> tuple[Expression, ...]:
    if isinstance(expression, Negative):
        return (expression.operand,)
    if isinstance(expression, Binary):
        return (expression.left, expression.right)
    if isinstance(expression, Call):
        return expression.arguments
    return ()


def put_element(expression: Expression, element: Name) -> Expression:
    """The expression with an element in the place of its `each`."""
    if isinstance(expression, Each):
        return replace(element, span=expression.span)
    if isinstance(expression, Negative):
        return replace(expression, operand=put_element(expression.operand, element))
    if isinstance(expression, Binary):
        return replace(
            expression, left=put_element(expression.left, element), right=put_element(expression.right, element)
        )
    if isinstance(expression, Call):
        return replace(expression, arguments=tuple(put_element(each, element) for each in expression.arguments))
    return expression


def rename(expression: Expression, change: Callable[[Name], Name]) -> Expression:
    """The expression with each of its names changed."""
    if isinstance(expression, Name):
        return change(expression)
    if isinstance(expression, Branch):
        return replace(expression, start=change(expression.start), end=change(expression.end))
    if isinstance(expression, Negative):
        return replace(expression, operand=rename(expression.operand, change))
    if isinstance(expression, Binary):
        left, right = (rename(each, change) for each in (expression.left, expression.right))
        return replace(expression, left=left, right=right)
    if isinstance(expression, Call):
        return replace(expression, arguments=tuple(rename(each, change) for each in expression.arguments))
    return expression
