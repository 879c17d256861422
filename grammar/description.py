"""What a description file says, statement by statement: the meaning of the text and where each piece stood.

Plain frozen data. Spans never take part in equality, so two texts that mean the same compare equal. Nothing here knows
physics, circuit graphs or files on disk.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from grammar.axes import Axis
from grammar.spans import Source, Span


def _span() -> Span | None:
    return field(default=None, compare=False, repr=False)


# --- expressions ---------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Number:
    """A literal: `4700 uF` is Number(4700.0, "uF"); unit "" where none was written."""

    value: float
    unit: str = ""
    span: Span | None = _span()


@dataclass(frozen=True)
class Range:
    """An index range in a list of names: `D[1..4]`."""

    first: Expression
    last: Expression


@dataclass(frozen=True)
class Part:
    """One step of a name: `m[i][j]` is Part("m", (i, j))."""

    name: str
    indices: tuple[Expression | Range, ...] = ()


@dataclass(frozen=True)
class Name:
    """A dotted, indexed name: `B[2].mid[1]` has two parts."""

    parts: tuple[Part, ...]
    span: Span | None = _span()


@dataclass(frozen=True)
class Negative:
    operand: Expression
    span: Span | None = _span()


@dataclass(frozen=True)
class Binary:
    """operator is one of + - * / ^."""

    operator: str
    left: Expression
    right: Expression
    span: Span | None = _span()


@dataclass(frozen=True)
class Branch:
    """`a -> b`: between two nodes, positive from the first to the second."""

    start: Name
    end: Name
    span: Span | None = _span()


@dataclass(frozen=True)
class Each:
    """`each diode`."""

    kind: str
    span: Span | None = _span()


@dataclass(frozen=True)
class Call:
    """A function, a signal or a figure: `sqrt(x)`, `voltage(a -> b)`, `mean(u) at light_load`."""

    name: str
    arguments: tuple[Expression, ...]
    study: str | None = None
    span: Span | None = _span()


Expression = Number | Name | Negative | Binary | Branch | Each | Call


# --- what a key may be given ---------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Point:
    """`0.7 V @ 10 mA`."""

    value: Expression
    at: Expression
    span: Span | None = _span()


@dataclass(frozen=True)
class Ratio:
    """`230 : 12 : 12`, one value a winding or phase."""

    values: tuple[Expression, ...]
    span: Span | None = _span()


@dataclass(frozen=True)
class Amplitude:
    """`400 V line rms`; `of` is "line", "phase" or "", `measure` is "rms" or "peak"."""

    values: tuple[Expression, ...]
    measure: str
    of: str = ""
    span: Span | None = _span()


@dataclass(frozen=True)
class Item:
    """One entry of a list: `v`, `k: v`, `v @ x`, `k: v @ x` (key None where there is none, likewise at)."""

    value: Expression
    key: Expression | None = None
    at: Expression | None = None


@dataclass(frozen=True)
class Listed:
    """`[a, b, c]`."""

    items: tuple[Item, ...]
    span: Span | None = _span()


@dataclass(frozen=True)
class Text:
    """A quoted string."""

    text: str
    span: Span | None = _span()


@dataclass(frozen=True)
class Worst:
    """`angle = worst for peak(current(mains))`."""

    figure: Expression
    span: Span | None = _span()


Given = Expression | Point | Ratio | Amplitude | Listed | Text | Worst


@dataclass(frozen=True)
class Setting:
    """`key = value`."""

    key: str
    value: Given
    span: Span | None = _span()


# --- statements ----------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Purpose:
    text: str
    span: Span | None = _span()


@dataclass(frozen=True)
class Use:
    path: str
    span: Span | None = _span()


@dataclass(frozen=True)
class Reference:
    nodes: tuple[Name, ...]
    span: Span | None = _span()


@dataclass(frozen=True)
class Ambient:
    temperature: Expression
    span: Span | None = _span()


@dataclass(frozen=True)
class Spread:
    """The tolerance of a let: one expression, or two around `..`; distribution "" means uniform."""

    low: Expression
    high: Expression | None = None
    distribution: str = ""


@dataclass(frozen=True)
class Let:
    name: Name
    value: Expression
    spread: Spread | None = None
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Datasheet:
    """whole: False where one of its keys could not be read."""

    name: str
    kind: str
    settings: tuple[Setting, ...]
    label: str | None = None
    span: Span | None = _span()
    whole: bool = field(default=True, compare=False, repr=False)


@dataclass(frozen=True)
class Parameter:
    name: str
    default: Expression | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Block:
    name: str
    terminals: tuple[Name, ...]
    parameters: tuple[Parameter, ...]
    body: tuple[Statement, ...]
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Repeat:
    variable: str
    first: Expression
    last: Expression
    body: tuple[Statement, ...]
    span: Span | None = _span()


@dataclass(frozen=True)
class Terminals:
    """Where an element goes. form is "branch" (a -> b: nodes (a, b)), "set" ((a, b, c) or (a, b, c) -> n: nodes, star)
    or "windings" ((a -> b) : (c -> d): nodes (a, b, c, d))."""

    form: str
    nodes: tuple[Name, ...]
    star: Name | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Element:
    """`TERMINALS: KIND NAME, value, key = value`; value is an unnamed argument (None where there is none)."""

    terminals: Terminals
    kind: str
    name: Name
    value: Expression | None
    settings: tuple[Setting, ...]
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Observe:
    name: Name
    value: Expression
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Action:
    """verb is open, close, short (target set) or set (target is the let, value its new value)."""

    verb: str
    target: Name
    value: Expression | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Event:
    time: Expression
    action: Action
    span: Span | None = _span()


@dataclass(frozen=True)
class Study:
    name: str
    kind: str
    settings: tuple[Setting, ...]
    actions: tuple[Action, ...]
    events: tuple[Event, ...]
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Comparison:
    """`figure <= bound`; relation is one of <= >= < > between (low and high) ; within has a text."""

    figure: Expression
    relation: str
    bound: Expression | None = None
    upper: Expression | None = None
    table: str | None = None


@dataclass(frozen=True)
class Ratings:
    """`ratings`, `ratings of each KIND` (one Each) or `ratings of X, Y`."""

    of: tuple[Name | Each, ...]
    settings: tuple[Setting, ...]


@dataclass(frozen=True)
class Require:
    """studies is () for `each study`."""

    studies: tuple[str, ...]
    claim: Comparison | Ratings
    label: str | None = None
    span: Span | None = _span()


@dataclass(frozen=True)
class Sweep:
    name: str
    axes: tuple[Axis, ...]
    settings: tuple[Setting, ...]
    label: str | None = None
    span: Span | None = _span()


Statement = (
    Purpose | Use | Let | Reference | Ambient | Datasheet | Block | Repeat | Element | Observe | Study | Require | Sweep
)


@dataclass(frozen=True)
class Description:
    """A whole file, in the order written.

    unread: the words of statements that could not be read, which may name anything, and "" where one names something
    that can't be told; lost: whether nobody knows where
    the statements belong, since braces don't match or the text as a whole could not be read
    """

    statements: tuple[Statement, ...]
    source: Source | None = field(default=None, compare=False, repr=False)
    unread: frozenset[str] = field(default=frozenset(), compare=False, repr=False)
    lost: bool = field(default=False, compare=False, repr=False)
