"""What the pictures of a study show, before anyone draws: curves by unit, conduction, harmonics beside their limits.

Knows solved studies and scales; draws nothing.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from grammar.quantities import AMPERE, JOULE, KELVIN, NONE, OHM, PREFIXES, SECOND, VOLT, WATT, Dimension, unit_of
from simcore.design.limits import LimitTable
from simcore.design.overview import sentence
from simcore.design.study_kinds import Nature
from simcore.figures import measure
from simcore.figures.overview import VALVES, Row
from simcore.figures.polynomials import Array
from simcore.figures.record import Record
from simcore.figures.signal import Signal
from simcore.judge.harmonics import Harmonic, harmonics, tabled_element, unfit
from simcore.proof import Proof, ProvedStudy
from simcore.report.traces import heading, recorded, traces
from simcore.report.words import row_value

QUANTITIES = {
    VOLT: "voltage",
    AMPERE: "current",
    WATT: "power",
    KELVIN: "temperature",
    JOULE: "energy",
    OHM: "resistance",
    NONE: "value",
}
MOST_POINTS = 1500
"""Of a curve, so that a picture stays small; extremes are kept."""
PARTS = 4
"""Of each stretch between two points of a curve that has few."""
MOST_CURVES = 6
"""In one panel."""
MOST_NOTED = 2
"""Curves of a panel whose figures are marked: more would be a muddle."""
NOTED = ("mean", "rms", "peak", "valley", "ripple")
MOST_SPANS = 200
"""Of a diode: where it conducts more often, no picture could show when."""


@dataclass(frozen=True)
class Noted:
    """The figures of a judged curve in its panel's units: the mean, the points of its largest magnitude and of its
    lowest value as (time, value), and all in words."""

    mean: float
    points: Sequence[tuple[float, float]]
    words: Sequence[str]


@dataclass(frozen=True)
class Curve:
    """A line: times and values in the panel's units, shape (n,) each; noted: where its figures are marked."""

    label: str
    times: Array
    values: Array
    noted: Noted | None = None


@dataclass(frozen=True)
class Panel:
    """Curves over one axis; title: quantity and unit, as the axis says them."""

    title: str
    curves: Sequence[Curve]


@dataclass(frozen=True)
class Picture:
    """The traces of a study over time.

    time_title: as the axis says it; span: start and end; judged: the same of the judged part, None where it is all
    conduction: diode -> spans in which it conducts, shape (m, 2); all times in the unit of the axis
    """

    title: str
    time_title: str
    span: tuple[float, float]
    judged: tuple[float, float] | None
    panels: Sequence[Panel]
    conduction: dict[str, Array]


@dataclass(frozen=True)
class Bars:
    """Harmonics beside their limits, A rms."""

    title: str
    rows: Sequence[Harmonic]


def picture_of(name: str, study: ProvedStudy) -> Picture | None:
    """The traces of a study; None for one without a course, such as an operating point."""
    record = study.record
    if study.study.nature is Nature.REST:
        return None
    prefix = prefix_of(float(record.times[-1] - record.times[0]))
    scale = 1.0 / PREFIXES[prefix]
    start, end = float(record.times[0]) * scale, float(record.times[-1]) * scale
    window = tuple(each * scale for each in record.solution.window)
    whole = abs(window[1] - window[0] - (end - start)) <= 1e-9 * (end - start)
    periodic = study.study.nature is Nature.PERIOD or not whole
    rows = {row.name: row for row in study.signals} if periodic else {}
    return Picture(
        f"{name}: {sentence(study.study)}",
        f"time in {prefix}s",
        (start, end),
        None if whole else (window[0], window[1]),
        _panels(record, scale, rows, (window[0], window[1])),
        {element: spans * scale for element, spans in _conduction(record).items()},
    )


def _panels(record: Record, scale: float, rows: Mapping[str, Row], window: tuple[float, float]) -> list[Panel]:
    """One panel a unit, split where it would hold too many curves. rows: figures to mark, where curves are few."""
    by_unit: dict[Dimension, list[str]] = {}
    signals = recorded(record)
    for name, signal in signals.items():
        by_unit.setdefault(signal.dimension, []).append(name)
    found = []
    for dimension, names in by_unit.items():
        for first in range(0, len(names), MOST_CURVES):
            chosen = {name: signals[name] for name in names[first : first + MOST_CURVES]}
            sampled = traces(chosen)
            columns = {name: sampled.columns[heading(name, dimension)] for name in chosen}
            prefix = prefix_of(max(float(np.abs(column).max()) for column in columns.values()), dimension)
            unit = prefix + unit_of(dimension)
            curves = []
            for name, column in columns.items():
                times, values = _smooth(sampled.times, column, chosen[name])
                times, values = times * scale, values / PREFIXES[prefix]
                row = rows.get(name) if len(columns) <= MOST_NOTED else None
                noted = None if row is None else _noted(row, times, values, window, 1.0 / PREFIXES[prefix])
                curves.append(Curve(name, *_thinned(times, values), noted))
            title = QUANTITIES.get(dimension, "value") + (f" in {unit}" if unit else "")
            found.append(Panel(title, curves))
    return found


