"""Signals and figures as written, resolved to full names and checked for arguments and dimensions, without a solution.

Names become full names of nodes and elements, values become numbers in SI units, observes within observes are put in
their place. It knows the catalogue of signals and figures, and computes none.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from contextlib import suppress
from dataclasses import dataclass, replace

from grammar.description import Binary, Branch, Call, Each, Expression, Name, Negative, Number, Observe
from grammar.expressions import FUNCTIONS, names_in
from grammar.quantities import ANGLE, NONE, Dimension, Quantity, unit_of
from grammar.spans import Span
from simcore.design.circuit import Element
from simcore.design.scopes import Entry, Place, Poisoned, Scope, in_turn, named, span_of, suggest
from simcore.figures.catalogue import FIGURES, SIGNALS, TABLED, Measure, example_of, form_of

SOURCES = ("source", "three_phase")
OF_KINDS = {"junction": ("diode", "thyristor"), "capacitor": ("capacitor",), "fuse": ("fuse",), "source": SOURCES}
"""Kinds that a measure of some sort of element takes; an `element` is of any."""
_HEATED = ("thermal_resistance", "temperature")
NEEDED = {"heat": [("melting_i2t",)], "core_temperature": [_HEATED], "life": [("endurance",), _HEATED]}
"""Keys, one of each group, without which an element has nothing to measure."""
DEEPEST_OBSERVE = 32
"""Observes that may stand in one another: a signal is formed by going down all of them."""


@dataclass(frozen=True)
class Resolved:
    """An expression in full names; sort is value, signal or figure."""

    expression: Expression
    sort: str
    dimension: Dimension
    quantity: Quantity | None = None


class Measures:
    """Resolves expressions against the nodes and elements of a circuit.

    canonical: a full node name as the circuit has it (a block's terminal is the node it joins)
    """

    def __init__(
        self,
        scope: Scope,
        elements: Mapping[str, Element],
        nodes: Mapping[str, object],
        canonical: Callable[[str], str],
        studies: Mapping[str, object],
    ):
        self.scope = scope
        self.elements = elements
        self.nodes = nodes
        self.canonical = canonical
        self.studies = studies
        self.ports = {
            f"{element.name}.{port.name}": element
            for element in elements.values()
            for port in element.ports
            if port.name
        }
        self._observes: dict[str, Resolved | None] = {}
        self._depths: dict[str, int] = {}

    def observe(self, entry: Entry, span: Span | None = None) -> Resolved:
        """An observe's signal, worked out once."""
        if entry.state == "busy":
            self._wrong(f"{entry.full} depends on itself", "Break the circle.", span)
        elif entry.state == "new":
            in_turn(entry, self._observes_in, self._work_out)
        known = self._observes.get(entry.full)
        if known is None:
            raise Poisoned
        return known

    def _observes_in(self, entry: Entry) -> Iterator[Entry]:
        """The observes that an observe is made of."""
        for name in names_in(entry.node.value) if isinstance(entry.node, Observe) else ():
            try:
                found = self.scope.find(name, entry.place)
            except Poisoned:
                continue
            if isinstance(found, Entry) and isinstance(found.node, Observe):
                yield found

    def _work_out(self, entry: Entry) -> None:
        assert isinstance(entry.node, Observe)
        self._observes[entry.full] = None
        with suppress(Poisoned):
            self._observes[entry.full] = self._observed(entry, entry.node.value)
        entry.state = "known"

    def _observed(self, entry: Entry, value: Expression) -> Resolved:
        depth = 1 + max((self._depths.get(inner.full, 0) for inner in self._observes_in(entry)), default=0)
        if depth > DEEPEST_OBSERVE:
            cure = "Write the signal with fewer observes in one another."
            self._wrong(f"more than {DEEPEST_OBSERVE} observes stand in one another", cure, span_of(value))
            raise Poisoned
        found = self.resolve(value, entry.place)
        if found.sort == "figure":
            cure = "Observe a signal, and ask for its figure in a requirement."
            self._wrong(f"{entry.full} is a figure, not a signal", cure, span_of(value))
            raise Poisoned
        self._depths[entry.full] = depth
        return found

    def observed(self) -> dict[str, Expression]:
        """The observes worked out so far, in full names."""
        return {name: found.expression for name, found in self._observes.items() if found is not None}

    def resolve(self, expression: Expression, place: Place) -> Resolved:
        """An expression with its names in full, its sort and its dimension."""
        if isinstance(expression, Name):
            return self._name(expression, place)
        if isinstance(expression, Call) and (expression.name in SIGNALS or expression.name in FIGURES):
            return self._measure(expression, place)
        if isinstance(expression, Call) and expression.name in TABLED:
            instead = "harmonic(..., n)" if expression.name == "harmonics" else "time_until_below(..., 60 V)"
            cure = f'Write `{expression.name}(...) within "..."`, or take `{instead}`.'
            self._wrong(f"{expression.name} stands before `within` only", cure, expression.span)
            raise Poisoned
        if isinstance(expression, Call):
            return self._function(expression, place)
        if isinstance(expression, Negative):
            inner = self.resolve(expression.operand, place)
            return self._combined(replace(expression, operand=inner.expression), (inner,), inner.dimension)
        if isinstance(expression, Binary):
            return self._binary(expression, place)
        if isinstance(expression, Each):
            cure = "`each` stands for an element in the figure of a requirement."
            self._wrong("`each` can't stand here", cure, expression.span)
            raise Poisoned
        if isinstance(expression, Branch):
            self._wrong("a branch is no value", "Write `voltage(a -> b)`.", expression.span)
            raise Poisoned
        return self._value(expression, place)

    # --- pieces --------------------------------------------------------------------------------------------------

    def _value(self, expression: Expression, place: Place) -> Resolved:
        quantity = self.scope.quantity(expression, place)
        return Resolved(_number(quantity, span_of(expression)), "value", quantity.dimension, quantity)

    def _name(self, name: Name, place: Place) -> Resolved:
        found = self.scope.find(name, place)
        if isinstance(found, Entry) and isinstance(found.node, Observe):
            inner = self.observe(found, name.span)
            return Resolved(named(found.full, name.span), inner.sort, inner.dimension)
        if found is None:
            local = self.scope.local(name, place)
            if self.is_element(local, place) or self._node(local, place) is not None:
                what = "an element" if self.is_element(local, place) else "a node"
                cure = f"Say what of it: `voltage({local})`" + (f", `current({local})`." if "element" in what else ".")
                self._wrong(f"{local} is {what}, not a signal", cure, name.span)
                raise Poisoned
        return self._value(name, place)

    def _function(self, call: Call, place: Place) -> Resolved:
        if call.name not in FUNCTIONS:
            known = [*FUNCTIONS, *SIGNALS, *FIGURES]
            cure = suggest(call.name, known, f"Known are {', '.join(known)}.")
            self._wrong(f"there is no figure, signal or function {call.name}", cure, call.span)
            raise Poisoned
        inner = [self.resolve(argument, place) for argument in call.arguments]
        if all(each.sort == "value" for each in inner):
            return self._value(call, place)
        if call.study is not None:
            self._wrong("`at` stands behind a figure only", "Write it behind the figure inside.", call.span)
            raise Poisoned
        dimension = self._function_dimension(call, inner)
        return self._combined(
            replace(call, arguments=tuple(each.expression for each in inner)), tuple(inner), dimension
        )

    def _function_dimension(self, call: Call, inner: list[Resolved]) -> Dimension:
        dimensions = [each.dimension for each in inner]
        if call.name in ("min", "max"):
            for each, argument in zip(inner[1:], call.arguments[1:], strict=True):
                self._same(inner[0].dimension, each.dimension, call.name, span_of(argument))
        elif len(inner) != 1:
            self._wrong(f"{call.name} takes one argument", f"Write `{call.name}(x)`.", call.span)
            raise Poisoned
        if call.name in ("abs", "min", "max"):
            return dimensions[0]
        if call.name == "sqrt":
            return dimensions[0] ** 0.5
        if dimensions[0] != NONE and call.name not in ("sin", "cos"):
            unit = unit_of(dimensions[0])
            self._wrong(
                f"{call.name} takes a number without a unit, this is in {unit}",
                f"Divide it by a value in {unit}.",
                call.span,
            )
            raise Poisoned
        return NONE

    def _binary(self, binary: Binary, place: Place) -> Resolved:
        left, right = self.resolve(binary.left, place), self.resolve(binary.right, place)
        if left.sort == right.sort == "value":
            return self._value(binary, place)
        operator = binary.operator
        if operator in "+-":
            self._same(left.dimension, right.dimension, operator, binary.span)
            dimension = left.dimension
        elif operator == "*":
            dimension = left.dimension * right.dimension
        elif operator == "/":
            dimension = left.dimension / right.dimension
        else:
            dimension = self._power(left, right, binary)
        whole = replace(binary, left=left.expression, right=right.expression)
        return self._combined(whole, (left, right), dimension)

    def _power(self, left: Resolved, right: Resolved, binary: Binary) -> Dimension:
        if right.quantity is None or right.dimension != NONE:
            self._wrong("an exponent must be a plain number", "Write `x^2`, or another number.", span_of(binary.right))
            raise Poisoned
        return left.dimension**right.quantity.value

    def _same(self, left: Dimension, right: Dimension, operator: str, span: Span | None) -> None:
        if left != right:
            sides = [unit_of(each) or "a number without a unit" for each in (left, right)]
            cure = f"One side is in {sides[0]}, the other in {sides[1]}: make them alike."
            self._wrong(f"the two sides of {operator} have different units", cure, span)
            raise Poisoned

    def _combined(self, whole: Expression, parts: tuple[Resolved, ...], dimension: Dimension) -> Resolved:
        sorts = [part.sort for part in parts]
        if "signal" in sorts and "figure" in sorts:
            cure = "Take a figure of the signal first, such as its mean, or compare figures."
            self._wrong("a signal and a figure can't be combined", cure, span_of(whole))
            raise Poisoned
        sort = "figure" if "figure" in sorts else "signal" if "signal" in sorts else "value"
        quantity = None
        if sort == "value" and parts[0].quantity is not None:
            quantity = Quantity(-parts[0].quantity.value, dimension)
            whole = _number(quantity, span_of(whole))
        return Resolved(whole, sort, dimension, quantity)

    # --- signals and figures ---------------------------------------------------------------------------------------

    def _measure(self, call: Call, place: Place) -> Resolved:
        signal = call.name in SIGNALS
        measure = SIGNALS[call.name] if signal else FIGURES[call.name]
        self._study(call, signal)
        if len(call.arguments) != len(measure.arguments) and not (measure.optional and not call.arguments):
            cure = f"Write `{call.name}({example_of(measure)})`."
            self._wrong(f"{call.name} takes {form_of(measure)}", cure, call.span)
            raise Poisoned
        arguments, dimension = [], NONE
        for sort, argument in zip(measure.arguments, call.arguments, strict=False):
            if sort == "signal" or sort == "signal or branch":
                inner = self._signal(measure, argument, place, sort)
                dimension = inner.dimension
                arguments.append(inner.expression)
            else:
                arguments.append(self._argument(measure, sort, argument, place, dimension))
        whole = replace(call, arguments=tuple(arguments))
        return Resolved(whole, "signal" if signal else "figure", measure.result(dimension))

    def _study(self, call: Call, signal: bool) -> None:
        if call.study is None:
            return
        if signal:
            self._wrong(
                "`at` stands behind a figure only", f"Write it behind a figure of `{call.name}(...)`.", call.span
            )
            raise Poisoned
        if call.study not in self.studies:
            self.scope.unknown(call.study, list(self.studies), call.span, "no study is named")
            raise Poisoned

    def _signal(self, measure: Measure, argument: Expression, place: Place, sort: str) -> Resolved:
        """The signal that a figure is of; a bare element stands for its current where the figure allows it."""
        if sort == "signal or branch" and isinstance(argument, Name) and self.scope.find(argument, place) is None:
            argument = Call("current", (argument,), span=argument.span)
        inner = self.resolve(argument, place)
        if inner.sort != "signal":
            is_what = "a figure already" if inner.sort == "figure" else "a value"
            cure = "Give an observe's name, or a signal such as `voltage(a -> b)` or `current(X)`."
            self._wrong(f"{measure.name} takes a signal, and this is {is_what}", cure, span_of(argument))
            raise Poisoned
        if measure.wants is not None and inner.dimension != measure.wants:
            unit = unit_of(measure.wants)
            self._wrong(f"{measure.name} takes a signal in {unit}", "Give a current.", span_of(argument))
            raise Poisoned
        return inner

    def _argument(
        self, measure: Measure, sort: str, argument: Expression, place: Place, dimension: Dimension
    ) -> Expression:
        if sort in ("count", "level"):
            return self._amount(measure, sort, argument, place, dimension)
        if sort == "place" and isinstance(argument, Branch):
            ends = [self.node(end, place) for end in (argument.start, argument.end)]
            return Branch(named(ends[0], argument.start.span), named(ends[1], argument.end.span), argument.span)
        if not isinstance(argument, Name):
            cure = f"Write `{measure.name}({example_of(measure)})`."
            self._wrong(f"{measure.name} takes {form_of(measure)}", cure, span_of(argument))
            raise Poisoned
        local = self.scope.local(argument, place)
        if sort == "place":
            node = self._node(local, place)
            if node is not None:
                return named(node, argument.span)
        return named(self.element(argument, place, measure.name, sort), argument.span)

    def _amount(
        self, measure: Measure, sort: str, argument: Expression, place: Place, dimension: Dimension
    ) -> Expression:
        if sort == "count":
            order = self.scope.whole(argument, place, f"the second argument of {measure.name}", 1, 10_000)
            return Number(float(order), "", span_of(argument))
        level = self.scope.quantity(argument, place)
        if level.dimension != dimension:
            due = unit_of(dimension)
            self._wrong(
                f"the level of {measure.name} is not in the signal's unit", f"Give it in {due}.", span_of(argument)
            )
            raise Poisoned
        return _number(level, span_of(argument))

    # --- nodes and elements ----------------------------------------------------------------------------------------

    def node(self, name: Name, place: Place) -> str:
        """The full name of a node that must exist."""
        local = self.scope.local(name, place)
        found = self._node(local, place)
        if found is None:
            self.scope.unknown(local, self._seen(self.nodes, place), name.span, "no node is named")
            raise Poisoned
        return found

    def element(self, name: Name, place: Place, by: str, sort: str = "element") -> str:
        """The full name of an element, winding or phase that must exist and be of the right sort."""
        local = self.scope.local(name, place)
        full = place.space.prefix + local
        element = self.elements.get(full) or self.ports.get(full)
        if element is None:
            known = self._seen({**self.elements, **self.ports}, place)
            if sort == "place":
                known += self._seen(self.nodes, place)
            what = "no node or element is named" if sort == "place" else "no element is named"
            self.scope.unknown(local, known, name.span, what)
            raise Poisoned
        several = len(element.ports) > 1 and full in self.elements
        if several and sort in ("place", "branch"):
            first = element.ports[0].name
            cure = f"Name one of them, as in `{by}({local}.{first})`."
            self._wrong(f"{local} has several windings or phases", cure, name.span)
            raise Poisoned
        allowed = OF_KINDS.get(sort)
        if allowed is not None and element.kind not in allowed:
            self._wrong(
                f"{by} is of a {allowed[0]}, and {local} is a {element.kind}", f"Name a {allowed[0]}.", name.span
            )
            raise Poisoned
        for keys in NEEDED.get(by, ()):
            if all(element.given.get(key) is None for key in keys):
                cure = "Give its " + " or ".join(f"`{key}`" for key in keys) + "."
                self._wrong(f"nothing is said of {local} that its {by} could follow from", cure, name.span)
                raise Poisoned
        return full

    def _node(self, local: str, place: Place) -> str | None:
        full = self.canonical(place.space.prefix + local)
        return full if full in self.nodes else None

    def is_element(self, local: str, place: Place) -> bool:
        """Whether a name means an element, winding or phase."""
        full = place.space.prefix + local
        return full in self.elements or full in self.ports

    def _seen(self, names: Mapping[str, object], place: Place) -> list[str]:
        prefix = place.space.prefix
        if self.scope.crowded:
            return []
        return [name[len(prefix) :] for name in names if name.startswith(prefix)]

    def _wrong(self, what: str, cure: str, span: Span | None) -> None:
        self.scope.wrong(what, cure, span)


def _number(quantity: Quantity, span: Span | None) -> Number:
    value = math.degrees(quantity.value) if quantity.dimension == ANGLE else quantity.value
    return Number(value, unit_of(quantity.dimension), span)
