"""From a design as read to the flat circuit: elements between named nodes, lets, observes, studies and requirements.

All mistakes come back at once. Soundness of the graph is looked at once everything else is right.
"""

from __future__ import annotations

from collections.abc import Mapping
from contextlib import suppress
from dataclasses import replace

from grammar.description import Element, Expression, Let, Name
from grammar.mistakes import Mistake, first_of
from grammar.quantities import KELVIN, NONE, Quantity, unit_of
from grammar.spans import Span
from simcore.components import KINDS
from simcore.components.kind import Kind
from simcore.design.circuit import Circuit, LetValue, Observed, Port
from simcore.design.circuit import Element as Component
from simcore.design.files import Project, read_beside
from simcore.design.flatten import Flat, Flattener, TooLarge, is_dotted
from simcore.design.measures import Measures
from simcore.design.recorded import Unreadable, trace_of
from simcore.design.requirements import Requirements
from simcore.design.scopes import Place, Poisoned, Scope, Sheet, Value, rename_cure, span_of
from simcore.design.sensing import NotLinear, sensed
from simcore.design.soundness import unsound
from simcore.design.studies import Studies, moved_lets
from simcore.design.sweeps import planned_sweeps
from simcore.design.unused import check_unused
from simcore.design.values import EXPRESSIONS, Reader, Values, clash, is_current

ROOM = 298.15


def elaborate(
    project: Project, overrides: Mapping[str, Quantity | Expression | str] | None = None, again: bool = False
) -> tuple[Circuit, list[Mistake]]:
    """The circuit that a design describes, with some lets replaced.

    overrides: full names of lets (`C_res`, `S[2].C`) -> a quantity, an expression or a data sheet's name
    again: the same design was found right before; what can't have changed is not looked at twice
    Of a design with mistakes in its texts, what could be read is looked at: whatever the rest may have named is not
    called unknown, and the soundness of the graph is left open.
    """
    nothing = Circuit(project.name, "", (), ROOM, {}, {}, {}, {}, ())
    if project.lost:
        return nothing, []
    scope = Scope(project, {})
    builder = _Builder(project, scope, again)
    scope.overrides = builder.overridden(overrides or {})
    try:
        circuit = builder.circuit()
    except TooLarge:
        circuit = nothing
    return circuit, first_of(_once(scope.mistakes), project.top.name)


def _once(mistakes: list[Mistake]) -> list[Mistake]:
    """One mistake a place: copies of a block or repeat repeat it."""
    found: dict[object, Mistake] = {}
    for mistake in mistakes:
        span = mistake.span
        where = (mistake.file, mistake.what) if span is None else (span.source.name, span.start)
        found.setdefault(where, mistake)
    return list(found.values())


