"""Names and their values: lets, parameters, data sheets and index variables, each seen from where it stands.

Values are worked out when first asked for, so statements may stand in any order; a let that needs itself is reported.
It knows names and values, and nothing of elements, graphs or studies.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from grammar.description import Datasheet, Expression, Let, Name, Number, Observe, Parameter, Part, Range
from grammar.expressions import Poisoned, evaluate, names_in, nearest
from grammar.mistakes import MOST_MISTAKES, Mistake
from grammar.quantities import NONE, Quantity
from grammar.spans import Span
from simcore.design.files import Project, Unit

FEW = 8
_LARGEST_WHOLE = 10**6


@dataclass(frozen=True)
class Sheet:
    """A data sheet as a value, with the file whose lets it sees."""

    unit: Unit = field(repr=False, compare=False)
    node: Datasheet


Value = Quantity | Sheet


@dataclass(frozen=True, eq=False)
class Space:
    """The names of a file or of one copy of a block; prefix makes a local name a full one."""

    unit: Unit
    prefix: str
    file: Space | None = None


@dataclass(frozen=True, eq=False)
class Place:
    """Where a statement stands: its space and the index variables around it."""

    space: Space
    indices: Mapping[str, int] = field(default_factory=dict)

    @property
    def inward(self) -> bool:
        """Whether it stands in a repeat, where every copy must have its own name."""
        return bool(self.indices)


@dataclass(eq=False)
class Entry:
    """A let, parameter or observe by its full name; value is None until it is asked for."""

    node: Let | Parameter | Observe
    full: str
    place: Place
    expression: Expression | None
    value: Value | None = None
    state: str = "new"


def text_of(name: Name) -> str:
    """A name whose indices are whole numbers, as text: `B[2].mid[1]`."""
    return ".".join(part.name + "".join(f"[{_index_text(index)}]" for index in part.indices) for part in name.parts)


def _index_text(index: Expression | Range) -> str:
    if isinstance(index, Number):
        return f"{index.value:.0f}"
    raise ValueError("an index that is not worked out")


def named(text: str, span: Span | None = None) -> Name:
    """The name that a full name's text stands for."""
    parts = []
    for piece in text.split("."):
        word, *indices = piece.split("[")
        parts.append(Part(word, tuple(Number(float(index[:-1])) for index in indices)))
    return Name(tuple(parts), span)


def in_turn(first: Entry, needs: Callable[[Entry], Iterable[Entry]], finish: Callable[[Entry], None]) -> None:
    """Finish an entry after all new ones that it needs, however long the chain. Those at work on are in state busy."""
    first.state = "busy"
    work: list[tuple[Entry, Iterator[Entry]]] = [(first, iter(needs(first)))]
    while work:
        entry, rest = work[-1]
        needed = next(rest, None)
        if needed is None:
            work.pop()
            finish(entry)
        elif needed.state == "new":
            needed.state = "busy"
            work.append((needed, iter(needs(needed))))


