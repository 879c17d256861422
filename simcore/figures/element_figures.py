"""The figures of the catalogue, each under its name there.

Each takes a record and the arguments that the catalogue declares: an element or part of one by its name, a signal as it
runs over the whole study, a level as a number in the signal's SI unit, a count as a whole number; and judges the window
that its meaning asks for. The language is not known here.
"""

from __future__ import annotations

from collections.abc import Callable

from grammar.quantities import ANGLE, JOULE, KELVIN, NONE, SECOND, WATT, Dimension
from simcore.design.study_kinds import Nature
from simcore.figures import measure, stored
from simcore.figures.figure import Figure, undefined
from simcore.figures.record import Part, Record
from simcore.figures.signal import Signal

_HALVES = 10.0
"""K by which a capacitor's life is halved."""


def of_window(figure: Callable[[Signal], Figure]) -> Callable[[Record, Signal], Figure]:
    """A figure of a signal over the judged window."""
    return lambda record, signal: figure(record.window(signal))


mean = of_window(measure.mean)
rms = of_window(measure.rms)
peak = of_window(measure.peak)
valley = of_window(measure.valley)
ripple = of_window(measure.ripple)
ripple_factor = of_window(measure.ripple_factor)
form_factor = of_window(measure.form_factor)
crest_factor = of_window(measure.crest_factor)
i2t = of_window(measure.i2t)


def mean_power(record: Record, name: str) -> Figure:
    """Mean of the power that an element takes, W; negative for one that delivers."""
    return measure.mean(record.window(record.power(name)))


def energy(record: Record, name: str) -> Figure:
    """Energy that an element takes in the window, J."""
    return measure.energy(record.window(record.power(name)))


def apparent_power(record: Record, name: str) -> Figure:
    """Rms voltage times rms current, added up over phases or windings (arithmetic apparent power), VA.

    Source: IEEE 1459-2010, arithmetic apparent power, for three phases; common practice for windings.
    """
    return Figure(sum(_port_apparent(record, record.part(name))), WATT)


def _port_apparent(record: Record, part: Part) -> list[float]:
    pairs = [_port_signals(record, part, index) for index in range(len(part.ports))]
    return [measure.rms(voltage).value * measure.rms(current).value for voltage, current in pairs]


def _port_signals(record: Record, part: Part, index: int) -> tuple[Signal, Signal]:
    port = part.ports[index]
    voltage, current = record.between(port.a, port.b), record.port_current(part.element, port)
    return record.window(voltage), record.window(current)


def power_factor(record: Record, name: str) -> Figure:
    """Mean power over apparent power, of a source what it delivers; no unit."""
    apparent = apparent_power(record, name)
    if apparent.value == 0.0:
        return undefined(NONE, f"{name} has no apparent power")
    taken = mean_power(record, name).value
    value = (-taken if record.part(name).delivers else taken) / apparent.value
    return Figure(value, NONE, scale=1.0)


def displacement_factor(record: Record, name: str) -> Figure:
    """Mean power of the fundamentals over their apparent power: the cosine of their angle; no unit.

    Of a source it counts what that delivers; of several phases or windings both powers are added up.
    """
    span = record.whole_periods()
    if span is None:
        return undefined(NONE, _no_period(record))
    part = record.part(name)
    power, apparent, total = 0.0, 0.0, 0.0
    for port in part.ports:
        voltage = record.cut(record.between(port.a, port.b), *span)
        current = record.cut(record.port_current(part.element, port), *span)
        first, second = (measure.phasor(signal, record.frequency) for signal in (voltage, current))
        power += (first * second.conjugate()).real
        apparent += abs(first) * abs(second)
        total += 2.0 * measure.rms(voltage).value * measure.rms(current).value
    if apparent <= measure.NEGLIGIBLE * total:
        return undefined(NONE, f"{name} has no fundamental of voltage and current")
    return Figure((-power if part.delivers else power) / apparent, NONE, scale=1.0)


