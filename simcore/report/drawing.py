"""Pictures drawn with matplotlib: for printing and for slides, as PNG or SVG.

Knows panels and bars, and no studies. It is the only module that needs the extra `view`.
"""

from __future__ import annotations

import io
import math
from collections.abc import Sequence

import matplotlib
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Polygon
from matplotlib.ticker import FuncFormatter, LogLocator, MaxNLocator, NullLocator

from simcore.figures.polynomials import Array
from simcore.judge.outcome import State
from simcore.report.diagram import FAINT, Diagram
from simcore.report.panels import Bars, Curve, Panel, Picture, decades, shades
from simcore.report.svg import COLOURS, DASHES, INK, LIMIT, SHADE, label_lines, number, placed, value_range
from simcore.report.sweep_panels import SweepPanel, SweepPicture

WIDTH, PANEL, STRIP, EDGES = 8.0, 2.2, 0.16, 1.1
"""In inches: of the picture, the height of a panel and of a diode's strip, and what titles and axes need."""
DOTS = 150
DOTS_AN_INCH = 100.0
"""Of a diagram's own."""
MOST_STRIPS = 12
LABEL_POINTS = 11.0

_STYLE = {
    "font.size": 9.0,
    "font.family": "sans-serif",
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "text.color": INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "text.parse_math": False,
    "svg.hashsalt": "bulkrail",
    "svg.fonttype": "none",
}


def picture_bytes(picture: Picture, form: str) -> bytes:
    """The traces of a study as a picture file; form: "png" or "svg"."""
    strips = list(picture.conduction.items()) if len(picture.conduction) <= MOST_STRIPS else []
    heights = [PANEL] * len(picture.panels) + ([STRIP * len(strips)] if strips else [])
    with matplotlib.rc_context(_STYLE):
        figure = Figure(figsize=(WIDTH, sum(heights) + EDGES), layout="constrained")
        axes = figure.subplots(len(heights), 1, sharex=True, squeeze=False, height_ratios=heights)[:, 0]
        axes[0].set_title(picture.title, loc="left", fontsize=9.0)
        for panel, place in zip(picture.panels, axes, strict=False):
            _panel(place, panel, picture)
        if strips:
            _strips(axes[-1], strips)
        axes[-1].set_xlim(*picture.span)
        axes[-1].set_xlabel(picture.time_title)
        return _saved(figure, form)


def _panel(axes: Axes, panel: Panel, picture: Picture) -> None:
    low, high = value_range(panel.curves)
    axes.set_ylim(low, high)
    axes.set_ylabel(panel.title)
    axes.grid(axis="y", color="#dddddd", linewidth=0.6)
    axes.set_axisbelow(True)
    for start, end in shades(picture):
        axes.axvspan(start, end, color=SHADE, zorder=0.0, linewidth=0.0)
    if picture.judged is not None:
        for time in picture.judged:
            axes.axvline(time, color=INK, linewidth=0.8, linestyle=":")
        axes.annotate("judged", (picture.judged[0], high), (3, -9), textcoords="offset points", fontsize=8.0)
    for at, (curve, colour) in enumerate(zip(panel.curves, COLOURS, strict=False)):
        axes.plot(curve.times, curve.values, color=colour, linewidth=1.2, linestyle=_dashed(at))
        _noted(axes, curve, colour, picture.judged or picture.span)
    points = PANEL * 72.0 / (high - low)
    sizes = [LABEL_POINTS * label_lines(curve) for curve in panel.curves]
    span = (-high * points, -low * points)
    heights = placed([-float(curve.values[-1]) * points for curve in panel.curves], sizes, span)
    sample = 0.05 if len(panel.curves) > 1 else 0.0
    for at, (curve, height) in enumerate(zip(panel.curves, heights, strict=True)):
        colour, y = COLOURS[at], -height / points
        if sample:
            ends, beside = [1.006, 1.0 + sample], axes.get_yaxis_transform()
            axes.plot(ends, [y, y], color=colour, linewidth=1.2, linestyle=_dashed(at), transform=beside, clip_on=False)
        for step, words in enumerate((curve.label, *(curve.noted.words if curve.noted else ()))):
            shift, size = (5.0, -3.0 - step * LABEL_POINTS), (9.0 if step == 0 else 7.5)
            where = (1.0 + sample, y), shift, ("axes fraction", "data"), "offset points"
            axes.annotate(words, *where, color=colour, fontsize=size, annotation_clip=False)