def _noted(row: Row, times: Array, values: Array, window: tuple[float, float], factor: float) -> Noted:
    """The figures of a row where the curve has them: values are those of the figures, instants the nearest sample's."""
    inside = (times >= window[0]) & (times <= window[1])
    highest = np.flatnonzero(inside)[int(np.abs(values[inside]).argmax())]
    lowest = np.flatnonzero(inside)[int(values[inside].argmin())]
    figures = row.figures
    peak = math.copysign(figures["peak"].value * factor, values[highest])
    points = [(float(times[highest]), peak), (float(times[lowest]), figures["valley"].value * factor)]
    texts = [f"{column} {row_value(row, column)}" for column in NOTED]
    return Noted(figures["mean"].value * factor, points, texts)


def prefix_of(size: float, dimension: Dimension = SECOND) -> str:
    """The prefix that brings a size to 1 to 999; of plain numbers, temperatures and units made of several, none."""
    if not size > 0.0 or dimension in (NONE, KELVIN) or not unit_of(dimension).isalpha():
        return ""
    fitting = [name for name, factor in PREFIXES.items() if size >= factor and (factor <= 1.0 or dimension != SECOND)]
    return fitting[-1] if fitting else "f"


def _smooth(times: Array, values: Array, signal: Signal) -> tuple[Array, Array]:
    """A curve of few points with more between them, since a solution bends between its steps; straight where a step has
    a kink inside, and where it jumps."""
    if len(times) > MOST_POINTS // PARTS:
        return times, values
    shares = np.arange(PARTS) / PARTS
    widths, rises = np.diff(times)[:, None], np.diff(values)[:, None]
    fine, straight = times[:-1, None] + widths * shares, values[:-1, None] + rises * shares
    bent = np.where(widths > 0.0, signal.value(fine.ravel()).reshape(fine.shape), straight)
    for start, end in signal.rough:
        bent = np.where((fine >= start) & (fine <= end), straight, bent)
    bent[:, 0] = values[:-1]
    return np.append(fine.ravel(), times[-1]), np.append(bent.ravel(), values[-1])


def _thinned(times: Array, values: Array) -> tuple[Array, Array]:
    """At most about MOST_POINTS of a curve: of each stretch the first, the lowest, the highest and the last point."""
    if len(times) <= MOST_POINTS:
        return times, values
    edges = np.linspace(times[0], times[-1], MOST_POINTS // 4 + 1)
    starts = np.unique(np.searchsorted(times, edges[:-1]))
    keep: dict[int, None] = {}
    for first, last in zip(starts, [*starts[1:], len(times)], strict=True):
        part = values[first:last]
        for place in sorted({0, int(part.argmin()), int(part.argmax()), len(part) - 1}):
            keep[int(first) + place] = None
    chosen = np.fromiter(keep, dtype=np.int64)
    return times[chosen], values[chosen]


def _conduction(record: Record) -> dict[str, Array]:
    """When each diode conducts, by the measure that its conduction angle is taken with; empty where none ever does,
    or too often to be seen."""
    found = {}
    for element in record.circuit.elements.values():
        if element.kind in VALVES:
            current = record.current(element.name)
            peak = current.highest()
            found[element.name] = (
                current.spans_above(measure.CONDUCTING * peak) if peak > 0.0 else np.zeros((0, 2), dtype=np.float64)
            )
    most = max((len(spans) for spans in found.values()), default=0)
    return found if 0 < most <= MOST_SPANS else {}


def any_conducts(conduction: dict[str, Array]) -> list[tuple[float, float]]:
    """The spans in which one diode at least conducts, joined where they meet."""
    joined: list[tuple[float, float]] = []
    for start, end in sorted((float(a), float(b)) for spans in conduction.values() for a, b in spans):
        if joined and start <= joined[-1][1]:
            joined[-1] = (joined[-1][0], max(joined[-1][1], end))
        else:
            joined.append((start, end))
    return joined


def shades(picture: Picture) -> list[tuple[float, float]]:
    """The spans to shade, in which some diode conducts: none where one always does, since shade would then say
    nothing."""
    joined, (first, last) = any_conducts(picture.conduction), picture.span
    edge = 1e-6 * (last - first)
    always = len(joined) == 1 and joined[0][0] <= first + edge and joined[0][1] >= last - edge
    return [] if always else joined


def bars_of(proof: Proof) -> list[Bars]:
    """Each requirement on harmonics that can be judged, with every order."""
    found = []
    for verdict in proof.verdicts:
        requirement = verdict.requirement
        table = requirement.limits
        if not isinstance(table, LimitTable) or requirement.study not in proof.studies:
            continue
        name, fine = tabled_element(requirement), proof.studies[requirement.study].record
        if not unfit(name, table, fine):
            rows = harmonics(name, table, proof.coarse[requirement.study], fine)
            found.append(Bars(f"{requirement.study}: harmonics of {name} and limits of {table.name}", rows))
    return found


def ticks(low: float, high: float, count: int = 5) -> list[float]:
    """About `count` round values between two others, for an axis."""
    raw = (high - low) / max(count, 1)
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(power * factor for factor in (1.0, 2.0, 2.5, 5.0, 10.0) if power * factor >= raw * (1.0 - 1e-9))
    first = math.ceil(low / step - 1e-9)
    return [step * place for place in range(first, math.floor(high / step + 1e-9) + 1)]


def decades(rows: Sequence[Harmonic]) -> tuple[int, int]:
    """The powers of ten, lowest and highest, of a logarithmic axis for bars; what is smaller is cut off."""
    largest = max(max(row.figure.value, row.limit.value) for row in rows)
    smallest = min(row.limit.value for row in rows)
    return math.floor(math.log10(smallest)) - 1, math.ceil(math.log10(1.2 * largest))
