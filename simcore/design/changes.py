"""A circuit under the actions of a study: lets set, elements opened, shorted and put back.

It knows circuits and actions, and nothing of studies or time.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from grammar.description import Expression
from grammar.mistakes import DescriptionError
from grammar.quantities import Quantity
from simcore.design.circuit import Change, Circuit, Element, Port
from simcore.design.elaborate import elaborate
from simcore.design.files import Project

SHORT = 1e-3
"""Resistance in ohm that stands in the place of a shorted element."""


class Variants:
    """The circuits of one design under changes, each made once.

    project, circuit: the design, and the circuit elaborated from it with the overrides
    """

    def __init__(
        self, project: Project, circuit: Circuit, overrides: Mapping[str, Quantity | Expression | str] | None = None
    ):
        self.project = project
        self.circuit = circuit
        self.overrides = dict(overrides or {})
        self._set: dict[tuple[tuple[str, Quantity | str], ...], Circuit] = {}
        self._made: dict[tuple[Change, ...], Circuit] = {}

    def __call__(self, changes: Sequence[Change]) -> Circuit:
        """The circuit after changes, in their order: the last one of a target holds.

        The same changes give the same object. Raises DescriptionError where a set value makes the design wrong, such as
        a count below zero.
        """
        key = tuple(changes)
        if key not in self._made:
            self._made[key] = self._changed(key)
        return self._made[key]

    def _changed(self, changes: Sequence[Change]) -> Circuit:
        values: dict[str, Quantity | str] = {}
        states: dict[str, str] = {}
        for change in changes:
            if change.verb == "set":
                assert change.value is not None
                values[change.target] = change.value
            else:
                states.pop(change.target, None)
                states[change.target] = change.verb
        circuit = self._with_values(values)
        for target, verb in states.items():
            circuit = _changed(circuit, target, verb)
        return circuit

    def _with_values(self, values: Mapping[str, Quantity | str]) -> Circuit:
        if not values:
            return self.circuit
        key = tuple(sorted(values.items(), key=lambda pair: pair[0]))
        if key not in self._set:
            found, mistakes = elaborate(self.project, {**self.overrides, **values}, again=True)
            if mistakes:
                raise DescriptionError(mistakes)
            base = self.circuit
            self._set[key] = replace(found, studies=base.studies, requirements=base.requirements, sweeps=base.sweeps)
        return self._set[key]


SWITCHING = ("opens_at", "closes_at", "control", "closes_above", "opens_below", "delay")
"""What a study's open or close overrules on a switch."""


def _changed(circuit: Circuit, target: str, verb: str) -> Circuit:
    """The circuit with an element, winding or phase opened or shorted. What is closed is as described."""
    elements = dict(circuit.elements)
    name, _, port_name = target.rpartition(".")
    whole = elements.get(target)
    if whole is not None:
        elements[target] = _state(whole, verb)
        if verb == "open" and whole.kind != "switch":
            del elements[target]
        if verb == "short" and len(whole.ports) > 1:
            del elements[target]
            elements.update({f"{target}.{port.name}": _bridge(f"{target}.{port.name}", port) for port in whole.ports})
    elif name in elements and verb != "close":
        element = elements[name]
        port = next((port for port in element.ports if port.name == port_name), None)
        if port is not None:
            if verb == "open" or element.kind == "three_phase":
                elements[name] = replace(element, ports=tuple(each for each in element.ports if each is not port))
            if verb == "short":
                elements[target] = _bridge(target, port)
    return replace(circuit, elements={key: element for key, element in elements.items() if element.ports})


def _state(element: Element, verb: str) -> Element:
    """An element in the given state: a switch obeys, a shorted one is a small resistance."""
    if verb == "short":
        return _bridge(element.name, element.ports[0])
    if element.kind != "switch":
        return element
    kept = {key: value for key, value in element.given.items() if key not in SWITCHING}
    return replace(element, given={**kept, "initially": "open" if verb == "open" else "closed"})


def _bridge(name: str, port: Port) -> Element:
    return Element(name, "resistor", (Port("", port.a, port.b),), {"resistance": SHORT})
