"""The signals and figures of the language: names, arguments, dimensions and meanings, declared once.

Checking, help text and the language reference come from this table, and where a figure is worked out. It knows nothing
of solutions or circuits.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from grammar.quantities import AMPERE, ANGLE, I2T, JOULE, KELVIN, NONE, SECOND, VOLT, WATT, Dimension


def _same(signal: Dimension) -> Dimension:
    return signal


def _fixed(dimension: Dimension) -> Callable[[Dimension], Dimension]:
    return lambda signal: dimension


@dataclass(frozen=True)
class Measure:
    """A signal of the circuit, or a figure of a signal or of elements.

    arguments: what each stands for:
        place (a node, `a -> b` or an element), branch (an element, a winding or a phase), element (any element, winding
        or phase), junction (a diode or thyristor), capacitor, fuse, source (a source, a three_phase set or a phase of
        one), signal, level (a value in the signal's unit), count (a whole number from 1 on)
    result: the dimension of the result, from that of the signal (NONE where there is none)
    wants: the dimension that the signal must have, None for any
    optional: with no argument at all it is of the whole circuit
    where: module with the function of its name that works a figure out
    """

    name: str
    arguments: tuple[str, ...]
    result: Callable[[Dimension], Dimension]
    meaning: str
    wants: Dimension | None = None
    optional: bool = False
    where: str = "simcore.figures.element_figures"


def _table(*measures: Measure) -> dict[str, Measure]:
    return {measure.name: measure for measure in measures}


SIGNALS = _table(
    Measure("voltage", ("place",), _fixed(VOLT), "voltage of a node, between two nodes, or across an element"),
    Measure(
        "current", ("branch",), _fixed(AMPERE), "current through an element, from its first terminal to its second"
    ),
    Measure("power", ("element",), _fixed(WATT), "power that an element takes"),
    Measure("temperature", ("element",), _fixed(KELVIN), "temperature at which an element runs"),
    Measure(
        "heat", ("fuse",), _fixed(I2T), "squared current that has added up in a fuse; it melts at its melting_i2t"
    ),
)

FIGURES = _table(
    Measure("mean", ("signal",), _same, "mean value"),
    Measure("rms", ("signal",), _same, "root of the mean square"),
    Measure("peak", ("signal",), _same, "largest magnitude"),
    Measure("valley", ("signal",), _same, "lowest value"),
    Measure("ripple", ("signal",), _same, "highest value minus lowest"),
    Measure("ripple_factor", ("signal",), _fixed(NONE), "rms of the alternating part over the mean"),
    Measure("form_factor", ("signal",), _fixed(NONE), "rms over the magnitude of the mean"),
    Measure("crest_factor", ("signal",), _fixed(NONE), "largest magnitude over rms"),
    Measure("harmonic", ("signal", "count"), _same, "rms of one harmonic"),
    Measure("distortion", ("signal",), _fixed(NONE), "total harmonic distortion"),
    Measure("i2t", ("signal or branch",), _fixed(I2T), "time integral of the squared current", wants=AMPERE),
    Measure("time_until_above", ("signal", "level"), _fixed(SECOND), "time to the first rise above a level"),
    Measure("time_until_below", ("signal", "level"), _fixed(SECOND), "time to the first fall below a level"),
    Measure("mean_power", ("element",), _fixed(WATT), "mean power that an element takes"),
    Measure("energy", ("element",), _fixed(JOULE), "energy that an element takes"),
    Measure("apparent_power", ("element",), _fixed(WATT), "rms voltage times rms current"),
    Measure("power_factor", ("element",), _fixed(NONE), "mean power delivered over apparent power"),
    Measure("displacement_factor", ("element",), _fixed(NONE), "cosine of the angle between the fundamentals"),
    Measure("conduction_angle", ("junction",), _fixed(ANGLE), "angle of a period in which a diode conducts"),
    Measure("reverse_peak", ("junction",), _fixed(VOLT), "largest reverse voltage"),
    Measure("junction_temperature", ("junction",), _fixed(KELVIN), "temperature of the junction"),
    Measure("core_temperature", ("capacitor",), _fixed(KELVIN), "temperature of the core"),
    Measure("life", ("capacitor",), _fixed(SECOND), "life to expect, halved by each 10 K of core temperature"),
    Measure("stored_energy", ("element",), _fixed(JOULE), "largest energy stored", optional=True),
    Measure("efficiency", ("source", "element"), _fixed(NONE), "mean power of a load over that of a source"),
    Measure(
        "utilisation", ("element", "element"), _fixed(NONE), "power of a load over the apparent power of a winding"
    ),
)

ABSOLUTE = ("mean", "peak", "valley")
"""Figures of a temperature that are temperatures and no differences of such."""
TEMPERATURES = ("junction_temperature", "core_temperature")
"""Figures that are."""

TABLED = {"harmonics": "current", "discharge": "voltage"}
"""What stands before `within` only, and the signal that it is about: compared with a table of limits, no number of its
own."""


_WORDS = {
    "place": ("a node, a branch or an element", "a -> b"),
    "branch": ("an element, a winding or a phase", "X"),
    "element": ("an element", "X"),
    "junction": ("a diode", "D1"),
    "capacitor": ("a capacitor", "C1"),
    "fuse": ("a fuse", "F1"),
    "source": ("a source", "SOURCE"),
    "signal": ("a signal", "x"),
    "signal or branch": ("a current or an element", "X"),
    "level": ("a level", "level"),
    "count": ("the order of a harmonic", "n"),
}


def form_of(measure: Measure) -> str:
    """What a measure takes, in words."""
    return " and ".join(_WORDS[argument][0] for argument in measure.arguments)


def example_of(measure: Measure) -> str:
    """What may stand between its parentheses."""
    return ", ".join(_WORDS[argument][1] for argument in measure.arguments)