def _dashed(place: int) -> object:
    """The dashes of a panel's curve, as matplotlib has them."""
    return (0.0, tuple(float(part) for part in DASHES[place].split())) if DASHES[place] else "solid"


def _noted(axes: Axes, curve: Curve, colour: str, window: tuple[float, float]) -> None:
    """The mean as a fine line, the highest and lowest point as dots."""
    if curve.noted is not None:
        axes.hlines([curve.noted.mean], *window, color=colour, linewidth=0.6, linestyle=(0.0, (8.0, 2.0, 1.0, 2.0)))
        axes.plot(*zip(*curve.noted.points, strict=True), "o", color=colour, markersize=3.6)


def _strips(axes: Axes, strips: Sequence[tuple[str, Array]]) -> None:
    for place, (_, spans) in enumerate(strips):
        bars = [(float(start), float(end) - float(start)) for start, end in spans]
        axes.broken_barh(bars, (place + 0.2, 0.6), color="#9a917f")
    axes.set_yticks([place + 0.5 for place in range(len(strips))], [name for name, _ in strips], fontsize=7.0)
    axes.set_ylim(len(strips), 0)
    axes.tick_params(axis="y", length=0)
    axes.annotate("conducts", (1.0, 0.5), (5, -3), "axes fraction", "offset points", annotation_clip=False)


def bars_bytes(bars: Bars, form: str) -> bytes:
    """Harmonics beside their limits as a picture file; form: "png" or "svg"."""
    with matplotlib.rc_context(_STYLE):
        figure = Figure(figsize=(WIDTH, 3.4), layout="constrained")
        axes = figure.subplots()
        places = range(len(bars.rows))
        bottom, top = decades(bars.rows)
        values = [row.figure.value for row in bars.rows]
        colours = [LIMIT if row.state is State.FAILS else COLOURS[2] for row in bars.rows]
        axes.bar(places, values, width=0.6, color=colours)
        limits = [row.limit.value for row in bars.rows]
        axes.hlines(limits, [place - 0.45 for place in places], [place + 0.45 for place in places], INK, linewidth=1.6)
        axes.annotate("limit", (len(limits) - 0.5, limits[-1]), (4, -3), textcoords="offset points")
        axes.set_yscale("log")
        axes.set_ylim(10.0**bottom, 10.0**top)
        axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: number(value)))
        axes.yaxis.set_minor_locator(NullLocator())
        axes.grid(axis="y", color="#dddddd", linewidth=0.6)
        axes.set_axisbelow(True)
        shown = [place for place in places if len(bars.rows) <= 20 or place % 2 == 1]
        axes.set_xticks(shown, [str(bars.rows[place].order) for place in shown])
        axes.set_xlim(-0.7, len(limits) - 0.3)
        axes.set_xlabel("order of the harmonic")
        axes.set_ylabel("current in A rms")
        axes.set_title(bars.title, loc="left", fontsize=9.0)
        return _saved(figure, form)


def sweep_bytes(picture: SweepPicture, form: str) -> bytes:
    """A sweep as a picture file: figures over its let, or how samples spread; form: "png" or "svg"."""
    count = len(picture.panels)
    across = 1 if count == 1 else 2
    down = -(-count // across)
    with matplotlib.rc_context(_STYLE):
        figure = Figure(figsize=(WIDTH, PANEL * down + 0.5), layout="constrained")
        places = figure.subplots(down, across, squeeze=False).flatten()
        for panel, axes in zip(picture.panels, places, strict=False):
            (_spread if picture.over is None else _over)(axes, panel, picture)
        for axes in places[count:]:
            axes.set_axis_off()
        figure.suptitle(picture.title, x=0.01, ha="left", fontsize=9.0)
        return _saved(figure, form)


def _over(axes: Axes, panel: SweepPanel, picture: SweepPicture) -> None:
    """A figure over a let: hollow where a requirement on it does not hold."""
    assert picture.over is not None
    axes.plot(picture.over, panel.values, color=COLOURS[0], linewidth=1.2)
    for chosen, face in ((np.logical_not(panel.fails), COLOURS[0]), (panel.fails, "white")):
        here = picture.over[chosen], panel.values[chosen]
        axes.plot(*here, "o", markerfacecolor=face, markeredgecolor=COLOURS[0], markersize=4.5)
    for limit in panel.limits:
        axes.axhline(limit, color=LIMIT, linewidth=1.0, linestyle=(0.0, (5.0, 2.0)))
        where = (1.0, limit), (0, 2), ("axes fraction", "data"), "offset points"
        axes.annotate("limit", *where, ha="right", fontsize=7.5)
    low, high = float(picture.over.min()), float(picture.over.max())
    air = (high / low) ** 0.04 if picture.logarithmic else 0.04 * (high - low)
    axes.set_xlim((low / air, high * air) if picture.logarithmic else (low - air, high + air))
    if picture.logarithmic:
        axes.set_xscale("log")
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: number(value)))
        axes.xaxis.set_minor_locator(NullLocator())
    axes.set_title(panel.title, loc="left", fontsize=8.0)
    axes.set_xlabel(picture.over_title)
    axes.grid(axis="y", color="#dddddd", linewidth=0.6)
    axes.set_axisbelow(True)


