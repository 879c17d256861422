"""Pictures as SVG text, drawn with nothing but strings: small, the same bytes every time, and safe to put in a page.

Knows panels and bars, and no studies. All text is escaped.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from html import escape
from itertools import pairwise

from simcore.judge.outcome import State
from simcore.report.panels import Bars, Curve, Panel, Picture, decades, shades, ticks

INK, GRID, SHADE, LIMIT = "#333333", "#dddddd", "#f3efe6", "#8a3b2e"
COLOURS = ("#1f3d5c", "#b0722c", "#5f8f80", "#7a5a86", "#8d8d8d", "#33261d")
"""Muted, each of another lightness, so that they stay apart in grey."""
DASHES = ("", "7 3", "2 2", "9 3 2 3", "5 2", "1 2")

WIDTH, LEFT, RIGHT, HEIGHT, GAP, TOP, STRIP = 784, 74, 144, 170, 26, 12, 12
LABEL_GAP = 13.0
SAMPLE = 24.0
"""Room for a piece of the line before its name, where several lines are to be told apart in grey too."""


def text(x: float, y: float, words: str, anchor: str = "start", colour: str = INK, turn: bool = False) -> str:
    """Words at a point; turn: upwards."""
    turned = f' transform="rotate(-90 {x:.1f} {y:.1f})"' if turn else ""
    return f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}" fill="{colour}"{turned}>{escape(words)}</text>'


def line(x1: float, y1: float, x2: float, y2: float, colour: str, more: str = "") -> str:
    """A straight line; more: attributes."""
    return f'<line x1="{x1:.1f}" y1="{y1:.1f}" x2="{x2:.1f}" y2="{y2:.1f}" stroke="{colour}"{more}/>'


def box(x: float, y: float, width: float, height: float, colour: str) -> str:
    """A filled rectangle."""
    return f'<rect x="{x:.1f}" y="{y:.1f}" width="{max(width, 0.3):.1f}" height="{height:.1f}" fill="{colour}"/>'


def document(width: float, height: float, title: str, parts: Sequence[str]) -> str:
    """The whole of a picture."""
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width:.0f} {height:.0f}" role="img" '
        f'font-family="sans-serif" font-size="11"><title>{escape(title)}</title>'
    )
    ground = f'<rect width="{width:.0f}" height="{height:.0f}" fill="#ffffff"/>'
    return "\n".join([head, ground, *parts, "</svg>"])


def number(value: float) -> str:
    """A number beside an axis."""
    return f"{value:.6g}" if abs(value) > 1e-12 else "0"


# --- traces ----------------------------------------------------------------------------------------------------------


def picture_svg(picture: Picture) -> str:
    """The traces of a study: one panel a unit, shaded where diodes conduct, and below which of them do."""
    parts = []
    top = float(TOP)
    shaded = shades(picture)
    for panel in picture.panels:
        parts += _panel(panel, picture, shaded, top)
        top += HEIGHT + GAP
    conducting = list(picture.conduction.items()) if len(picture.conduction) <= 12 else []
    for place, (name, spans) in enumerate(conducting):
        y = top + place * STRIP
        parts.append(text(LEFT - 6, y + 8, name, "end"))
        for start, end in spans:
            left, right = _x(float(start), picture), _x(float(end), picture)
            parts.append(box(left, y, right - left, STRIP - 4, "#9a917f"))
    if conducting:
        parts.append(text(WIDTH - RIGHT + 6, top + 8, "conducts"))
    top += len(conducting) * STRIP + 6
    parts += _time_axis(picture, top)
    return document(WIDTH, top + 36, picture.title, parts)


def _x(time: float, picture: Picture) -> float:
    start, end = picture.span
    return LEFT + (time - start) / (end - start) * (WIDTH - LEFT - RIGHT)


def _time_axis(picture: Picture, top: float) -> list[str]:
    parts = [line(LEFT, top, WIDTH - RIGHT, top, INK)]
    for tick in ticks(*picture.span, count=8):
        x = _x(tick, picture)
        parts += [line(x, top, x, top + 4, INK), text(x, top + 16, number(tick), "middle")]
    return [*parts, text((LEFT + WIDTH - RIGHT) / 2.0, top + 31, picture.time_title, "middle")]


def value_range(curves: Sequence[Curve]) -> tuple[float, float]:
    """Lowest and highest value of an axis, with a little air."""
    low = min(float(curve.values.min()) for curve in curves)
    high = max(float(curve.values.max()) for curve in curves)
    air = 0.06 * (high - low) or 0.1 * abs(high) or 1.0
    return low - air, high + air


def _panel(panel: Panel, picture: Picture, shaded: Sequence[tuple[float, float]], top: float) -> list[str]:
    low, high = value_range(panel.curves)

    def y(value: float) -> float:
        return top + (high - value) / (high - low) * HEIGHT

    parts = []
    for start, end in shaded:
        parts.append(box(_x(start, picture), top, _x(end, picture) - _x(start, picture), HEIGHT, SHADE))
    for tick in ticks(low, high):
        parts += [line(LEFT, y(tick), WIDTH - RIGHT, y(tick), GRID), text(LEFT - 6, y(tick) + 4, number(tick), "end")]
    parts += [
        line(LEFT, top, LEFT, top + HEIGHT, INK),
        text(18, top + HEIGHT / 2.0, panel.title, "middle", INK, True),
    ]
    if picture.judged is not None:
        for time in picture.judged:
            parts.append(line(_x(time, picture), top, _x(time, picture), top + HEIGHT, INK, ' stroke-dasharray="2 3"'))
        parts.append(text(_x(picture.judged[0], picture) + 3, top + 10, "judged"))
    for place, curve in enumerate(panel.curves):
        points = " ".join(
            f"{_x(float(time), picture):.1f},{y(float(value)):.1f}"
            for time, value in zip(curve.times, curve.values, strict=True)
        )
        dash = f' stroke-dasharray="{DASHES[place]}"' if DASHES[place] else ""
        parts.append(f'<polyline points="{points}" fill="none" stroke="{COLOURS[place]}" stroke-width="1.3"{dash}/>')
        parts += _noted(curve, COLOURS[place], picture, y)
    sizes = [LABEL_GAP * label_lines(curve) for curve in panel.curves]
    heights = placed([y(float(curve.values[-1])) for curve in panel.curves], sizes, (top, top + HEIGHT + GAP / 2.0))
    sample = SAMPLE if len(panel.curves) > 1 else 0.0
    for place, (curve, height) in enumerate(zip(panel.curves, heights, strict=True)):
        if sample:
            dash = f' stroke-width="1.3" stroke-dasharray="{DASHES[place]}"'
            parts.append(line(WIDTH - RIGHT + 6, height, WIDTH - RIGHT + 2 + sample, height, COLOURS[place], dash))
        for step, words in enumerate((curve.label, *(curve.noted.words if curve.noted else ()))):
            at = WIDTH - RIGHT + 6 + sample, height + 4 + step * LABEL_GAP
            parts.append(text(*at, words, "start", COLOURS[place]))
    return parts


def _noted(curve: Curve, colour: str, picture: Picture, y: Callable[[float], float]) -> list[str]:
    """The mean as a fine line, the highest and lowest point as dots."""
    if curve.noted is None:
        return []
    first, last = picture.judged or picture.span
    mean = y(curve.noted.mean)
    parts = [
        line(
            _x(first, picture), mean, _x(last, picture), mean, colour, ' stroke-width="0.7" stroke-dasharray="8 2 1 2"'
        )
    ]
    return parts + [
        f'<circle cx="{_x(time, picture):.1f}" cy="{y(value):.1f}" r="2.6" fill="{colour}"/>'
        for time, value in curve.noted.points
    ]


def label_lines(curve: Curve) -> int:
    """Lines of words beside the end of a curve."""
    return 1 + (len(curve.noted.words) if curve.noted else 0)


def placed(heights: Sequence[float], sizes: Sequence[float], span: tuple[float, float]) -> list[float]:
    """Heights moved apart, in their order, so that what begins at each has its size: down from the first one on, then
    up where that leaves the span, shape (first, last)."""
    found = list(heights)
    order = sorted(range(len(heights)), key=lambda place: heights[place])
    for before, after in pairwise(order):
        found[after] = max(found[after], found[before] + sizes[before])
    below = span[1]
    for place in reversed(order):
        found[place] = min(found[place], below - sizes[place])
        below = found[place]
    return found


# --- harmonics -------------------------------------------------------------------------------------------------------


def bars_svg(bars: Bars) -> str:
    """Harmonics as bars, each with its limit as a mark across; a logarithmic scale, since both fall over decades."""
    bottom, top_decade = decades(bars.rows)
    height, top = 240.0, float(TOP)

    def y(value: float) -> float:
        share = (math.log10(max(value, 10.0**bottom)) - bottom) / (top_decade - bottom)
        return top + (1.0 - share) * height

    step = (WIDTH - LEFT - RIGHT) / len(bars.rows)
    parts = []
    for decade in range(bottom, top_decade + 1):
        level = y(10.0**decade)
        parts += [
            line(LEFT, level, WIDTH - RIGHT, level, GRID),
            text(LEFT - 6, level + 4, f"{10.0**decade:g}", "end"),
        ]
    for place, row in enumerate(bars.rows):
        x = LEFT + step * place
        colour = LIMIT if row.state is State.FAILS else COLOURS[2]
        tip = y(row.figure.value)
        parts.append(box(x + 0.2 * step, tip, 0.6 * step, top + height - tip, colour))
        parts.append(
            line(x + 0.05 * step, y(row.limit.value), x + 0.95 * step, y(row.limit.value), INK, ' stroke-width="2"')
        )
        if len(bars.rows) <= 20 or place % 2 == 1:
            parts.append(text(x + 0.5 * step, top + height + 14, str(row.order), "middle"))
    last = y(bars.rows[-1].limit.value)
    parts += [text(WIDTH - RIGHT + 6, last + 4, "limit"), line(LEFT, top, LEFT, top + height, INK)]
    parts.append(text(18, top + height / 2.0, "current in A rms", "middle", INK, True))
    parts.append(text((LEFT + WIDTH - RIGHT) / 2.0, top + height + 30, "order of the harmonic", "middle"))
    return document(WIDTH, top + height + 40, bars.title, parts)


# --- trade-offs ------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Trade:
    """Where a second let just meets a requirement over a first one, on the axes' units, all above zero.

    curves: for "above" and "below", which say on which side it is met: points (first, second); made: the preferred
    values chosen at them
    """

    title: str
    first: str
    second: str
    curves: Mapping[str, Sequence[tuple[float, float]]]
    made: Sequence[tuple[float, float]]


def trade_svg(trade: Trade) -> str:
    """A trade-off between two lets, on logarithmic axes; preferred values as hollow dots."""
    points = [point for curve in (*trade.curves.values(), trade.made) for point in curve]
    (left, right), (low, high) = (_decade_range([point[axis] for point in points]) for axis in (0, 1))
    top, height = float(TOP) + 16.0, 260.0

    def at(point: tuple[float, float]) -> tuple[float, float]:
        across = math.log(point[0] / left) / math.log(right / left)
        up = math.log(point[1] / low) / math.log(high / low)
        return LEFT + across * (WIDTH - LEFT - RIGHT), top + (1.0 - up) * height

    parts = [text(LEFT, 16, trade.title)]
    for tick in log_ticks(low, high):
        y = at((left, tick))[1]
        parts += [line(LEFT, y, WIDTH - RIGHT, y, GRID), text(LEFT - 6, y + 4, number(tick), "end")]
    for tick in log_ticks(left, right):
        x = at((tick, low))[0]
        parts += [line(x, top + height, x, top + height + 4, INK), text(x, top + height + 16, number(tick), "middle")]
    for (side, curve), colour, dash in zip(trade.curves.items(), COLOURS, DASHES, strict=False):
        places = [at(point) for point in curve]
        dashed = f' stroke-dasharray="{dash}"' if dash else ""
        drawn = " ".join(f"{x:.1f},{y:.1f}" for x, y in places)
        parts.append(f'<polyline points="{drawn}" fill="none" stroke="{colour}" stroke-width="1.3"{dashed}/>')
        parts.append(text(WIDTH - RIGHT + 6, places[-1][1] + 4, f"met {side}", "start", colour))
    for x, y in map(at, trade.made):
        parts.append(f'<circle cx="{x:.1f}" cy="{y:.1f}" r="3.2" fill="#ffffff" stroke="{INK}"/>')
    parts += [line(LEFT, top, LEFT, top + height, INK), line(LEFT, top + height, WIDTH - RIGHT, top + height, INK)]
    parts.append(text(18, top + height / 2.0, trade.second, "middle", INK, True))
    parts.append(text((LEFT + WIDTH - RIGHT) / 2.0, top + height + 31, trade.first, "middle"))
    return document(WIDTH, top + height + 40, trade.title, parts)


def _decade_range(values: Sequence[float]) -> tuple[float, float]:
    """Lowest and highest value of a logarithmic axis, with a little air."""
    low, high = min(values), max(values)
    air = max((high / low) ** 0.05, 1.05)
    return low / air, high * air


def log_ticks(low: float, high: float) -> list[float]:
    """Round values for a logarithmic axis: 1, 2 and 5 of each decade, or evenly spaced ones where two are not there."""
    decades_there = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    found = [factor * 10.0**power for power in decades_there for factor in (1.0, 2.0, 5.0)]
    within = [tick for tick in found if low <= tick <= high]
    return within if len(within) > 1 else ticks(low, high)
