"""Requirements as written, spread out: one for each study, copy of a repeat and element that `each` stands for.

It knows the circuit's names and what figures are, and judges nothing.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from grammar.description import Call, Comparison, Each, Expression, Name, Ratings, Require, Study
from grammar.quantities import NONE, Dimension, show, unit_of
from grammar.spans import Span
from grammar.writer import write_expression
from simcore.components import KINDS
from simcore.design.accessible import DISCHARGE, DischargeTable
from simcore.design.circuit import Requirement
from simcore.design.files import read_beside
from simcore.design.flatten import all_kinds
from simcore.design.limits import COLUMNS, PUBLISHED, LimitTable, read_limits
from simcore.design.measures import Measures, Resolved
from simcore.design.rewrite import eaches, put_element, rename
from simcore.design.scopes import Place, Poisoned, Scope, at_word, named, span_of, suggest
from simcore.design.values import EXPRESSIONS
from simcore.figures.catalogue import ABSOLUTE, TABLED, TEMPERATURES

MOST_REQUIREMENTS = 20_000


class Requirements:
    """Works out the requirements of a design."""

    def __init__(self, scope: Scope, measures: Measures, studies: Mapping[str, Study]):
        self.scope = scope
        self.measures = measures
        self.studies = studies
        self.place = Place(scope.root)
        self._count = 0

    def spread(self, require: Require, place: Place) -> list[Requirement]:
        """The requirements that one statement makes; none where it is mistaken."""
        names = require.studies or tuple(self.studies)
        for name in require.studies:
            if name not in self.studies:
                self.scope.unknown(name, list(self.studies), at_word(require.span, name), "no study is named")
        names = tuple(name for name in names if name in self.studies)
        try:
            self._counted(require, len(names))
            if isinstance(require.claim, Ratings):
                return self._ratings(require, require.claim, names)
            return self._claims(require, require.claim, place, names)
        except Poisoned:
            return []

    def _claims(self, require: Require, claim: Comparison, place: Place, names: tuple[str, ...]) -> list[Requirement]:
        kinds = list(dict.fromkeys(each.kind for each in eaches(claim)))
        if len(kinds) > 1:
            self.scope.wrong("one requirement has several `each`", "Write one requirement for each kind.", require.span)
            raise Poisoned
        if not kinds:
            return self._one(require, claim, place, names)
        found: list[Requirement] = []
        elements = self.each(kinds[0], eaches(claim)[0].span)
        self._counted(require, (len(elements) - 1) * len(names))
        for element in elements:
            found += self._one(require, claim, place, names, named(element))
        return found

    def _counted(self, require: Require, more: int) -> None:
        """Requirements over all studies and elements, which are bounded."""
        before, self._count = self._count, self._count + more
        if self._count > MOST_REQUIREMENTS:
            if before <= MOST_REQUIREMENTS:
                cure = f"At most {MOST_REQUIREMENTS}, counting each study and each element: name those that matter."
                self.scope.wrong("the design has too many requirements", cure, require.span)
            raise Poisoned

    def each(self, kind: str, span: Span | None) -> list[str]:
        """Full names of all elements of a kind, blocks included."""
        if kind not in KINDS:
            self.scope.wrong(f"there is no kind {kind}", suggest(kind, list(KINDS), all_kinds(list(KINDS))), span)
            raise Poisoned
        found = [name for name, element in self.measures.elements.items() if element.kind == kind]
        if not found and not self.scope.incomplete:
            self.scope.wrong(f"the circuit has no {kind}", "Leave the requirement out, or name another kind.", span)
        if not found:
            raise Poisoned
        return found

    def _one(
        self, require: Require, claim: Comparison, place: Place, names: tuple[str, ...], element: Name | None = None
    ) -> list[Requirement]:
        def put(expression: Expression | None) -> Expression | None:
            return expression if expression is None or element is None else put_element(expression, element)

        figure, bound, upper = put(claim.figure), put(claim.bound), put(claim.upper)
        assert figure is not None
        indexed = [self._indexed(each, place) for each in (figure, bound, upper)]
        wording = _wording(claim, *indexed)
        limits = None
        if claim.relation == "within":
            resolved: list[Resolved | None] = [self._tabled(figure, place), None, None]
            harmonics = isinstance(figure, Call) and figure.name == "harmonics"
            limits = (self._limits if harmonics else self._discharge)(claim.table or "", require.span)
        else:
            resolved = self._compared(figure, bound, upper, place)
        parts = [None if each is None else each.expression for each in resolved]
        return [
            Requirement(
                name,
                claim.relation,
                *parts,
                wording,
                require.label,
                limits=limits,
                span=require.span,
                dimension=NONE if resolved[0] is None else resolved[0].dimension,
                written="" if indexed[0] is None else write_expression(indexed[0]),
                temperature=self._is_temperature(parts[0]),
            )
            for name in names
        ]

    def _is_temperature(self, figure: Expression | None) -> bool:
        """Of a temperature its mean, peak and valley are temperatures too; its rms, ripple and harmonics are not."""
        if not isinstance(figure, Call) or not figure.arguments:
            return False
        of = figure.arguments[0]
        if isinstance(of, Name) and figure.name in ABSOLUTE:
            of = self.measures.observed().get(write_expression(of), of)
        return figure.name in TEMPERATURES or (
            figure.name in ABSOLUTE and isinstance(of, Call) and of.name == "temperature"
        )

    def _compared(
        self, figure: Expression, bound: Expression | None, upper: Expression | None, place: Place
    ) -> list[Resolved | None]:
        first = self.measures.resolve(figure, place)
        if first.sort != "figure":
            what = "a signal" if first.sort == "signal" else "a value"
            cure = "Say which figure of it: `mean(...)`, `rms(...)`, `peak(...)` or `valley(...)`."
            self.scope.wrong(f"this is {what}, and a requirement needs a figure", cure, span_of(figure))
            raise Poisoned
        found: list[Resolved | None] = [first]
        for limit in (bound, upper):
            resolved = None if limit is None else self.measures.resolve(limit, place)
            found.append(resolved)
            if resolved is None:
                continue
            if resolved.sort == "signal":
                self.scope.wrong("a signal is no limit", "Give a value, or a figure of the signal.", span_of(limit))
                raise Poisoned
            if resolved.dimension != first.dimension:
                self._limit_clash(first.dimension, resolved.dimension, span_of(limit))
        ends = [each.quantity.value for each in found[1:] if each is not None and each.quantity is not None]
        if len(ends) == 2 and ends[0] > ends[1]:
            cure = "Write the lower limit first."
            self.scope.wrong("the lower limit lies above the upper one", cure, span_of(bound))
        return found

    def _limit_clash(self, figure: Dimension, limit: Dimension, span: Span | None) -> None:
        units = [unit_of(each) or "a number without a unit" for each in (figure, limit)]
        cure = f"The figure is in {units[0]}, the limit in {units[1]}: give the limit in {units[0]}."
        self.scope.wrong("figure and limit have different units", cure, span)
        raise Poisoned

    def _tabled(self, figure: Expression, place: Place) -> Resolved:
        """`harmonics(ELEMENT)` or `discharge(ELEMENT)`, which are compared with a table of limits."""
        if not isinstance(figure, Call) or figure.name not in TABLED or len(figure.arguments) != 1:
            cure = 'Write `harmonics(ELEMENT) within "..."`, or `discharge(ELEMENT)`.'
            what = "only the harmonics or the discharge of an element are compared with a table"
            self.scope.wrong(what, cure, span_of(figure))
            raise Poisoned
        argument, name = figure.arguments[0], figure.name
        if not isinstance(argument, Name):
            self.scope.wrong(f"{name} takes an element", f"Name one, as in `{name}(mains)`.", span_of(argument))
            raise Poisoned
        full = self.measures.element(argument, place, name, "branch")
        return Resolved(replace(figure, arguments=(named(full, argument.span),)), "figure", NONE)

    def _limits(self, name: str, span: Span | None) -> LimitTable:
        """A published table, or the user's own from a CSV file in the folder of the description."""
        table = PUBLISHED.get(" ".join(name.split()))
        if table is not None:
            return table
        where = at_word(span, name)
        if not name.lower().endswith(".csv"):
            cure = f"Known are {' and '.join(PUBLISHED)}; or name a CSV file of your own."
            self.scope.wrong(f'there is no table "{name}"', cure, where)
            raise Poisoned
        try:
            return read_limits(name, read_beside(self.scope.folder, name))
        except (OSError, ValueError) as fault:
            reason = fault.strerror if isinstance(fault, OSError) else str(fault)
            cure = f"Give a CSV file inside the folder of the description, with the columns {' and '.join(COLUMNS)}."
            self.scope.wrong(f'the table "{name}" can\'t be used: {reason}', cure, where)
            raise Poisoned from None

    def _discharge(self, name: str, span: Span | None) -> DischargeTable:
        """A published table of what may be left after disconnection."""
        table = DISCHARGE.get(" ".join(name.split()))
        if table is None:
            cure = f"Known are {' and '.join(DISCHARGE)}; or require `time_until_below(u, 60 V) <= 2 s`."
            self.scope.wrong(f'there is no table "{name}" for a discharge', cure, at_word(span, name))
            raise Poisoned
        return table

    def _ratings(self, require: Require, claim: Ratings, names: tuple[str, ...]) -> list[Requirement]:
        elements: dict[str, None] = {}
        for each in claim.of:
            if isinstance(each, Each):
                elements.update(dict.fromkeys(self.each(each.kind, each.span)))
            else:
                elements[self.measures.element(each, self.place, "ratings")] = None
        margin = 0.0
        for setting in claim.settings:
            if setting.key != "margin" or not isinstance(setting.value, EXPRESSIONS):
                self.scope.wrong(f"ratings has no key {setting.key}", "It takes `margin = 20 %`.", setting.span)
                continue
            quantity = self.scope.quantity(setting.value, self.place)
            if quantity.dimension != NONE or not 0.0 <= quantity.value < 1.0:
                self.scope.wrong("the margin is no share", "Give it between 0 % and 100 %.", span_of(setting.value))
            margin = quantity.value
        wording = "ratings" + (f" of {', '.join(elements)}" if claim.of else "")
        wording += f", margin = {show(margin * 100.0, NONE)} %" if margin else ""
        return [
            Requirement(
                name, "ratings", None, None, None, wording, require.label, tuple(elements), margin, span=require.span
            )
            for name in names
        ]

    def _indexed(self, expression: Expression | None, place: Place) -> Expression | None:
        """The expression as written, with the repeat's index in numbers."""
        if expression is None or not place.indices:
            return expression

        def name(found: Name) -> Name:
            entry = self.scope.find(found, place)
            local = str(entry) if isinstance(entry, int) else self.scope.local(found, place)
            return named(local, found.span)

        return rename(expression, name)


def _wording(claim: Comparison, figure: Expression | None, bound: Expression | None, upper: Expression | None) -> str:
    """The claim as the canonical text has it."""
    text = write_expression(figure) if figure is not None else ""
    if claim.relation == "within":
        return f'{text} within "{claim.table}"'
    low = write_expression(bound) if bound is not None else ""
    if claim.relation == "between":
        return f"{text} between {low} and {write_expression(upper) if upper is not None else ''}"
    return f"{text} {claim.relation} {low}"
