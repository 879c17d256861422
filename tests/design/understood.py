"""Descriptions understood in one call, for the tests of this room."""

from __future__ import annotations

from grammar.mistakes import Mistake
from simcore.design.circuit import Circuit
from simcore.design.elaborate import elaborate
from simcore.design.files import Project, load_text

BASE = """a -> b: source e, sine = 12 V rms, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> b: capacitor C1, 1000 uF
p -> b: resistor R1, 100 Ohm
reference b
study s: settled
"""
"""A sound circuit that statements under test are added to."""


def understood(text: str) -> tuple[Project, Circuit, list[Mistake]]:
    """The design, its circuit and all that is wrong with it."""
    project, mistakes = load_text(text, "design.rect")
    circuit, more = elaborate(project)
    return project, circuit, mistakes + more


def circuit_of(text: str) -> Circuit:
    """The circuit of a text without mistakes."""
    _, circuit, mistakes = understood(text)
    assert not mistakes, mistakes
    return circuit


def whats(text: str) -> list[str]:
    """What is wrong with a text, in the order of the places, without cures."""
    found = understood(text)[2]
    assert all(mistake.cure for mistake in found)
    return [mistake.what for mistake in sorted(found, key=lambda each: each.span.start if each.span else -1)]
