"""Graph values as lines of straight-line Python over local floats, grouped by how often they must be computed.

Emission is exact and repeatable: numbers by repr, values in the order of their making, names that are our own indices.
No text of a description reaches the source.
"""

from __future__ import annotations

import re

from simcore.equations.values import FUNCTIONS, Level, Value, ancestors

_INLINE_DEPTH = 6
_NAMES_AT_HAND = 200


class Emitter:
    """Assigns values to stages and writes each stage's lines; a value used once, by its own stage, is written in
    place."""

    def __init__(self, stages: dict[str, list[Value]], names: dict[int, str] | None = None):
        """stages: name -> targets that must be known after it. The names "variant", "step", "time" and "response" take
        the values of those levels; one that changes at every iteration belongs to the first other stage that needs it,
        else to "after". names: what some targets are to be called, by index."""
        self._stage: dict[int, str] = {}
        self._depth: dict[int, int] = {}
        self._text: dict[int, str] = {}
        self._names = names or {}
        self._kept = {target.index for targets in stages.values() for target in targets}
        self.lines: dict[str, list[str]] = {name: [] for name in stages}
        fixed = {level: level.name.lower() for level in (Level.VARIANT, Level.STEP, Level.TIME, Level.RESPONSE)}
        for name, targets in stages.items():
            other = "after" if name == "response" else name
            for value in ancestors(targets):
                if value.operation not in ("constant", "input") and value.index not in self._stage:
                    self._stage[value.index] = fixed.get(value.level, other)
        self._write(stages)

    def _write(self, stages: dict[str, list[Value]]) -> None:
        values = ancestors([target for targets in stages.values() for target in targets])
        users: dict[int, list[Value]] = {}
        for value in values:
            if value.operation not in ("constant", "input"):
                for argument in value.arguments:
                    users.setdefault(argument.index, []).append(value)
        for value in values:
            if value.operation in ("constant", "input"):
                self._text[value.index] = _leaf(value)
                self._depth[value.index] = 0
                continue
            self._emit(value, users.get(value.index, []))

    def _emit(self, value: Value, users: list[Value]) -> None:
        expression, depth = self._expression(value)
        stage = self._stage[value.index]
        single = len(users) == 1 and self._stage.get(users[0].index) == stage
        if single and value.index not in self._kept and depth < _INLINE_DEPTH:
            self._text[value.index] = expression if value.operation in FUNCTIONS else f"({expression})"
            self._depth[value.index] = depth
            return
        name = self._names.get(value.index, f"x{value.index}")
        self.lines[stage].append(f"{name} = {expression}")
        self._text[value.index] = name
        self._depth[value.index] = 0

    def _expression(self, value: Value) -> tuple[str, int]:
        texts = [self._text[argument.index] for argument in value.arguments]
        depth = 1 + max(self._depth[argument.index] for argument in value.arguments)
        if value.operation in FUNCTIONS:
            return f"{value.operation}({texts[0]})", depth
        if value.operation == "neg":
            return f"-{texts[0]}", depth
        if value.operation == "where":
            return f"{texts[1]} if {texts[0]} > 0.0 else {texts[2]}", depth
        return f"{texts[0]} {value.operation} {texts[1]}", depth

    def name(self, value: Value) -> str:
        """How a target is called in the source."""
        return self._text[value.index]


def names_first(function: list[str], often: list[str]) -> list[str]:
    """A function's lines, where it has many numbered names with those of its lines that run most often first: CPython
    numbers local names in the order of their first use, and from 256 on each use costs a further instruction."""
    if len(_names(function)) <= _NAMES_AT_HAND:
        return function
    return [function[0], *(f"    {name} = 0.0" for name in _names(often)), *function[1:]]


def _names(lines: list[str]) -> dict[str, None]:
    """The names of numbers that lines use or set; of those without a number behind them only d, which is used most."""
    return dict.fromkeys(re.findall(r"\b(?:[a-z]\w*\d|d)\b", "\n".join(lines)))


def _leaf(value: Value) -> str:
    if value.operation == "input":
        return value.arguments[0]
    number = value.arguments[0]
    return f"({number!r})" if number < 0.0 else repr(number)


def operation_counts(source_values: list[Value]) -> dict[str, int]:
    """How many operations of each kind the targets need, for tests that hold the generator to a table."""
    counts: dict[str, int] = {}
    for value in ancestors(source_values):
        if value.operation not in ("constant", "input"):
            counts[value.operation] = counts.get(value.operation, 0) + 1
    return counts
