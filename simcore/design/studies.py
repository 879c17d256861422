"""Studies as written, with their values worked out and each name in their actions checked.

It knows the circuit's names, and nothing of how a study is solved.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from grammar.axes import OverAxis, RangeAxis
from grammar.description import Action, Expression, Name, Setting, Study, Worst
from grammar.quantities import ANGLE, NONE, SECOND, Dimension, Quantity, show
from grammar.spans import Span
from simcore.design.circuit import Change, PlannedStudy
from simcore.design.flatten import Flat
from simcore.design.measures import SOURCES, Measures
from simcore.design.scopes import Entry, Place, Poisoned, Scope, Sheet, Value, at_word, span_of, suggest, text_of
from simcore.design.study_kinds import STUDY_KINDS, Nature
from simcore.design.values import EXPRESSIONS, clash

DEEPEST_AFTER = 100
MOST_PERIODS = 100_000
MOST_ROWS = 1_000_000


@dataclass(frozen=True)
class StudyKey:
    """One key of studies. dimension: of its value, None for a name; takes: what may be written where its unit does not
    say so; default: in words."""

    name: str
    meaning: str
    dimension: Dimension | None
    takes: str = ""
    default: str = ""


STUDY_KEYS = {
    key.name: key
    for key in (
        StudyKey("after", "study whose end it starts from", None, "a study", "from rest"),
        StudyKey("duration", "how long it runs", SECOND, default="must be given"),
        StudyKey("period", "period it settles to and is judged by", SECOND, default="the sources' common one"),
        StudyKey(
            "angle",
            "phase of the first sine at t = 0, or the one that makes a figure highest (with a minus sign lowest)",
            ANGLE,
            takes="deg, or `worst for FIGURE`",
            default="as the sources have it",
        ),
        StudyKey("last", "how many periods at its end are judged", NONE, default="its whole span"),
        StudyKey("accuracy", "relative error wanted on the figures", NONE, default="0.1 %"),
        StudyKey(
            "record_every",
            "interval of its trace, such as `20 ms / 400`; no figure depends on it",
            SECOND,
            default="each step and its middle",
        ),
    )
}


def moved_lets(flat: Flat) -> dict[str, None]:
    """Names of lets that studies or sweeps give other values, as far as they are written out."""
    names: list[Name] = []
    for study in flat.studies:
        names += [
            act.target for act in (*study.actions, *(event.action for event in study.events)) if act.verb == "set"
        ]
    for sweep in flat.sweeps:
        names += [axis.let for axis in sweep.axes if isinstance(axis, RangeAxis | OverAxis)]
    found = {}
    for name in names:
        try:
            found[text_of(name)] = None
        except ValueError:
            continue
    return found


class Studies:
    """Works out the studies of a design."""

    def __init__(self, scope: Scope, measures: Measures, flat: Flat):
        self.scope = scope
        self.measures = measures
        self.flat = flat
        self.place = Place(scope.root)
        self.studies: dict[str, Study] = {}
        for study in flat.studies:
            self.studies.setdefault(study.name, study)

    def planned(self) -> dict[str, PlannedStudy]:
        """All studies, in the order written."""
        for study in self.flat.studies:
            if self.studies[study.name] is not study:
                self.scope.wrong(
                    f"study {study.name} is declared twice", "Rename one of the two.", at_word(study.span, study.name)
                )
        found = {study.name: self._study(study) for study in self.studies.values()}
        self._orders()
        return found

    def _study(self, study: Study) -> PlannedStudy:
        kind = STUDY_KINDS.get(study.kind)
        if kind is None:
            where = at_word(study.span, study.kind)
            self.scope.wrong(f"there is no kind of study {study.kind}", suggest(study.kind, list(STUDY_KINDS)), where)
            return PlannedStudy(study.name, study.kind, label=study.label, span=study.span)
        given: dict[str, Any] = {}
        for setting in study.settings:
            if setting.key in given:
                self.scope.wrong(f"{setting.key} is given twice", "Give each key once.", setting.span)
            elif setting.key not in kind.keys:
                self._no_key(study, setting, kind.keys)
            elif setting.key == "angle" and isinstance(setting.value, Worst):
                given["worst"] = self._worst(setting.value)
            else:
                given[setting.key] = self._setting(setting)
        if kind.nature is Nature.COURSE and "duration" not in given:
            self.scope.wrong(
                f"{study.kind} {study.name} has no duration", "Add `duration = 100 ms`, or yours.", study.span
            )
        self._bounded(study, given)
        changes = [self._change(action) for action in study.actions]
        events = self._events(study, kind.nature, given.get("duration"))
        values = {key: value for key, value in given.items() if value is not None}
        return PlannedStudy(
            study.name,
            study.kind,
            changes=tuple(change for change in changes if change is not None),
            events=events,
            label=study.label,
            span=study.span,
            **values,
        )

    def _bounded(self, study: Study, given: dict[str, Any]) -> None:
        """No study may span more periods of a source, or record more rows, than can be worked through."""
        elements = self.measures.elements.values()
        periods = {
            element.name: element.given.get("period") or 1.0 / element.given["frequency"]
            for element in elements
            if element.kind in SOURCES and (element.given.get("period") or element.given.get("frequency"))
        }
        spans = [given.get(key) for key in ("duration", "period")]
        span = next((span for span in spans if span), max(periods.values(), default=0.0))
        for setting in study.settings:
            every = given.get("record_every")
            if setting.key == "record_every" and every and span > MOST_ROWS * every:
                cure = f"Record every {show(span / MOST_ROWS, SECOND)} or less often: at most {MOST_ROWS} rows."
                self.scope.wrong("the study would record too many rows", cure, setting.span)
        fastest = min(periods, key=periods.__getitem__, default=None)
        if fastest is not None and span > MOST_PERIODS * periods[fastest]:
            cure = f"Make it shorter, or slow {fastest} down: at most {MOST_PERIODS} periods."
            where = at_word(study.span, study.name)
            self.scope.wrong(f"the study spans {span / periods[fastest]:.2g} periods of {fastest}", cure, where)

    def _no_key(self, study: Study, setting: Setting, allowed: tuple[str, ...]) -> None:
        if setting.key in STUDY_KEYS:
            kinds = [kind.name for kind in STUDY_KINDS.values() if setting.key in kind.keys]
            cure = f"It belongs to {' and '.join(kinds)}: leave it out."
        else:
            cure = suggest(setting.key, list(allowed))
        self.scope.wrong(f"a study of kind {study.kind} has no key {setting.key}", cure, setting.span)

    def _setting(self, setting: Setting) -> Any:
        key, value = setting.key, setting.value
        if isinstance(value, Worst):
            self.scope.wrong("`worst for` is for an angle", f"Give the value of {key}.", value.span or setting.span)
            return None
        if not isinstance(value, EXPRESSIONS):
            self.scope.wrong(f"{key} takes one value", f"Write it as `{key} = ...`.", span_of(value) or setting.span)
            return None
        if key == "after":
            return self._after(value)
        return self._amount(key, value)

    def _worst(self, worst: Worst) -> Expression | None:
        """The figure that the phase is sought for."""
        try:
            resolved = self.measures.resolve(worst.figure, self.place)
        except Poisoned:
            return None
        if resolved.sort != "figure":
            cure = "Name a figure, as in `angle = worst for peak(current(D1))`."
            self.scope.wrong("`worst for` needs a figure", cure, span_of(worst.figure))
        return resolved.expression

    def _amount(self, key: str, value: Expression) -> float | None:
        try:
            quantity = self.scope.quantity(value, self.place)
        except Poisoned:
            return None
        if quantity.dimension != (wanted := STUDY_KEYS[key].dimension or NONE):
            self.scope.wrong(*clash(key, wanted, quantity.dimension), span_of(value))
            return None
        number = quantity.value
        allowed = {
            "angle": (-1e6, 1e6, "an angle of a few turns at most"),
            "last": (1, 1e6, "a whole number of periods"),
            "accuracy": (1e-9, 0.1, "between 1e-7 % and 10 %"),
        }
        low, high, words = allowed.get(key, (1e-15, 1e9, "a time above zero"))
        if not low <= number <= high or (key == "last" and number != round(number)):
            shown = show(number, quantity.dimension)
            self.scope.wrong(f"{key} is {shown}, which it can't be", f"It must be {words}.", span_of(value))
            return None
        return number

    def _after(self, value: Expression) -> str | None:
        name = value.parts[0].name if isinstance(value, Name) and len(value.parts) == 1 else ""
        study = self.studies.get(name)
        if study is None:
            self.scope.unknown(name or "here", list(self.studies), span_of(value), "no study is named")
            return None
        kind = STUDY_KINDS.get(study.kind)
        if kind is not None and kind.nature is Nature.REST:
            cure = "Begin after a settled or transient study."
            self.scope.wrong(f"{name} is an operating point, which has no end to go on from", cure, span_of(value))
            return None
        return name

    def _orders(self) -> None:
        """No study comes after itself, over however many others."""
        after = {}
        for study in self.studies.values():
            for setting in study.settings:
                if setting.key == "after" and isinstance(setting.value, Name):
                    after[study.name] = setting.value.parts[0].name
        depths: dict[str, int] = {}
        for first in after:
            path: dict[str, None] = {}
            name: str | None = first
            while name is not None and name not in depths and name not in path:
                path[name] = None
                name = after.get(name)
            if name in path:
                span = at_word(self.studies[name].span, name)
                self.scope.wrong(f"study {name} comes after itself", "Let one of them start from rest.", span)
            below = depths.get(name or "", 0)
            depths.update((each, below + height) for height, each in enumerate(reversed(path), 1))
        deep = next((name for name, depth in depths.items() if depth > DEEPEST_AFTER), None)
        if deep is not None:
            cure = f"Let one of them start from rest: at most {DEEPEST_AFTER} may follow one another."
            self.scope.wrong("too many studies start from one another", cure, self.studies[deep].span)

    def _events(self, study: Study, nature: Nature, duration: float | None) -> tuple[tuple[float, Change], ...]:
        found = []
        if study.events and nature is not Nature.COURSE:
            cure = "Put the action among the study's keys, or make it a transient."
            self.scope.wrong(f"a study of kind {study.kind} has no instants", cure, study.events[0].span)
            return ()
        for event in study.events:
            change = self._change(event.action)
            try:
                time = self.scope.quantity(event.time, self.place)
            except Poisoned:
                continue
            if time.dimension != SECOND:
                self.scope.wrong(*clash("the time of an action", SECOND, time.dimension), span_of(event.time))
            elif time.value < 0.0 or (duration is not None and time.value > duration):
                cure = f"Keep it between 0 s and {show(duration or 0.0, SECOND)}, the study's duration."
                self.scope.wrong("the action does not lie within the study", cure, span_of(event.time))
            elif change is not None:
                found.append((time.value, change))
        return tuple(sorted(found, key=lambda pair: pair[0]))

    def _change(self, action: Action) -> Change | None:
        try:
            if action.verb == "set":
                return self._set(action)
            full = self.measures.element(action.target, self.place, action.verb)
        except Poisoned:
            return None
        return Change(action.verb, full, None, action.span)

    def _set(self, action: Action) -> Change:
        entry = self.let(action.target)
        assert action.value is not None
        now = self.scope.entry_value(entry, action.target.span)
        value = self.scope.value(action.value, self.place)
        self.alike(entry.full, now, value, span_of(action.value))
        return Change("set", entry.full, value.node.name if isinstance(value, Sheet) else value, action.span)

    def let(self, name: Name) -> Entry:
        """The let or parameter that a name means."""
        found = self.scope.find(name, self.place)
        if isinstance(found, Entry) and found.expression is not None:
            return found
        local = self.scope.local(name, self.place)
        if found is not None or self.measures.is_element(local, self.place):
            self.scope.wrong(f"{local} is no let", "Declare a let, use it there, and name it here.", name.span)
        else:
            self.scope.unknown(local, [*self.scope.entries], name.span, "no let is named")
        raise Poisoned

    def alike(self, full: str, now: Value, value: Value, span: Span | None) -> None:
        """A let keeps its dimension, and a data sheet its kind."""
        if isinstance(now, Quantity) and isinstance(value, Quantity):
            if now.dimension != value.dimension:
                self.scope.wrong(*clash(f"the new value of {full}", now.dimension, value.dimension), span)
                raise Poisoned
        elif isinstance(now, Quantity) or isinstance(value, Quantity) or now.node.kind != value.node.kind:
            what = "a value" if isinstance(now, Quantity) else f"a data sheet of a {now.node.kind}"
            self.scope.wrong(f"{full} is {what}, and this is something else", f"Give {what}.", span)
            raise Poisoned