class _Builder:
    def __init__(self, project: Project, scope: Scope, again: bool):
        self.project = project
        self.scope = scope
        self.again = again
        self.reader = Reader(scope)
        self.flattener = Flattener(scope)
        self.elements: dict[str, Component] = {}
        self.nodes: dict[str, Span | None] = {}
        self.mentions: dict[str, Name] = {}
        self.placed: dict[str, Place] = {}
        self.reference_spans: dict[str, Span | None] = {}

    def overridden(self, overrides: Mapping[str, Quantity | Expression | str]) -> dict[str, Value]:
        """Overrides as values; expressions and data sheets are seen from the top file."""
        place, found = Place(self.scope.root), {}
        for name, value in overrides.items():
            if isinstance(value, str):
                sheet = self.scope.root.unit.sheets.get(value)
                if sheet is None:
                    self.scope.unknown(value, list(self.scope.root.unit.sheets), None, "no data sheet is named")
                    continue
                found[name] = Sheet(*sheet)
                continue
            with suppress(Poisoned):  # its mistake is among the others
                found[name] = value if isinstance(value, Quantity) else self.scope.value(value, place)
        return found

    def circuit(self) -> Circuit:
        flat = self.flattener.run()
        self.scope.moved = moved_lets(flat)
        for node, place in flat.elements:
            self._element(node, place)
        self._made_nodes()
        references = self._references(flat)
        ambient = self._ambient(flat)
        measures = Measures(
            self.scope,
            self.elements,
            self.nodes,
            self.flattener.canonical,
            {study.name: study for study in flat.studies},
        )
        self._sense(measures)
        circuit = Circuit(
            self.project.name,
            flat.purposes[0].text if flat.purposes else "",
            references,
            ambient,
            self.elements,
            self._lets(),
            self._observes(flat, measures),
            {},
            (),
            blocks={name: node.kind for name, node in flat.copies.items()},
        )
        if self.again:
            return circuit
        circuit = self._asked(circuit, measures, flat)
        check_unused(self.scope, self.reader, flat)
        if self.project.sound and not self.scope.mistakes and self.elements:
            self.scope.mistakes += unsound(circuit, self.nodes, self.reference_spans)
        return circuit

    def _asked(self, circuit: Circuit, measures: Measures, flat: Flat) -> Circuit:
        """The circuit with its studies, requirements and sweeps."""
        studies = Studies(self.scope, measures, flat)
        planned = studies.planned()
        requirements = Requirements(self.scope, measures, studies.studies)
        found = [each for require, place in flat.requires for each in requirements.spread(require, place)]
        sweeps = planned_sweeps(self.scope, measures, studies, flat, circuit)
        return replace(circuit, studies=planned, requirements=tuple(found), sweeps=sweeps)

    # --- elements ------------------------------------------------------------------------------------------------

    def _element(self, node: Element, place: Place) -> None:
        kind = KINDS[node.kind]
        try:
            full = self._named(node, place)
            ports = self._ports(node, place, full)
        except Poisoned:
            self.scope.tear(node.name, *node.terminals.nodes, node.terminals.star)
            return
        values = self.reader.element(node, kind, place)
        self._trace(values)
        self._enter(full, node, ports, values)
        self.placed[full] = place
        self._fits(node, kind, ports, values)

    def _trace(self, values: Values) -> None:
        """A recorded trace that an element names, read from beside the description."""
        name, span = values.given.get("samples"), values.spans.get("samples")
        if not isinstance(name, str):
            return
        try:
            points, dimension = trace_of(read_beside(self.project.folder, name), values.given.get("column"))
        except Unreadable as fault:
            self.scope.wrong(f'"{name}": {fault}', fault.cure, span)
        except (ValueError, OSError) as fault:
            reason = fault.strerror if isinstance(fault, OSError) else str(fault)
            self.scope.wrong(f'"{name}" can\'t be read: {reason}', "Put the file beside the description.", span)
        else:
            period = values.given.get("period")
            if isinstance(period, float) and points[-1][0] - points[0][0] < 0.98 * period:
                cure = "Record a whole period, or leave `period` out."
                self.scope.wrong(f'"{name}" is shorter than the period', cure, span)
            values.given["samples"], values.units["samples"] = points, dimension
            return
        del values.given["samples"]
        values.failed = True

    def _enter(self, full: str, node: Element, ports: tuple[Port, ...], values: Values) -> None:
        unit = ""
        if node.kind == "source":
            unit = "A" if any(is_current(dimension) for dimension in values.units.values()) else "V"
        spans = {key: span for key, span in values.spans.items() if span is not None}
        self.elements[full] = Component(
            full,
            node.kind,
            ports,
            values.given,
            unit=unit,
            sheet=values.sheet,
            label=node.label,
            span=node.name.span or node.span,
            key_spans=spans,
        )

    def _named(self, node: Element, place: Place) -> str:
        local = self.scope.local(node.name, place)
        full = place.space.prefix + local
        if is_dotted(node.name):
            self.scope.wrong(f"{local} can't be put in from outside", "Give it a name without a dot.", node.name.span)
            raise Poisoned
        if full in self.elements or full in self.flattener.flat.copies:
            self.scope.wrong(f"{full} is named twice", rename_cure(place, "D"), node.name.span or node.span)
            raise Poisoned
        return full

    def _ports(self, node: Element, place: Place, full: str) -> tuple[Port, ...]:
        kind, terminals = KINDS[node.kind], node.terminals
        if terminals.form != kind.form or (kind.form == "set" and len(terminals.nodes) != 3):
            forms = {"branch": "a -> b", "set": "(a, b, c) -> n", "windings": "(a -> b) : (c -> d)"}
            cure = f"Write its terminals as `{forms[kind.form]}: {kind.name} ...`."
            self.scope.wrong(f"a {kind.name} goes between other terminals", cure, terminals.span or node.span)
            raise Poisoned
        ends = [self._node(name, place) for name in terminals.nodes]
        if kind.form == "branch":
            return (Port("", ends[0], ends[1]),)
        if kind.form == "windings":
            return tuple(Port(f"w{i // 2 + 1}", ends[i], ends[i + 1]) for i in range(0, len(ends), 2))
        star = self._node(terminals.star, place) if terminals.star is not None else f"{full}.star"
        self.nodes.setdefault(star, span_of(terminals.star))
        return tuple(Port(f"L{i + 1}", end, star) for i, end in enumerate(ends))

    def _node(self, name: Name, place: Place) -> str:
        """A node's full name; a dotted one must be made by a block or set, which is known at the end."""
        full = self.flattener.canonical(place.space.prefix + self.scope.local(name, place))
        if is_dotted(name) and full not in self.nodes:
            self.mentions.setdefault(full, name)
        else:
            self.nodes.setdefault(full, name.span)
        return full

    def _made_nodes(self) -> None:
        """Nodes and elements share one name space, and nothing makes a node inside a block from outside."""
        for full, name in self.mentions.items():
            if full not in self.nodes:
                self.scope.unknown(full, list(self.nodes), name.span, "no node is named")
                self.nodes[full] = name.span
        taken = {**dict.fromkeys(self.elements, "an element"), **dict.fromkeys(self.flattener.flat.copies, "a block")}
        for full, span in self.nodes.items():
            if full in taken:
                what = f"{full} is {taken[full]} and a node"
                self.scope.wrong(what, "Rename one of the two: nodes and elements share their names.", span)

    def _fits(self, node: Element, kind: Kind, ports: tuple[Port, ...], values: Values) -> None:
        """As many values as windings or phases."""
        for key in kind.keys:
            if key.form == "ratio" and isinstance(values.given.get(key.name), tuple):
                count = len(values.given[key.name])
                if count != len(ports):
                    each = "windings" if kind.form == "windings" else "phases"
                    what = f"{key.name} has {count} values for {len(ports)} {each}"
                    span = values.spans.get(key.name) or node.span
                    self.scope.wrong(what, f"Give {len(ports)} values, parted by `:`.", span)

    def _sense(self, measures: Measures) -> None:
        """Signals that switch an element, resolved once all nodes and elements are known."""
        for full, place in self.placed.items():
            element = self.elements[full]
            for key in KINDS[element.kind].keys:
                given = element.given.get(key.name) if key.form == "expression" else None
                if not isinstance(given, EXPRESSIONS):
                    continue
                try:
                    signal = measures.resolve(given, place)
                    terms = sensed(signal.expression, self.elements, measures.observed())
                except Poisoned:
                    continue
                except NotLinear as fault:
                    self.scope.wrong(f"{key.name}: {fault}", fault.cure, element.key_spans.get(key.name))
                    continue
                if signal.dimension not in (key.dimension, *key.alternatives):
                    self.scope.wrong(*clash(key.name, key.dimension, signal.dimension), element.key_spans.get(key.name))
                element.given[key.name] = tuple(terms)

    # --- the rest ------------------------------------------------------------------------------------------------

    def _references(self, flat: Flat) -> tuple[str, ...]:
        found: dict[str, None] = {}
        place = Place(self.scope.root)
        for statement in flat.references:
            for name in statement.nodes:
                try:
                    local = self.scope.local(name, place)
                except Poisoned:
                    continue
                full = self.flattener.canonical(local)
                if full not in self.nodes:
                    self.scope.unknown(local, list(self.nodes), name.span, "no node is named")
                elif full in found:
                    self.scope.wrong(f"{local} is the reference twice", "Leave one out.", name.span)
                found[full] = None
                self.reference_spans[full] = name.span
        return tuple(found)

    def _ambient(self, flat: Flat) -> float:
        for extra in flat.ambients[1:]:
            self.scope.wrong("the ambient temperature is given twice", "Leave one out.", extra.span)
        for extra_purpose in flat.purposes[1:]:
            self.scope.wrong("the purpose is given twice", "Leave one out.", extra_purpose.span)
        if not flat.ambients:
            return ROOM
        expression = flat.ambients[0].temperature
        try:
            quantity = self.scope.quantity(expression, Place(self.scope.root))
        except Poisoned:
            return ROOM
        if quantity.dimension != KELVIN:
            self.scope.wrong(*clash("the ambient temperature", KELVIN, quantity.dimension), span_of(expression))
        elif quantity.value <= 0.0:
            self.scope.wrong("the ambient temperature is below absolute zero", "Check its value.", span_of(expression))
        return quantity.value

    def _lets(self) -> dict[str, LetValue]:
        found = {}
        for full, entry in list(self.scope.entries.items()):
            if not isinstance(entry.node, Let) or "|" in full:
                continue
            try:
                value = self.scope.entry_value(entry, entry.node.span)
                found[full] = self._let(full, entry.node, value, entry.place)
            except Poisoned:
                continue
        return found

    def _let(self, full: str, node: Let, value: Value, place: Place) -> LetValue:
        if isinstance(value, Sheet):
            if node.spread is not None:
                self.scope.wrong(f"{full} is a data sheet, which has no tolerance", "Leave it out.", node.span)
            return LetValue(full, value.node.name, label=node.label)
        if node.spread is None:
            return LetValue(full, value, label=node.label)
        low = self._limit(full, node.spread.low, value, place, node.spread.high is None, -1.0)
        high = self._limit(full, node.spread.high or node.spread.low, value, place, node.spread.high is None, 1.0)
        if not low <= value.value <= high and full not in self.scope.overrides:
            cure = "Write it from the lower to the upper limit, as in `tolerance -10 % .. +10 %`."
            self.scope.wrong(f"the value of {full} does not lie within its tolerance", cure, span_of(node.spread.low))
        return LetValue(full, value, low, high, node.spread.distribution or "uniform", node.label)

    def _limit(
        self, full: str, expression: Expression, value: Quantity, place: Place, both: bool, sign: float
    ) -> float:
        """A limit of a tolerance: a share of the value, or in the value's own unit; without what its last bit owes to
        how it was worked out, so that 4700 uF less 20 % are 3.76 mF."""
        limit = self.scope.quantity(expression, place)
        share = limit.dimension == NONE and (value.dimension != NONE or _in_percent(expression))
        if not share and limit.dimension != value.dimension:
            due = unit_of(value.dimension)
            cure = f"Give it in % or in {due}." if due else "Give it in %, or as a number."
            self.scope.wrong(f"the tolerance of {full} is in another unit than its value", cure, span_of(expression))
            raise Poisoned
        if share:
            found = value.value + (sign if both else 1.0) * limit.value * abs(value.value)
        else:
            found = value.value + sign * limit.value if both else limit.value
        return float(f"{found:.15g}")

    def _observes(self, flat: Flat, measures: Measures) -> dict[str, Observed]:
        found = {}
        for node, place in flat.observes:
            try:
                full = place.space.prefix + self.scope.local(node.name, place)
                entry = self.scope.entries.get(full)
                if entry is None or entry.node is not node:
                    continue
                signal = measures.observe(entry)
            except Poisoned:
                continue
            found[full] = Observed(full, signal.expression, unit_of(signal.dimension), node.label)
        return found


def _in_percent(expression: Expression) -> bool:
    """Whether a limit of a number without a unit is written as a share: `%` somewhere in it."""
    operand = getattr(expression, "operand", expression)
    return getattr(operand, "unit", "") == "%"
