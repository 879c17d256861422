"""What an element's keys are given, checked against the declaration of its kind: form, dimension and range.

A data sheet's keys come first, those written beside it win. It knows declarations and values, and no terminals or
graphs.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from typing import Any

from grammar.description import (
    Amplitude,
    Binary,
    Branch,
    Call,
    Each,
    Element,
    Expression,
    Given,
    Item,
    Listed,
    Name,
    Negative,
    Number,
    Point,
    Ratio,
    Setting,
    Text,
)
from grammar.quantities import AMPERE, ANGLE, KELVIN, Dimension, Quantity, show, unit_of
from grammar.spans import Span
from simcore.components.kind import Key, Kind
from simcore.design.scopes import Place, Poisoned, Scope, Sheet, span_of, suggest

EXPRESSIONS = (Number, Name, Negative, Binary, Branch, Each, Call)


@dataclass
class Values:
    """The keys of an element or data sheet as worked out.

    spans: where each was written; units: the dimension of those that may have several; sheet: the data sheet's name
    """

    given: dict[str, Any] = field(default_factory=dict)
    spans: dict[str, Span | None] = field(default_factory=dict)
    units: dict[str, Dimension] = field(default_factory=dict)
    sheet: str = ""
    failed: bool = False


class Reader:
    """Works out keys of elements and data sheets; each data sheet once."""

    def __init__(self, scope: Scope):
        self.scope = scope
        self._sheets: dict[int, Values] = {}

    def element(self, node: Element, kind: Kind, place: Place) -> Values:
        """The keys of an element: data sheet merged in, checked one by one and together."""
        found = Values()
        settings = list(node.settings)
        if node.value is not None:
            settings += self._unnamed(node, kind, place, found)
        found = self._settings(settings, kind, place, found)
        if not found.failed:
            self._together(node, kind, found)
        return found

    def sheet(self, sheet: Sheet, kind: Kind) -> Values:
        """The keys of a data sheet, worked out where it is written."""
        known = self._sheets.get(id(sheet.node))
        if known is None:
            place = Place(self.scope.file_space(sheet.unit))
            known = self._settings(list(sheet.node.settings), kind, place, Values(failed=not sheet.node.whole))
            self._sheets[id(sheet.node)] = known
        return known

    def _unnamed(self, node: Element, kind: Kind, place: Place, found: Values) -> list[Setting]:
        """The unnamed value: a data sheet's keys are entered, a plain value becomes a setting of its key."""
        assert node.value is not None
        try:
            value = self.scope.value(node.value, place)
        except Poisoned:
            found.failed = True
            return []
        if isinstance(value, Quantity):
            if kind.value_key is not None:
                return [Setting(kind.value_key, node.value, span_of(node.value))]
            cure = f"Name the key, as in `{kind.keys[0].name} = ...`, or name a data sheet."
            self._wrong(f"{kind.name} has no unnamed value", cure, span_of(node.value), found)
            return []
        if value.node.kind != kind.name:
            what = f"{value.node.name} is a data sheet of a {value.node.kind}, not of a {kind.name}"
            self._wrong(what, f"Name a data sheet of a {kind.name}.", span_of(node.value), found)
            return []
        sheet = self.sheet(value, kind)
        found.sheet = value.node.name
        found.given.update(sheet.given)
        found.units.update(sheet.units)
        found.spans.update(dict.fromkeys(sheet.given, span_of(node.value)))
        found.failed = found.failed or sheet.failed
        return []

    def _settings(self, settings: Iterable[Setting], kind: Kind, place: Place, found: Values) -> Values:
        written: dict[str, Setting] = {}
        for setting in settings:
            key = kind.key.get(setting.key)
            if key is None:
                cure = suggest(setting.key, list(kind.key), f"A {kind.name} takes {', '.join(kind.key)}.")
                self._wrong(f"a {kind.name} has no key {setting.key}", cure, setting.span, found)
                continue
            if setting.key in written:
                self._wrong(f"{setting.key} is given twice", "Give each key once.", setting.span, found)
                continue
            written[setting.key] = setting
            found.spans[key.name] = setting.span
            try:
                found.given[key.name] = self._given(key, setting, place, found)
            except Poisoned:
                found.failed = True
        self._law_temperature(written, place, found)
        return found

    def _law_temperature(self, written: dict[str, Setting], place: Place, found: Values) -> None:
        """A law holds at the temperature written beside it, which can't be so where that varies."""
        law = "saturation_current" in written or "forward" in written
        if not law or "temperature" not in written or "data_temperature" in written:
            return
        value = written["temperature"].value
        let = self.scope.varied(value, place) if isinstance(value, EXPRESSIONS) else None
        if let is not None:
            cure = f"{let} varies: add `data_temperature = 25 degC`, or the temperature that the values hold at."
            self._wrong("the temperature at which this law holds is not said", cure, span_of(value), found)
        elif "temperature" in found.given:
            found.given.setdefault("data_temperature", found.given["temperature"])

    def _together(self, node: Element, kind: Kind, found: Values) -> None:
        """The rules over several keys."""
        at = node.name.span or node.span
        name = self.scope_text(node)
        for key in kind.keys:
            if key.required and key.name not in found.given:
                unit = unit_of(key.dimension)
                cure = f"Add `{key.name} = ...`" + (f" in {unit}." if unit else ".")
                self._wrong(f"{kind.name} {name} has no {key.name}", cure, at, found)
        if len(dict.fromkeys(found.units.values())) > 1:
            cure = "Give all its values in V, or all in A."
            self._wrong(f"{kind.name} {name} is given in V and in A", cure, at, found)
        if kind.check is not None and not found.failed:
            for key_name, what, cure in kind.check(found.given):
                self._wrong(f"{kind.name} {name}: {what}", cure, found.spans.get(key_name or "") or at, found)

    def scope_text(self, node: Element) -> str:
        """The element's name as written, for messages."""
        return node.name.parts[-1].name

    # --- forms ---------------------------------------------------------------------------------------------------

    def _given(self, key: Key, setting: Setting, place: Place, found: Values) -> Any:
        forms: dict[str, Callable[[Key, Given, Place, Values], Any]] = {
            "scalar": self._scalar,
            "timed": self._timed,
            "point": self._point,
            "ratio": self._ratio,
            "amplitude": self._amplitude,
            "list": self._list,
            "series": self._series,
            "curve": self._curve,
            "harmonics": self._harmonics,
            "text": self._text,
            "word": self._word,
            "expression": lambda key, given, place, found: given,
        }
        return forms[key.form](key, setting.value, place, found)

    def _scalar(self, key: Key, given: Given, place: Place, found: Values) -> float:
        if not isinstance(given, EXPRESSIONS):
            self._wrong(f"{key.name} takes one value", f"Write it as `{key.name} = ...`.", span_of(given), found)
            raise Poisoned
        return self._number(key, given, place, found)

    def _number(self, key: Key, expression: Expression, place: Place, found: Values) -> float:
        """A value of the key's dimension, within its range."""
        quantity = self.scope.quantity(expression, place)
        if key.alternatives and quantity.dimension in (key.dimension, *key.alternatives):
            found.units[key.name] = quantity.dimension
        elif quantity.dimension != key.dimension:
            self._dimension(key.name, key.dimension, quantity, span_of(expression), found)
            raise Poisoned
        self._range(key, quantity, span_of(expression), found)
        return quantity.value

    def _other(self, what: str, dimension: Dimension, expression: Expression, place: Place, found: Values) -> float:
        """A value that stands beside the key's own: a time, a current at which it holds, an angle."""
        quantity = self.scope.quantity(expression, place)
        if quantity.dimension != dimension:
            self._dimension(what, dimension, quantity, span_of(expression), found)
            raise Poisoned
        return quantity.value

    def _dimension(self, what: str, wanted: Dimension, got: Quantity, span: Span | None, found: Values) -> None:
        self.scope.wrong(*clash(what, wanted, got.dimension), span)
        found.failed = True

    def _range(self, key: Key, quantity: Quantity, span: Span | None, found: Values) -> None:
        value = quantity.value
        low = key.low is not None and (value <= key.low if key.open_low else value < key.low)
        high = key.high is not None and value > key.high
        if low or high or (key.whole and value != round(value)):
            what = f"{key.name} is {show(value, quantity.dimension)}, which it can't be"
            self._wrong(what, _allowed(key, quantity.dimension), span, found)
            raise Poisoned

    def _timed(self, key: Key, given: Given, place: Place, found: Values) -> Any:
        return (
            self._series(key, given, place, found)
            if isinstance(given, Listed)
            else self._scalar(key, given, place, found)
        )

    def _point(self, key: Key, given: Given, place: Place, found: Values) -> tuple[float, float | None]:
        assert key.at is not None
        if isinstance(given, Point):
            value = self._number(key, given.value, place, found)
            return value, self._other(f"what stands behind @ in {key.name}", key.at, given.at, place, found)
        if key.bare and isinstance(given, EXPRESSIONS):
            return self._number(key, given, place, found), None
        at = "105 degC" if key.at == KELVIN else f"1 {unit_of(key.at)}"
        cure = f"Say where it holds, as in `{key.name} = 1 {unit_of(key.dimension)} @ {at}`."
        self._wrong(f"{key.name} takes a point of the curve", cure, span_of(given), found)
        raise Poisoned

    def _ratio(self, key: Key, given: Given, place: Place, found: Values) -> tuple[float, ...]:
        if not isinstance(given, Ratio):
            self._wrong(
                f"{key.name} takes one value for each winding or phase",
                f"Write them as `{key.name} = a : b : c`.",
                span_of(given),
                found,
            )
            raise Poisoned
        return tuple(self._number(key, value, place, found) for value in given.values)

    def _amplitude(self, key: Key, given: Given, place: Place, found: Values) -> tuple[tuple[float, ...], str, str]:
        if not isinstance(given, Amplitude):
            cure = f"Write `{key.name} = 230 V rms`, or `peak`; in a three-phase set `line rms`, `phase rms` and so on."
            self._wrong("the amplitude does not say whether it is rms or peak", cure, span_of(given), found)
            raise Poisoned
        return tuple(self._number(key, value, place, found) for value in given.values), given.measure, given.of

    def _items(self, key: Key, given: Given, found: Values, keyed: bool, at: bool | None) -> tuple[Item, ...]:
        """The entries of a list, all of the wanted form; at None means that `@` may be left out."""
        items = given.items if isinstance(given, Listed) else ()
        right = all((item.key is not None) == keyed and (at is None or (item.at is not None) == at) for item in items)
        if not items or not right:
            form = {
                "series": "0 s: 0 V, 1 ms: 5 V",
                "timed": "0 s: 1 A, 1 ms: 2 A",
                "curve": "0.7 V @ 10 mA, 0.9 V @ 1 A",
            }
            form |= {"harmonics": "3: 2 % @ 170 deg, 5: 1 %", "list": "1, 2"}
            cure = f"Write it as `{key.name} = [{form[key.form]}]`."
            self._wrong(f"{key.name} takes a list of another form", cure, span_of(given), found)
            raise Poisoned
        return items

    def _list(self, key: Key, given: Given, place: Place, found: Values) -> tuple[float, ...]:
        items = self._items(key, given, found, keyed=False, at=False)
        return tuple(self._number(key, item.value, place, found) for item in items)

    def _series(self, key: Key, given: Given, place: Place, found: Values) -> tuple[tuple[float, float], ...]:
        assert key.at is not None
        items = self._items(key, given, found, keyed=True, at=False)
        return tuple(
            (
                self._other(f"what stands before : in {key.name}", key.at, item.key, place, found),
                self._number(key, item.value, place, found),
            )
            for item in items
            if item.key is not None
        )

    def _curve(self, key: Key, given: Given, place: Place, found: Values) -> tuple[tuple[float, float], ...]:
        assert key.at is not None
        items = self._items(key, given, found, keyed=False, at=True)
        return tuple(
            (
                self._number(key, item.value, place, found),
                self._other(f"what stands behind @ in {key.name}", key.at, item.at, place, found),
            )
            for item in items
            if item.at is not None
        )

    def _harmonics(self, key: Key, given: Given, place: Place, found: Values) -> tuple[tuple[float, float, float], ...]:
        assert key.at is not None
        result = []
        for item in self._items(key, given, found, keyed=True, at=None):
            assert item.key is not None
            order = float(self.scope.whole(item.key, place, "the order of a harmonic"))
            share = self._number(key, item.value, place, found)
            angle = 0.0
            if item.at is not None:
                angle = self._other("the angle of a harmonic", key.at, item.at, place, found)
            result.append((order, share, angle))
        return tuple(result)

    def _text(self, key: Key, given: Given, place: Place, found: Values) -> str:
        if isinstance(given, Text):
            return given.text
        self._wrong(f"{key.name} takes a text", f'Write it in quotes: `{key.name} = "..."`.', span_of(given), found)
        raise Poisoned

    def _word(self, key: Key, given: Given, place: Place, found: Values) -> str:
        word = given.parts[0].name if isinstance(given, Name) and len(given.parts) == 1 else ""
        if word in key.words:
            return word
        cure = f"Write {' or '.join(f'`{key.name} = {each}`' for each in key.words)}."
        self._wrong(f"{key.name} is none of the words it can be", cure, span_of(given), found)
        raise Poisoned

    def _wrong(self, what: str, cure: str, span: Span | None, found: Values) -> None:
        self.scope.wrong(what, cure, span)
        found.failed = True


def clash(what: str, wanted: Dimension, got: Dimension) -> tuple[str, str]:
    """The words for a value of a wrong dimension."""
    given, due = unit_of(got), "deg" if wanted == ANGLE else unit_of(wanted)
    has = f"is given in {given}" if given else "has no unit"
    return f"{what} {has}", f"Give it in {due}." if due else "Give a number without a unit."


def is_current(dimension: Dimension) -> bool:
    """Whether a source's value makes it a current source."""
    return dimension == AMPERE


def _allowed(key: Key, dimension: Dimension) -> str:
    whole = "a whole number " if key.whole else ""
    low = "" if key.low is None else f"{'above' if key.open_low else 'at least'} {show(key.low, dimension)}"
    high = "" if key.high is None else f"at most {show(key.high, dimension)}"
    return f"It must be {whole}{' and '.join(bound for bound in (low, high) if bound)}.".replace("  ", " ")
