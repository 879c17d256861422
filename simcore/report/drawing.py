"""Pictures drawn with matplotlib: for printing and for slides, as PNG or SVG.

Knows panels and bars, and no studies. It is the only module that needs the extra `view`.
"""

from __future__ import annotations

import io
from collections.abc import Sequence

import matplotlib
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Polygon, Rectangle
from matplotlib.ticker import FuncFormatter, NullLocator

from simcore.figures.polynomials import Array
from simcore.judge.outcome import State
from simcore.report.diagram import BOX_HEIGHT, BOX_WIDTH, FAINT, LINE_HEIGHT, Diagram
from simcore.report.panels import Bars, Panel, Picture, decades, shades
from simcore.report.svg import COLOURS, DASHES, INK, LIMIT, SHADE, number, spread, value_range

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
    for curve, colour, dash in zip(panel.curves, COLOURS, DASHES, strict=False):
        style: object = (0.0, tuple(float(part) for part in dash.split())) if dash else "solid"
        axes.plot(curve.times, curve.values, color=colour, linewidth=1.2, linestyle=style)
    points = PANEL * 72.0 / (high - low)
    heights = spread([-float(curve.values[-1]) * points for curve in panel.curves], LABEL_POINTS)
    for curve, colour, height in zip(panel.curves, COLOURS, heights, strict=False):
        place = (picture.span[1], -height / points)
        axes.annotate(curve.label, place, (5, -3), textcoords="offset points", color=colour, annotation_clip=False)


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


def diagram_bytes(diagram: Diagram, form: str) -> bytes:
    """The circuit as a picture file; form: "png" or "svg"."""
    with matplotlib.rc_context(_STYLE):
        figure = Figure(figsize=(diagram.width / DOTS_AN_INCH, diagram.height / DOTS_AN_INCH))
        axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
        axes.set_axis_off()
        axes.set_xlim(0.0, diagram.width)
        axes.set_ylim(diagram.height, 0.0)
        for stroke in diagram.strokes:
            xs, ys = zip(stroke.start, stroke.end, strict=True)
            if not stroke.heavy:
                axes.plot(xs, ys, color="white", linewidth=3.5, zorder=1.0)
            axes.plot(xs, ys, color=INK, linewidth=1.4 if stroke.heavy else 0.8, zorder=1.0)
        for x, y in diagram.joints:
            axes.plot(x, y, "o", color=INK, markersize=3.6, zorder=2.0)
        for each in diagram.boxes:
            x, y = each.middle
            corner = x - BOX_WIDTH / 2.0, y - BOX_HEIGHT / 2.0
            axes.add_patch(
                Rectangle(corner, BOX_WIDTH, BOX_HEIGHT, facecolor=SHADE, edgecolor=INK, linewidth=0.8, zorder=3.0)
            )
            if each.wedge:
                axes.add_patch(Polygon(each.wedge, facecolor=INK, zorder=3.0))
            for place, words in enumerate(each.words):
                height = y + (place - (len(each.words) - 1) / 2.0) * LINE_HEIGHT
                colour = INK if place == 0 else FAINT
                axes.text(x, height, words, ha="center", va="center", color=colour, fontsize=7.5, zorder=4.0)
        for x, y, words in diagram.names:
            axes.text(x, y, words, fontsize=7.5, zorder=4.0)
        return _saved(figure, form)


def _saved(figure: Figure, form: str) -> bytes:
    """The file's bytes, the same every time: no date in them."""
    content = io.BytesIO()
    metadata = {"Date": None, "Creator": "Bulkrail"} if form == "svg" else {"Software": "Bulkrail"}
    figure.savefig(content, format=form, dpi=DOTS, facecolor="white", metadata=metadata)
    return content.getvalue()