class Scope:
    """All names of a design, and the mistakes found while their values are worked out.

    overrides: full names of lets and parameters with the value that replaces their own, an expression or a data sheet's
    name as a resolved value
    moved: full names of lets that a study or a sweep gives other values
    torn: words of statements that could not be read or made sense of; whatever they name is not reported as unknown
    """

    def __init__(self, project: Project, overrides: Mapping[str, Value]):
        self.overrides = overrides
        self.mistakes: list[Mistake] = []
        self.entries: dict[str, Entry] = {}
        self.moved: dict[str, None] = {}
        self.torn: set[str] = set(project.unread)
        self.found = project.found
        self.root = Space(project.top, "")
        self.folder = project.folder
        self._files: dict[Unit, Space] = {project.top: self.root}

    def file_space(self, unit: Unit) -> Space:
        """The names of a used file: those of its own lets, out of every other file's sight."""
        if unit not in self._files:
            space = Space(unit, f"{unit.name}|")
            self._files[unit] = space
            for statement in unit.description.statements:
                if isinstance(statement, Let):
                    self.declare(statement, Place(space))
        return self._files[unit]

    def wrong(self, what: str, cure: str, span: Span | None) -> None:
        """Report a mistake."""
        self.mistakes.append(Mistake(what, cure, span))

    def tear(self, *names: Name | None) -> None:
        """Note the names of a statement that makes nothing, so that nobody reports them as unknown."""
        self.torn.update(part.name for name in names if name is not None for part in name.parts)

    def is_torn(self, text: str) -> bool:
        """Whether a name may be that of something which could not be read."""
        return "" in self.torn or (bool(self.torn) and any(word in self.torn for word in re.findall(r"\w+", text)))

    @property
    def crowded(self) -> bool:
        """Whether there are more mistakes than anybody is shown."""
        return len(self.mistakes) > MOST_MISTAKES

    @property
    def incomplete(self) -> bool:
        """Whether something of the design is missing, so that nothing can be said of what is not there."""
        return bool(self.torn) or not self.found

    # --- names ---------------------------------------------------------------------------------------------------

    def local(self, name: Name, place: Place) -> str:
        """A name's text with its indices worked out, as seen from a place."""
        if len(name.parts) == 1 and not name.parts[0].indices:
            return name.parts[0].name
        return ".".join(
            part.name + "".join(f"[{self._index(index, name, place)}]" for index in part.indices) for part in name.parts
        )

    def _index(self, index: Expression | Range, name: Name, place: Place) -> int:
        if isinstance(index, Range):
            self.wrong("a range of indices stands where one name is wanted", "Give one index.", name.span)
            raise Poisoned
        if isinstance(index, Number) and not index.unit and index.value in range(_LARGEST_WHOLE):
            return int(index.value)
        return self.whole(index, place, "an index")

    def whole(
        self, expression: Expression, place: Place, what: str, low: int = -_LARGEST_WHOLE, high: int = _LARGEST_WHOLE
    ) -> int:
        """A whole number, such as an index or a bound of a repeat."""
        value = self.quantity(expression, place)
        number = value.value
        if value.dimension != NONE or abs(number - round(number)) > 1e-9:
            self.wrong(f"{what} must be a whole number without a unit", "Give a whole number.", span_of(expression))
            raise Poisoned
        if not low <= round(number) <= high:
            cure = f"Keep it between {low} and {high}."
            self.wrong(f"{what} is {number:.10g}, which is out of range", cure, span_of(expression))
            raise Poisoned
        return round(number)

    def declare(self, node: Let | Parameter | Observe, place: Place, expression: Expression | None = None) -> None:
        """Enter a let, parameter or observe under its full name; each name stands for one thing."""
        name = node.name if isinstance(node.name, Name) else named(node.name, node.span)
        try:
            local = self.local(name, place)
        except Poisoned:
            self.tear(name)
            return
        span = name.span or node.span
        if len(name.parts) > 1:
            self.wrong(f"{local} can't be declared from outside", "Declare it where it belongs, without the dot.", span)
            return
        full = place.space.prefix + local
        if self._taken(full, local, place, span):
            return
        value = expression if isinstance(node, Parameter) else node.value
        self.entries[full] = Entry(node, full, place, value)

    def _taken(self, full: str, local: str, place: Place, span: Span | None) -> bool:
        if full in self.entries:
            self.wrong(f"{local} is declared twice", rename_cure(place, "x"), span)
            return True
        own_file = place.space.file is None
        if own_file and local in place.space.unit.sheets:
            cure = "Rename one of the two: lets, parameters, data sheets and observes share their names."
            self.wrong(f"{local} is a data sheet already", cure, span)
            return True
        if local in place.indices:
            self.wrong(f"{local} is the index of the repeat around it", "Rename one of the two.", span)
            return True
        return False

    def find(self, name: Name, place: Place) -> Entry | Sheet | int | None:
        """What a name in an expression stands for: an index, an entry or a data sheet; None where nothing does."""
        local = self.local(name, place)
        if local in place.indices:
            return place.indices[local]
        space = place.space
        for prefix in (space.prefix, space.file.prefix if space.file is not None else None):
            if prefix is not None and prefix + local in self.entries:
                return self.entries[prefix + local]
        found = space.unit.sheets.get(local)
        return None if found is None else Sheet(*found)

    def names(self, place: Place) -> list[str]:
        """Names an expression may hold, for suggesting the nearest; none once nobody is shown them."""
        if self.crowded:
            return []
        space = place.space
        found = [*place.indices, *space.unit.sheets]
        for full in self.entries:
            for prefix in (space.prefix, space.file.prefix if space.file is not None else space.prefix):
                if full.startswith(prefix) and "|" not in full[len(prefix) :]:
                    found.append(full[len(prefix) :])
        return list(dict.fromkeys(found))

    # --- values --------------------------------------------------------------------------------------------------

    def value(self, expression: Expression, place: Place) -> Value:
        """The value of an expression: a quantity, or a data sheet where it only names one."""
        if isinstance(expression, Name):
            return self._named(expression, place, bare=True)
        return evaluate(expression, lambda name: self._quantity(name, place), self.mistakes)

    def quantity(self, expression: Expression, place: Place) -> Quantity:
        """The value of an expression that must be a quantity."""
        value = self.value(expression, place)
        if isinstance(value, Sheet):
            cure = "Give a value with its unit."
            self.wrong(f"{value.node.name} is a data sheet, not a value", cure, span_of(expression))
            raise Poisoned
        return value

    def _quantity(self, name: Name, place: Place) -> Quantity:
        value = self._named(name, place)
        if isinstance(value, Sheet):
            self.wrong(f"{value.node.name} is a data sheet, not a value", "Give a value with its unit.", name.span)
            raise Poisoned
        return value

    def _named(self, name: Name, place: Place, bare: bool = False) -> Value:
        """What a name stands for; a bare one may be a data sheet, and so of a file that could not be had."""
        found = self.find(name, place)
        if found is None and bare and not self.found:
            raise Poisoned
        if found is None:
            self.unknown(self.local(name, place), self.names(place), name.span)
            raise Poisoned
        if isinstance(found, int):
            return Quantity(float(found), NONE)
        return found if isinstance(found, Sheet) else self.entry_value(found, name.span)

    def unknown(self, text: str, known: list[str], span: Span | None, what: str = "nothing is named") -> None:
        """Report a name that stands for nothing, with the nearest that does."""
        if not self.is_torn(text):
            self.wrong(f"{what} {text}", suggest(text, [] if self.crowded else known), span)

    def entry_value(self, entry: Entry, span: Span | None) -> Value:
        """The value of a let or parameter, worked out once."""
        if isinstance(entry.node, Observe):
            cure = "Use it in a figure, such as `mean(...)`, or name a let."
            self.wrong(f"{entry.full} is an observed signal, not a value", cure, span)
            raise Poisoned
        if entry.state == "busy":
            self.wrong(f"{entry.full} depends on itself", "Break the circle: give one of them a value.", span)
            raise Poisoned
        if entry.state == "new":
            in_turn(entry, self._needs, self._work_out)
        if entry.value is None:
            raise Poisoned
        return entry.value

    def _needs(self, entry: Entry) -> Iterator[Entry]:
        """The lets and parameters in an entry's expression, those in indices first."""
        if entry.expression is None or entry.full in self.overrides:
            return
        for name in reversed(names_in(entry.expression)):
            try:
                found = self.find(name, entry.place)
            except Poisoned:
                continue
            if isinstance(found, Entry) and not isinstance(found.node, Observe):
                yield found

    def _work_out(self, entry: Entry) -> None:
        try:
            if entry.full in self.overrides:
                entry.value = self.overrides[entry.full]
            elif entry.expression is not None:
                entry.value = self.value(entry.expression, entry.place)
        except Poisoned:
            pass
        entry.state = "failed" if entry.value is None else "known"

    def varied(self, expression: Expression, place: Place) -> str | None:
        """The name of a let with a spread, or set by a study or sweep, on which an expression depends."""
        seen: dict[str, None] = {}
        work = [(expression, place)]
        while work:
            current, here = work.pop()
            for name in names_in(current):
                found = self.find(name, here)
                if not isinstance(found, Entry) or found.full in seen:
                    continue
                seen[found.full] = None
                if found.full in self.moved or (isinstance(found.node, Let) and found.node.spread is not None):
                    return found.full
                if found.expression is not None:
                    work.append((found.expression, found.place))
        return None


def suggest(text: str, known: list[str], otherwise: str = "Check the name, or declare it.") -> str:
    """The cure for an unknown name: the nearest known one, else the known ones where they are few."""
    close = nearest(text, known)
    if close:
        return f"Did you mean {close}?"
    names = list(dict.fromkeys(known))
    return f"Known here: {', '.join(names)}." if 0 < len(names) <= FEW else otherwise


def rename_cure(place: Place, example: str) -> str:
    """The cure for a name that is taken."""
    if place.inward:
        return f"Each copy of a repeat needs a name of its own: carry the index in it, as in `{example}[k]`."
    return "Rename one of the two."


def at_word(span: Span | None, word: str, after: Span | None = None) -> Span | None:
    """Where a word stands in a statement, behind a piece of it."""
    if span is None:
        return None
    start = span.start if after is None else after.end
    found = re.compile(rf"\b{re.escape(word)}\b").search(span.source.text, start, span.end)
    return span if found is None else Span(span.source, found.start(), found.end())


def span_of(node: object) -> Span | None:
    """Where a piece of a description stood."""
    return getattr(node, "span", None)
