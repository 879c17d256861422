"""What an element has to stand: the figures its ratings are held against, and what else a bill of ratings shows.

A new kind has the usual ones of its ratings, and a line here only where it has others. Limits and verdicts are not
known here.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from grammar.quantities import AMPERE, I2T
from simcore.components import KINDS
from simcore.design.circuit import Circuit, Element, Requirement
from simcore.design.graph import port_name
from simcore.design.study_kinds import Nature
from simcore.figures import element_figures, measure
from simcore.figures.figure import Figure
from simcore.figures.record import Record
from simcore.figures.signal import Signal
from simcore.figures.weighted import weighted_ripple, weighted_surge

SURGE = 10e-3
"""s: the length that a surge's i2t is stated for (half a sine of 50 Hz; IEC 60747-2, from memory)."""

MOST_PERIODS = 20
"""Whose harmonics are taken for a ripple."""


@dataclass(frozen=True)
class Stress:
    """Something that an element has to stand.

    title: what it is called; compute: the figure, of one diode of an array
    rating: the key of the rating it is held against, "" where a data sheet gives none
    ports: whether each winding or phase has its own
    lasting: whether it is about what goes on for minutes, and not about an instant
    """

    title: str
    compute: Callable[[Record, Element, str], Figure]
    rating: str = ""
    ports: bool = False
    lasting: bool = False

    def of(self, record: Record, element: Element, name: str) -> Figure:
        """The figure of an element, or of one of its windings or phases."""
        return record.granted(self.compute(record, element, name))


def _array(element: Element, key: str) -> float:
    """How many diodes of an array share a voltage or current."""
    return float(element.given.get(key) or 1.0)


def _divided(figure: Figure, shares: float) -> Figure:
    """What one of several equal parts has of a figure; they are taken to share evenly."""
    return replace(figure, value=figure.value / shares, scale=figure.scale / shares)


def _from_zero(figure: Figure) -> Figure:
    """What is never on the side that counts is no stress."""
    return replace(figure, value=0.0, scale=abs(figure.value)) if figure.value < 0.0 else figure


def _reverse_voltage(record: Record, element: Element, name: str) -> Figure:
    return _from_zero(_divided(element_figures.reverse_peak(record, name), _array(element, "in_series")))


def _of_current(figure: Callable[[Signal], Figure]) -> Callable[[Record, Element, str], Figure]:
    def compute(record: Record, element: Element, name: str) -> Figure:
        found = figure(record.window(record.current(name)))
        return _divided(found, _array(element, "in_parallel"))

    return compute


def _highest(current: Signal) -> Figure:
    return _from_zero(Figure(current.highest(), AMPERE, scale=current.largest_magnitude()))


def _forward_mean(current: Signal) -> Figure:
    return _from_zero(measure.mean(current))


def _ripple_current(record: Record, element: Element, name: str) -> Figure:
    """Rms value about the mean, weighed by frequency where factors are given and periods are judged, and not so many
    that their harmonics would take longer than the solution; else the least factor counts."""
    current = record.window(record.current(name))
    scale = measure.rms(current).value
    factors = element.given.get("frequency_factors")
    if factors is None:
        return replace(measure.rms(current - measure.mean(current).value), scale=scale)
    study, frequency = record.solution.study, None
    span = record.whole_periods() if study.kind != "transient" or study.last is not None else None
    if span is not None and (span[1] - span[0]) * record.frequency < MOST_PERIODS + 0.5:
        current, frequency = record.cut(record.current(name), *span), record.frequency
    at = element.given["rated_ripple_current"][1]
    return Figure(weighted_ripple(current, frequency, factors, at), AMPERE, scale=scale)


def _surge(record: Record, element: Element, name: str) -> Figure:
    """The highest forward current, of one diode of those in parallel; weighed by the width and number of its half
    cycles where the rating says of what width it is."""
    current = record.window(record.current(name))
    rated, width = element.given.get("rated_surge_current") or (0.0, None)
    plain = _highest(current)
    if width is not None:
        cycles, shares = element.given.get("surge_half_cycles") or (), _array(element, "in_parallel")
        repeats = record.solution.study.nature is Nature.PERIOD
        weighed = weighted_surge(current, width, rated * shares, [(n, crest * shares) for n, crest in cycles], repeats)
        plain = replace(plain, value=weighed, scale=max(plain.scale, weighed))
    return _divided(plain, _array(element, "in_parallel"))