def conduction_angle(record: Record, name: str) -> Figure:
    """Angle of a period in which a diode conducts, rad; see measure.conduction_angle."""
    return _periodic(record, record.current(name), ANGLE, measure.conduction_angle)


def reverse_peak(record: Record, name: str) -> Figure:
    """Largest voltage of b against a, V; negative where it never is reversed."""
    voltage = record.window(record.voltage(name))
    return Figure(-voltage.lowest(), voltage.dimension, scale=voltage.largest_magnitude())


def junction_temperature(record: Record, name: str) -> Figure:
    """Temperature at which the element runs, K."""
    return Figure(record.temperature(name).highest(), KELVIN)


def core_temperature(record: Record, name: str) -> Figure:
    """Temperature of a capacitor's core, K."""
    return Figure(record.temperature(name).highest(), KELVIN)


def life(record: Record, name: str) -> Figure:
    """Life to expect of a capacitor, s: L = L_0 2^((T_0 - T) / 10 K), T its core's temperature, L_0 its endurance at a
    core of T_0 (common practice, no source); of what settles, as a transient says nothing of years.
    """
    element = record.part(name).element
    if element.given.get("temperature") is None and record.solution.study.nature is Nature.COURSE:
        return undefined(SECOND, f"a transient says nothing of how hot {name} gets in the long run")
    endurance, at = element.given["endurance"]
    return Figure(endurance * 2.0 ** ((at - core_temperature(record, name).value) / _HALVES), SECOND)


def stored_energy(record: Record, name: str | None = None) -> Figure:
    """Largest energy in the fields of an element, or of the whole circuit without a name, in the window, J."""
    if name is None:
        signal = stored.total_stored_energy(record)
    else:
        signal = stored.stored_energy(record, record.part(name).element.name)
    return Figure(record.window(signal).highest(), JOULE)


def efficiency(record: Record, source: str, load: str) -> Figure:
    """Mean power that a load takes over the mean power that a source delivers; no unit."""
    delivered = -mean_power(record, source)
    if delivered.value <= measure.NEGLIGIBLE * apparent_power(record, source).value:
        return undefined(NONE, f"{source} delivers no power")
    return mean_power(record, load) / delivered


def utilisation(record: Record, winding: str, load: str) -> Figure:
    """Mean power of a load over the apparent power of a winding (of several, their sum); no unit."""
    apparent = apparent_power(record, winding)
    if apparent.value == 0.0:
        return undefined(NONE, f"{winding} has no apparent power")
    return mean_power(record, load) / apparent


def harmonic(record: Record, signal: Signal, order: int) -> Figure:
    """Rms value of one harmonic over the whole periods that end with the window."""
    return _periodic(record, signal, signal.dimension, lambda cut, frequency: measure.harmonic(cut, order, frequency))


def distortion(record: Record, signal: Signal) -> Figure:
    """Total harmonic distortion over the whole periods that end with the window."""
    return _periodic(record, signal, NONE, measure.distortion)


def _periodic(
    record: Record, signal: Signal, dimension: Dimension, figure: Callable[[Signal, float], Figure]
) -> Figure:
    span = record.whole_periods()
    if span is None:
        return undefined(dimension, _no_period(record))
    return figure(record.cut(signal, *span), record.frequency)


def _no_period(record: Record) -> str:
    if record.solution.period is None:
        return "the study has no period"
    return "the judged window is shorter than a period"


def time_until_above(record: Record, signal: Signal, level: float) -> Figure:
    """Time from the first event of the study, or its start, to the first rise above a level, s."""
    return _time_until(record, signal, level, below=False)


def time_until_below(record: Record, signal: Signal, level: float) -> Figure:
    """Time from the first event of the study, or its start, to the first fall below a level, s."""
    return _time_until(record, signal, level, below=True)


def _time_until(record: Record, signal: Signal, level: float, below: bool) -> Figure:
    begin = record.begin()
    if not signal.start <= begin < signal.end:
        return undefined(SECOND, "the first event is not within the study")
    return measure.time_until(signal, level, begin, below)
