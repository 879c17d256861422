"""Sweeps as written, each name, value and count checked; their variants are made elsewhere.

It knows the circuit's names and lets, and runs nothing.
"""

from __future__ import annotations

from collections.abc import Iterator

from grammar.axes import ExtremesAxis, FaultsAxis, OverAxis, RangeAxis, SamplesAxis
from grammar.description import Expression, Name, Part, Range, Setting, Sweep
from grammar.spans import Span
from simcore.components import KINDS
from simcore.design.circuit import Circuit
from simcore.design.flatten import Flat, all_kinds
from simcore.design.measures import Measures
from simcore.design.scopes import Place, Poisoned, Scope, at_word, named, span_of, suggest
from simcore.design.studies import Studies
from simcore.design.values import EXPRESSIONS

MOST_VARIANTS = 10**6
MOST_NAMES = 10_000


def check_sweeps(scope: Scope, measures: Measures, studies: Studies, flat: Flat, circuit: Circuit) -> tuple[Sweep, ...]:
    """The sweeps of a design, in the order written."""
    checker = _Sweeps(scope, measures, studies, circuit)
    names: dict[str, None] = {}
    for sweep in flat.sweeps:
        if sweep.name in names:
            scope.wrong(f"sweep {sweep.name} is declared twice", "Rename one of the two.", sweep.span)
        names[sweep.name] = None
        checker.check(sweep)
    return tuple(flat.sweeps)


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

    def check(self, sweep: Sweep) -> None:
        """Report what is wrong with a sweep."""
        for axis in sweep.axes:
            try:
                if isinstance(axis, RangeAxis):
                    self._range(axis)
                elif isinstance(axis, OverAxis):
                    self._over(axis)
                elif isinstance(axis, FaultsAxis):
                    self._faults(axis, sweep.span)
                else:
                    self._spreads(axis, sweep.span)
            except Poisoned:
                continue
        samples = any(isinstance(axis, SamplesAxis) for axis in sweep.axes)
        keys: dict[str, None] = {}
        for setting in sweep.settings:
            if setting.key in keys:
                self.scope.wrong(f"{setting.key} is given twice", "Give each key once.", setting.span)
            keys[setting.key] = None
            self._setting(setting, samples)
        if samples and "seed" not in keys:
            cure = "Add `seed = 1`, or another whole number: the same seed draws the same samples."
            self.scope.wrong("samples are drawn without a seed", cure, sweep.span)

    def _range(self, axis: RangeAxis) -> None:
        entry = self.studies.let(axis.let)
        now = self.scope.entry_value(entry, axis.let.span)
        ends = []
        for expression in (axis.first, axis.last):
            value = self.scope.quantity(expression, self.place)
            self.studies.alike(entry.full, now, value, span_of(expression))
            ends.append(value.value)
        self.scope.whole(axis.count, self.place, "the number of steps", 2, MOST_VARIANTS)
        if axis.logarithmic and min(ends) <= 0.0:
            cure = "Give both ends above zero, or leave `log` out."
            self.scope.wrong("a logarithmic range starts or ends at zero or below", cure, span_of(axis.first))

    def _over(self, axis: OverAxis) -> None:
        entry = self.studies.let(axis.let)
        now = self.scope.entry_value(entry, axis.let.span)
        if not axis.values.items:
            self.scope.wrong("the list of values is empty", "Give at least one value.", axis.values.span)
        for item in axis.values.items:
            if item.key is not None or item.at is not None:
                self.scope.wrong("the list takes plain values", "Write `[1 nF, 2 nF]`.", span_of(item.value))
                continue
            self.studies.alike(entry.full, now, self.scope.value(item.value, self.place), span_of(item.value))

    def _spreads(self, axis: ExtremesAxis | SamplesAxis, span: Span | None) -> None:
        """Lets that take part with their tolerance must have one."""
        if isinstance(axis, SamplesAxis):
            self.scope.whole(axis.count, self.place, "the number of samples", 1, MOST_VARIANTS)
        known = any(let.low is not None for let in self.circuit.lets.values()) or self.scope.incomplete
        if not axis.names and not known:
            self.scope.wrong("no let has a tolerance", "Add `tolerance 10 %` to a let.", span)
        for name in spread_names(self.scope, axis.names, self.place):
            full = self.studies.let(name).full
            if full in self.circuit.lets and self.circuit.lets[full].low is None:
                cure = f"Add `tolerance 10 %` to it, or leave {full} out."
                self.scope.wrong(f"{full} has no tolerance", cure, name.span)

    def _faults(self, axis: FaultsAxis, span: Span | None) -> None:
        if axis.each is not None and axis.each != "element":
            if axis.each not in KINDS:
                known = ["element", *KINDS]
                where = at_word(span, axis.each)
                self.scope.wrong(f"there is no kind {axis.each}", suggest(axis.each, known, all_kinds(known)), where)
            elif not (self.scope.incomplete or any(e.kind == axis.each for e in self.circuit.elements.values())):
                self.scope.wrong(f"the circuit has no {axis.each}", "Name another kind.", span)
        for name in spread_names(self.scope, axis.names, self.place):
            self.measures.element(name, self.place, "a fault")

    def _setting(self, setting: Setting, samples: bool) -> None:
        if setting.key == "studies":
            self._studies(setting)
        elif setting.key == "seed" and samples and isinstance(setting.value, EXPRESSIONS):
            self._seed(setting.value)
        else:
            cure = "A sweep takes `studies = [a, b]`" + (", and samples take `seed = 1`." if samples else ".")
            self.scope.wrong(f"this sweep has no key {setting.key}", cure, setting.span)

    def _seed(self, expression: Expression) -> None:
        try:
            self.scope.whole(expression, self.place, "the seed", 0, 10**9)
        except Poisoned:
            return

    def _studies(self, setting: Setting) -> None:
        items = getattr(setting.value, "items", None)
        if not items:
            self.scope.wrong("studies takes a list of names", "Write `studies = [full_load]`.", setting.span)
            return
        for item in items:
            name = item.value.parts[0].name if isinstance(item.value, Name) else "here"
            if name not in self.studies.studies:
                self.scope.unknown(name, list(self.studies.studies), span_of(item.value), "no study is named")