def _spread(axes: Axes, panel: SweepPanel, picture: SweepPicture) -> None:
    """How many variants lie where; those in which a requirement does not hold stand hatched on the others."""
    finite = np.isfinite(panel.values)
    good = panel.values[finite & np.logical_not(panel.fails)]
    bad = panel.values[finite & panel.fails]
    bins = np.histogram_bin_edges(panel.values[finite], bins=min(40, max(8, round(math.sqrt(finite.sum())))))
    low, _ = np.histogram(good, bins)
    high, _ = np.histogram(bad, bins)
    widths = np.diff(bins)
    axes.bar(bins[:-1], low, widths, align="edge", color=COLOURS[2])
    there = high > 0
    over = bins[:-1][there], high[there], widths[there], low[there]
    axes.bar(*over, align="edge", facecolor="white", edgecolor=LIMIT, hatch="////", linewidth=0.4)
    axes.set_ylim(0.0, 1.2 * max(float((low + high).max()), 1.0))
    axes.yaxis.set_major_locator(MaxNLocator(5, integer=True))
    for limit in panel.limits:
        axes.axvline(limit, color=LIMIT, linewidth=1.0, linestyle=(0.0, (5.0, 2.0)))
        axes.annotate("limit", (limit, 1.0), (2, -8), ("data", "axes fraction"), "offset points", fontsize=7.5)
    axes.set_title(panel.title, loc="left", fontsize=8.0)
    axes.set_ylabel("variants")


def diagram_bytes(diagram: Diagram, form: str) -> bytes:
    """The circuit as a picture file; form: "png" or "svg"."""
    with matplotlib.rc_context(_STYLE):
        figure = Figure(figsize=(diagram.width / DOTS_AN_INCH, diagram.height / DOTS_AN_INCH))
        axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
        axes.set_axis_off()
        axes.set_xlim(0.0, diagram.width)
        axes.set_ylim(diagram.height, 0.0)
        for start, end in diagram.wires:
            axes.plot(*zip(start, end, strict=True), color=INK, linewidth=0.9, zorder=1.0)
        for x, y in diagram.joints:
            axes.plot(x, y, "o", color=INK, markersize=3.6, zorder=2.0)
        for outline in (*diagram.others, *(each for mark in diagram.marks for each in mark.outlines)):
            if outline.closed:
                inside = INK if outline.filled else "white"
                axes.add_patch(Polygon(outline.points, facecolor=inside, edgecolor=INK, linewidth=1.1, zorder=3.0))
            else:
                axes.plot(*zip(*outline.points, strict=True), color=INK, linewidth=1.1, zorder=3.0)
        for words in (*diagram.names, *(each for mark in diagram.marks for each in mark.words)):
            side = {"start": "left", "middle": "center", "end": "right"}[words.anchor]
            colour = FAINT if words.faint else INK
            axes.text(*words.at, words.words, ha=side, color=colour, fontsize=7.5, zorder=4.0)
        return _saved(figure, form)


def _saved(figure: Figure, form: str) -> bytes:
    """The file's bytes, the same every time: no date in them."""
    content = io.BytesIO()
    metadata = {"Date": None, "Creator": "Bulkrail"} if form == "svg" else {"Software": "Bulkrail"}
    figure.savefig(content, format=form, dpi=DOTS, facecolor="white", metadata=metadata)
    return content.getvalue()
