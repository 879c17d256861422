"""A circuit's elements put into a frame, each by its own kind."""

from __future__ import annotations

from simcore.components import KINDS
from simcore.components.frame import Frame
from simcore.components.part import Part
from simcore.design.circuit import Circuit


def build_frame(circuit: Circuit, moment: float = 0.0) -> Frame:
    """The equations of all elements as they hold from a moment of a study (s)."""
    frame = Frame(moment)
    for element in circuit.elements.values():
        kind = KINDS[element.kind]
        kind.build(frame, Part(element, kind, frame, circuit.ambient))
    return frame


def instants(circuit: Circuit) -> list[float]:
    """Times in s, sorted, at which elements change by themselves."""
    found: dict[float, None] = {}
    for element in circuit.elements.values():
        times = KINDS[element.kind].instants
        if times is not None:
            found.update(dict.fromkeys(times(element.given)))
    return sorted(found)
