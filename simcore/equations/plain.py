"""The plain evaluation of a graph: each value computed once, in order, on floats or on whole arrays.

It is what the emitted source is tested against, and what the solution uses for signals that are known without solving.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from simcore.equations.values import Value, ancestors

_FUNCTIONS = {"exp": np.exp, "log": np.log, "sqrt": np.sqrt, "sin": np.sin, "cos": np.cos}


def evaluate(targets: Sequence[Value], inputs: Mapping[str, Any]) -> list[Any]:
    """The targets' values for the named inputs (floats, or arrays of one shape). KeyError for an input not given."""
    known: dict[int, Any] = {}
    for node in ancestors(list(targets)):
        known[node.index] = _compute(node, known, inputs)
    return [known[target.index] for target in targets]


def _compute(node: Value, known: dict[int, Any], inputs: Mapping[str, Any]) -> Any:
    if node.operation == "constant":
        return node.arguments[0]
    if node.operation == "input":
        return inputs[node.arguments[0]]
    arguments = [known[argument.index] for argument in node.arguments]
    match node.operation:
        case "+":
            return arguments[0] + arguments[1]
        case "-":
            return arguments[0] - arguments[1]
        case "*":
            return arguments[0] * arguments[1]
        case "/":
            return arguments[0] / arguments[1]
        case "neg":
            return -arguments[0]
        case "where":
            return np.where(arguments[0] > 0.0, arguments[1], arguments[2])
    return _FUNCTIONS[node.operation](arguments[0])
