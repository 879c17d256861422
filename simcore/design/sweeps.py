"""Sweeps as written, each name, value and count checked and put in full; their variants are made elsewhere.

It knows the circuit's names and lets, and runs nothing.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from grammar.axes import Axis, ExtremesAxis, FaultsAxis, OverAxis, RangeAxis, SamplesAxis
from grammar.description import Expression, Name, Parameter, Part, Range, Setting, Sweep
from grammar.quantities import Quantity
from grammar.spans import Span
from simcore.components import KINDS
from simcore.design.circuit import (
    Circuit,
    PlannedAxis,
    PlannedExtremes,
    PlannedFaults,
    PlannedList,
    PlannedRange,
    PlannedSamples,
    PlannedSweep,
)
from simcore.design.flatten import Flat, all_kinds
from simcore.design.measures import Measures
from simcore.design.scopes import Place, Poisoned, Scope, Sheet, at_word, named, span_of, suggest
from simcore.design.studies import Studies
from simcore.design.values import EXPRESSIONS

MOST_VARIANTS = 10**6
MOST_NAMES = 10_000
SPREADS = (ExtremesAxis, SamplesAxis)
"""Axes on which lets take part with their tolerance."""


def planned_sweeps(
    scope: Scope, measures: Measures, studies: Studies, flat: Flat, circuit: Circuit
) -> tuple[PlannedSweep, ...]:
    """The sweeps of a design, in the order written; what is wrong with one is reported and left out."""
    planner = _Sweeps(scope, measures, studies, circuit)
    found: dict[str, PlannedSweep] = {}
    for sweep in flat.sweeps:
        if sweep.name in found:
            scope.wrong(f"sweep {sweep.name} is declared twice", "Rename one of the two.", sweep.span)
        found[sweep.name] = planner.planned(sweep)
    return tuple(found.values())


def spread_names(scope: Scope, names: tuple[Name, ...], place: Place) -> list[Name]:
    """A list of names with its ranges written out: `D[1..4]` is four names."""
    found: list[Name] = []
    for name in names:
        for each in _spread(scope, name, place):
            found.append(each)
            if len(found) > MOST_NAMES:
                scope.wrong("the list of names is too long", f"At most {MOST_NAMES} names.", name.span)
                raise Poisoned
    return found


def _spread(scope: Scope, name: Name, place: Place) -> Iterator[Name]:
    """One name for each index of its first range, and so on inwards."""
    for at, part in enumerate(name.parts):
        for position, index in enumerate(part.indices):
            if not isinstance(index, Range):
                continue
            first = scope.whole(index.first, place, "the first index of a range")
            last = scope.whole(index.last, place, "the last index of a range")
            if not 0 <= last - first < MOST_NAMES:
                scope.wrong("the range of indices is empty or too long", "Write it from low to high.", name.span)
                raise Poisoned
            for number in range(first, last + 1):
                fixed = named(f"x[{number}]").parts[0].indices
                indices = (*part.indices[:position], *fixed, *part.indices[position + 1 :])
                parts = (*name.parts[:at], Part(part.name, indices), *name.parts[at + 1 :])
                yield from _spread(scope, Name(parts, name.span), place)
            return
    yield name


class _Sweeps:
    def __init__(self, scope: Scope, measures: Measures, studies: Studies, circuit: Circuit):
        self.scope = scope
        self.measures = measures
        self.studies = studies
        self.circuit = circuit
        self.place = Place(scope.root)

    def planned(self, sweep: Sweep) -> PlannedSweep:
        """A sweep in full; what is wrong with it is reported."""
        axes: dict[int, PlannedAxis] = {}
        stands: dict[str, None] = {}
        each_last = sorted(enumerate(sweep.axes), key=lambda pair: isinstance(pair[1], SPREADS) and not pair[1].names)
        for position, axis in each_last:
            try:
                axes[position] = self._axis(axis, sweep.span, stands)
            except Poisoned:
                continue
            for let in lets_of(axes[position]):
                if let in stands:
                    cure = "Leave it out of one: a variant gives a let one value."
                    self.scope.wrong(f"{let} stands on two axes of sweep {sweep.name}", cure, sweep.span)
                stands[let] = None
        settings = self._settings(sweep)
        return PlannedSweep(
            sweep.name, tuple(axes[each] for each in sorted(axes)), *settings, sweep.label, sweep, sweep.span
        )

    def _axis(self, axis: Axis, span: Span | None, stands: Mapping[str, None]) -> PlannedAxis:
        if isinstance(axis, RangeAxis):
            return self._range(axis)
        if isinstance(axis, OverAxis):
            return self._over(axis)
        if isinstance(axis, FaultsAxis):
            return self._faults(axis, span)
        lets = self._spread_lets(axis, span, stands)
        if isinstance(axis, SamplesAxis):
            count = self.scope.whole(axis.count, self.place, "the number of samples", 1, MOST_VARIANTS)
            return PlannedSamples(lets, count)
        return PlannedExtremes(lets)

    def _range(self, axis: RangeAxis) -> PlannedRange:
        entry = self.studies.let(axis.let)
        now = self.scope.entry_value(entry, axis.let.span)
        ends: list[Quantity] = []
        for expression in (axis.first, axis.last):
            value = self.scope.quantity(expression, self.place)
            self.studies.alike(entry.full, now, value, span_of(expression))
            ends.append(value)
        count = self.scope.whole(axis.count, self.place, "the number of steps", 2, MOST_VARIANTS)
        if axis.logarithmic and min(end.value for end in ends) <= 0.0:
            cure = "Give both ends above zero, or leave `log` out."
            self.scope.wrong("a logarithmic range starts or ends at zero or below", cure, span_of(axis.first))
        return PlannedRange(entry.full, ends[0], ends[1], count, axis.logarithmic)

    def _over(self, axis: OverAxis) -> PlannedList:
        entry = self.studies.let(axis.let)
        now = self.scope.entry_value(entry, axis.let.span)
        values: list[Quantity | str] = []
        if not axis.values.items:
            self.scope.wrong("the list of values is empty", "Give at least one value.", axis.values.span)
        for item in axis.values.items:
            if item.key is not None or item.at is not None:
                self.scope.wrong("the list takes plain values", "Write `[1 nF, 2 nF]`.", span_of(item.value))
                continue
            value = self.scope.value(item.value, self.place)
            self.studies.alike(entry.full, now, value, span_of(item.value))
            values.append(value.node.name if isinstance(value, Sheet) else value)
        return PlannedList(entry.full, tuple(values))

    def _spread_lets(
        self, axis: ExtremesAxis | SamplesAxis, span: Span | None, stands: Mapping[str, None]
    ) -> tuple[str, ...]:
        """Full names of lets that take part with their tolerance: those named, or all that stand on no other axis."""
        if not axis.names:
            found = {
                name: None for name, let in self.circuit.lets.items() if let.low is not None and name not in stands
            }
            if not found and not self.scope.incomplete:
                self.scope.wrong("no let has a tolerance", "Add `tolerance 10 %` to a let.", span)
            return tuple(found)
        found = {}
        for name in spread_names(self.scope, axis.names, self.place):
            entry = self.studies.let(name)
            let = self.circuit.lets.get(entry.full)
            if isinstance(entry.node, Parameter) or (let is not None and let.low is None):
                cure = f"Add `tolerance 10 %` to it, or leave {entry.full} out."
                self.scope.wrong(f"{entry.full} has no tolerance", cure, name.span)
            elif entry.full in found:
                self.scope.wrong(f"{entry.full} is named twice", "Leave one out.", name.span)
            found[entry.full] = None
        return tuple(found)

    def _faults(self, axis: FaultsAxis, span: Span | None) -> PlannedFaults:
        elements: dict[str, None] = {}
        if axis.each is not None and axis.each != "element" and axis.each not in KINDS:
            known = ["element", *KINDS]
            where = at_word(span, axis.each)
            self.scope.wrong(f"there is no kind {axis.each}", suggest(axis.each, known, all_kinds(known)), where)
        elif axis.each is not None:
            for name, element in self.circuit.elements.items():
                if axis.each in ("element", element.kind):
                    elements[name] = None
            if not elements and not self.scope.incomplete:
                self.scope.wrong(f"the circuit has no {axis.each}", "Name another kind.", span)
        for name in spread_names(self.scope, axis.names, self.place):
            elements[self.measures.element(name, self.place, "a fault")] = None
        return PlannedFaults(tuple(dict.fromkeys(axis.faults)), tuple(elements))

    def _settings(self, sweep: Sweep) -> tuple[tuple[str, ...], int | None]:
        """The studies that a sweep is limited to, and its seed."""
        samples = any(isinstance(axis, SamplesAxis) for axis in sweep.axes)
        keys: dict[str, None] = {}
        studies: tuple[str, ...] = ()
        seed = None
        for setting in sweep.settings:
            if setting.key in keys:
                self.scope.wrong(f"{setting.key} is given twice", "Give each key once.", setting.span)
            keys[setting.key] = None
            if setting.key == "studies":
                studies = self._studies(setting)
            elif setting.key == "seed" and samples and isinstance(setting.value, EXPRESSIONS):
                seed = self._seed(setting.value)
            else:
                cure = "A sweep takes `studies = [a, b]`" + (", and samples take `seed = 1`." if samples else ".")
                self.scope.wrong(f"this sweep has no key {setting.key}", cure, setting.span)
        if samples and "seed" not in keys:
            cure = "Add `seed = 1`, or another whole number: the same seed draws the same samples."
            self.scope.wrong("samples are drawn without a seed", cure, sweep.span)
        return studies, seed

    def _seed(self, expression: Expression) -> int | None:
        try:
            return self.scope.whole(expression, self.place, "the seed", 0, 10**9)
        except Poisoned:
            return None

    def _studies(self, setting: Setting) -> tuple[str, ...]:
        items = getattr(setting.value, "items", None)
        found: dict[str, None] = {}
        if not items:
            self.scope.wrong("studies takes a list of names", "Write `studies = [full_load]`.", setting.span)
            return ()
        for item in items:
            name = item.value.parts[0].name if isinstance(item.value, Name) else "here"
            if name not in self.studies.studies:
                self.scope.unknown(name, list(self.studies.studies), span_of(item.value), "no study is named")
            found[name] = None
        return tuple(found)


def lets_of(axis: PlannedAxis) -> tuple[str, ...]:
    """The lets that an axis gives values."""
    if isinstance(axis, PlannedRange | PlannedList):
        return (axis.let,)
    return () if isinstance(axis, PlannedFaults) else axis.lets
