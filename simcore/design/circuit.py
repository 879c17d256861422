"""The circuit as understood: flat elements with SI values between named nodes, and what is asked of them.

Produced by `simcore.design.elaborate` from a description and values of lets. Everything downstream reads only this.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from grammar.description import Expression, Sweep
from grammar.quantities import NONE, Dimension, Quantity
from grammar.spans import Span
from simcore.design.accessible import DischargeTable
from simcore.design.limits import LimitTable
from simcore.design.study_kinds import STUDY_KINDS, Nature


@dataclass(frozen=True)
class Port:
    """A pair of terminals: current counts positive from a through the element to b. name is "" for a two-terminal
    element, w1, w2 ... for a transformer's windings, L1, L2, L3 for a set's phases (b is then the star point)."""

    name: str
    a: str
    b: str

    @property
    def index(self) -> int:
        """Which of the values in a ratio is this winding's or phase's; a port keeps it where others are open."""
        return int(self.name[1:]) - 1 if self.name else 0


@dataclass(frozen=True)
class Element:
    """One element.

    given: key -> value as the kind's declaration asks (data sheet merged in, defaults NOT filled in):
           scalar: float in SI; point: (value, at); ratio and list: tuple of floats; series: tuple of (key, value);
           curve: tuple of (value, at); harmonics: tuple of (order, share, angle in rad); amplitude: (tuple of values,
           measure, of);
           text and word: str; expression: a resolved Expression whose names are full names of nodes and elements;
           a diode's data_temperature is filled in, since its default is what was written beside its law
    unit: "V" or "A" for a source, by what its values were given in
    sheet: the name of its data sheet, "" where it has none
    """

    name: str
    kind: str
    ports: tuple[Port, ...]
    given: dict[str, Any]
    unit: str = ""
    sheet: str = ""
    label: str | None = None
    span: Span | None = field(default=None, compare=False, repr=False)
    key_spans: dict[str, Span] = field(default_factory=dict, compare=False, repr=False)


@dataclass(frozen=True)
class Observed:
    """A named signal; names in the expression are full names."""

    name: str
    value: Expression
    unit: str
    label: str | None = None


@dataclass(frozen=True)
class Change:
    """An action on the circuit: verb open, close, short (of an element or winding, `T1.w3`) or set (of a let)."""

    verb: str
    target: str
    value: Quantity | str | None = None
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True)
class PlannedStudy:
    """A study with its values worked out, SI units. angle in rad, None where none is given; worst holds the figure of
    `angle = worst for`; last in periods; changes hold from the start, events from their time in s, sorted."""

    name: str
    kind: str
    duration: float | None = None
    period: float | None = None
    angle: float | None = None
    worst: Expression | None = None
    after: str | None = None
    last: float | None = None
    accuracy: float = 1e-3
    record_every: float | None = None
    changes: tuple[Change, ...] = ()
    events: tuple[tuple[float, Change], ...] = ()
    label: str | None = None
    span: Span | None = field(default=None, compare=False, repr=False)

    @property
    def nature(self) -> Nature:
        """What it finds."""
        return STUDY_KINDS[self.kind].nature


@dataclass(frozen=True)
class Requirement:
    """One requirement on one study (repeats, `each study` and `each KIND` spread out).

    relation: <= >= < > between, ratings or within; bound and upper are figure expressions that may hold figures at
    other studies; elements: those that `ratings` is about, () for all; limits: the table that `within` names; wording:
    the text as tidy writes it, for reports; dimension: of the figure; written: the figure as the text has it, "" where
    there is none; temperature: whether what is in K is a temperature and no difference of such
    """

    study: str
    relation: str
    figure: Expression | None
    bound: Expression | None
    upper: Expression | None
    wording: str
    label: str | None = None
    elements: tuple[str, ...] = ()
    margin: float = 0.0
    limits: LimitTable | DischargeTable | None = None
    span: Span | None = field(default=None, compare=False, repr=False)
    dimension: Dimension = NONE
    written: str = ""
    temperature: bool = False


@dataclass(frozen=True)
class LetValue:
    """A let's value as used, with its tolerance in the value's own SI unit (None where it has none)."""

    name: str
    value: Quantity | str
    low: float | None = None
    high: float | None = None
    distribution: str = "uniform"
    label: str | None = None


@dataclass(frozen=True)
class PlannedRange:
    """`LET from first to last in count steps`: count values, both ends among them."""

    let: str
    first: Quantity
    last: Quantity
    count: int
    logarithmic: bool


@dataclass(frozen=True)
class PlannedList:
    """`LET over [...]`: quantities, or names of data sheets."""

    let: str
    values: tuple[Quantity | str, ...]


@dataclass(frozen=True)
class PlannedExtremes:
    """Every corner of the lets' tolerances, and the nominal."""

    lets: tuple[str, ...]


@dataclass(frozen=True)
class PlannedSamples:
    """Draws of lets from their tolerances."""

    lets: tuple[str, ...]
    count: int


@dataclass(frozen=True)
class PlannedFaults:
    """The sound circuit, then each of the elements (or windings, `T1.w2`) under each of the faults, open or short."""

    faults: tuple[str, ...]
    elements: tuple[str, ...]


PlannedAxis = PlannedRange | PlannedList | PlannedExtremes | PlannedSamples | PlannedFaults


@dataclass(frozen=True)
class PlannedSweep:
    """A sweep with its names in full and its values in SI units; every combination of its axes is a variant.

    studies: those it is limited to, () for all; seed: of its samples, None where it draws none
    """

    name: str
    axes: tuple[PlannedAxis, ...]
    studies: tuple[str, ...] = ()
    seed: int | None = None
    label: str | None = None
    written: Sweep | None = field(default=None, compare=False, repr=False)
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True)
class Circuit:
    """A flat circuit. Elements, observes, studies and requirements in the order written; blocks: copy -> block."""

    name: str
    purpose: str
    references: tuple[str, ...]
    ambient: float
    elements: dict[str, Element]
    lets: dict[str, LetValue]
    observes: dict[str, Observed]
    studies: dict[str, PlannedStudy]
    requirements: tuple[Requirement, ...]
    sweeps: tuple[PlannedSweep, ...] = ()
    blocks: dict[str, str] = field(default_factory=dict)

    def nodes(self) -> list[str]:
        """Node names in order of first mention."""
        found: dict[str, None] = {}
        for element in self.elements.values():
            for port in element.ports:
                found[port.a] = None
                found[port.b] = None
        return list(found)