def _surge_i2t(record: Record, element: Element, name: str) -> Figure:
    current = record.window(record.current(name))
    repeats = record.solution.study.nature is Nature.PERIOD
    value = measure.largest_i2t(current, SURGE, repeats) / _array(element, "in_parallel") ** 2
    return Figure(value, I2T)


def _largest_voltage(record: Record, element: Element, name: str) -> Figure:
    return measure.peak(record.window(record.voltage(name)))


def _of_name(figure: Callable[[Record, str], Figure]) -> Callable[[Record, Element, str], Figure]:
    return lambda record, element, name: figure(record, name)


def _transformer_power(record: Record, element: Element, name: str) -> Figure:
    """The larger of the first winding's apparent power and the sum of the others': what the core has to be made for."""
    each = [element_figures.apparent_power(record, port_name(element, port)) for port in element.ports]
    first, others = each[0], each[1:]
    total = Figure(sum(figure.value for figure in others), first.dimension)
    return max(first, total, key=lambda figure: figure.value)


_RMS = Stress("rms current", _of_current(measure.rms), "rated_current", lasting=True)
_PEAK_VOLTAGE = Stress("peak voltage", _largest_voltage)
_JUNCTION = (
    Stress("reverse peak", _reverse_voltage, "rated_reverse_voltage"),
    Stress("mean current", _of_current(_forward_mean), "rated_mean_current", lasting=True),
    Stress("surge current", _surge, "rated_surge_current"),
    Stress("i2t of 10 ms", _surge_i2t, "rated_i2t"),
    Stress("junction temperature", _of_name(element_figures.junction_temperature), "rated_junction_temperature"),
    replace(_RMS, rating=""),
    Stress("dissipation", _of_name(element_figures.mean_power), lasting=True),
)
_DELIVERED = (
    replace(_RMS, rating="", ports=True),
    Stress("apparent power", _of_name(element_figures.apparent_power), lasting=True),
)

STRESSES: dict[str, tuple[Stress, ...]] = {
    "source": _DELIVERED,
    "three_phase": _DELIVERED,
    "resistor": (
        Stress("dissipation", _of_name(element_figures.mean_power), "rated_power", lasting=True),
        _PEAK_VOLTAGE,
    ),
    "capacitor": (
        replace(_PEAK_VOLTAGE, rating="rated_voltage"),
        Stress("ripple current", _ripple_current, "rated_ripple_current", lasting=True),
        Stress("core temperature", _of_name(element_figures.core_temperature), "rated_temperature"),
    ),
    "inductor": (_RMS, Stress("peak current", _of_current(measure.peak))),
    "transformer": (
        Stress("apparent power", _transformer_power, "rated_power", lasting=True),
        replace(_RMS, rating="", ports=True),
    ),
    "diode": _JUNCTION,
    "thyristor": _JUNCTION,
    "load": (Stress("mean power", _of_name(element_figures.mean_power), lasting=True), _PEAK_VOLTAGE),
}
"""Kind -> what its elements have to stand, those with a rating first, where that is not what any kind has to."""
_USUAL = (_RMS, Stress("energy", _of_name(element_figures.energy), "rated_energy"))


def stresses_of(kind: str) -> tuple[Stress, ...]:
    """What elements of a kind have to stand: its own, or for each rating the usual one; current and voltage anyway."""
    if kind in STRESSES:
        return STRESSES[kind]
    ratings = {key.name for key in KINDS[kind].keys if key.rating}
    rated = [stress for stress in _USUAL if stress.rating in ratings]
    return (*rated, *(() if _RMS in rated else (replace(_RMS, rating=""),)), _PEAK_VOLTAGE)


def stress_names(element: Element, stress: Stress) -> list[str]:
    """The names a stress is looked at under: the element's, or those of its windings or phases."""
    return [port_name(element, port) for port in element.ports] if stress.ports else [element.name]


def rated_elements(circuit: Circuit, requirement: Requirement) -> list[Element]:
    """The elements that a requirement on ratings is about; a winding or phase stands for the whole."""
    if not requirement.elements:
        return list(circuit.elements.values())
    owners = [name if name in circuit.elements else name.rpartition(".")[0] for name in requirement.elements]
    return [circuit.elements[name] for name in dict.fromkeys(owners)]


def rated_stresses(element: Element) -> Iterator[tuple[Stress, float, float | None]]:
    """Each rating that an element was given: its stress, its value in SI units and what stands behind its @, if any."""
    for stress in stresses_of(element.kind):
        given = element.given.get(stress.rating) if stress.rating else None
        if given is not None:
            value, at = given if isinstance(given, tuple) else (given, None)
            yield stress, value, at
