"""The circuit as a diagram: strokes, boxes and words at points, for whoever puts them on paper, and as SVG text.

Each branch is a box with its name, kind and value on the line between its nodes; a wedge shows where a diode conducts
to. Knows an arrangement; no circuits' meaning.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from simcore.design.circuit import Circuit
from simcore.figures.overview import VALVES
from simcore.report.arranging import MOST_BRANCHES, Arrangement, Place, arrange, branches_of
from simcore.report.svg import INK, SHADE, document, line, text

COLUMN, ROW, MARGIN = 122.0, 92.0, 30.0
BOX_WIDTH, BOX_HEIGHT = 106.0, 46.0
LINE_HEIGHT, WEDGE, STUB = 13.0, 5.0, 26.0
MOST_LETTERS = 17
FAINT = "#555555"
HEAVY, LIGHT, JOINT = 2.0, 1.2, 2.8

Point = tuple[float, float]


@dataclass(frozen=True)
class Stroke:
    """A straight line; heavy: of a node; else of a branch, which passes over nodes that it does not join."""

    start: Point
    end: Point
    heavy: bool = False


@dataclass(frozen=True)
class Box:
    """A branch: its middle, lines of words, and the corners of a wedge where a diode conducts to, () for none."""

    middle: Point
    words: tuple[str, ...]
    wedge: tuple[Point, ...] = ()


@dataclass(frozen=True)
class Diagram:
    """Everything to draw, in dots from the upper left corner: branches' strokes over nodes', then joints and boxes."""

    title: str
    width: float
    height: float
    strokes: Sequence[Stroke]
    joints: Sequence[Point]
    boxes: Sequence[Box]
    names: Sequence[tuple[float, float, str]]


def diagram_of(circuit: Circuit) -> Diagram | None:
    """The diagram of a circuit; None where it has too many branches to be read."""
    branches = branches_of(circuit)
    if not 0 < len(branches) <= MOST_BRANCHES:
        return None
    arrangement = arrange(branches, circuit.references)
    busy = Counter(node for branch in branches for node in (branch.a, branch.b))
    busy.update(circuit.references)
    strokes, names = _nodes(arrangement)
    joints, boxes = [], []
    for place in arrangement.places:
        more, ends, drawn = _branch(place, _gap(place, busy))
        strokes += more
        joints += ends
        boxes.append(drawn)
    width = arrangement.columns * COLUMN + 2 * MARGIN
    height = max(arrangement.rows.values()) * ROW + 2 * MARGIN + 10.0
    return Diagram(f"{circuit.name}: the circuit", width, height, strokes, list(dict.fromkeys(joints)), boxes, names)


def _x(column: int) -> float:
    return MARGIN + (column + 0.5) * COLUMN


def _y(row: int) -> float:
    return MARGIN + 10.0 + row * ROW


def _ends(place: Place) -> tuple[float, float]:
    """Where along the row a branch meets the lines of its first and second node."""
    x, half = _x(place.column), BOX_WIDTH / 2.0
    if not place.lies:
        return x, x
    return (x - half, x + half) if place.forward else (x + half, x - half)


def _nodes(arrangement: Arrangement) -> tuple[list[Stroke], list[tuple[float, float, str]]]:
    """The lines of the nodes, and their names at the left ends."""
    reach: dict[str, list[float]] = {}
    for place in arrangement.places:
        for node, x in zip((place.branch.a, place.branch.b), _ends(place), strict=True):
            reach.setdefault(node, []).append(x)
    strokes, names = [], []
    for node, across in reach.items():
        stub = STUB if min(across) == max(across) else 0.0
        left, y = min(across) - stub, _y(arrangement.rows[node])
        strokes.append(Stroke((left, y), (max(across) + stub, y), True))
        names.append((left + 4.0, y - 5.0, node))
    return strokes, names


def _branch(place: Place, gap: float) -> tuple[list[Stroke], list[Point], Box]:
    """A branch's strokes, where it joins its nodes, and its box, which stands at height gap unless it lies."""
    branch = place.branch
    words = tuple(_short(each) for each in (branch.name, branch.kind.replace("_", " "), branch.value) if each)
    start, end = zip(_ends(place), (_y(row) for row in place.rows), strict=True)
    wedged = branch.kind in VALVES
    if place.lies:
        middle = (_x(place.column), start[1])
        return [], [], Box(middle, words, _wedge(middle, start, end) if wedged else ())
    middle = (start[0], gap)
    return [Stroke(start, end)], [start, end], Box(middle, words, _wedge(middle, start, end) if wedged else ())


def _short(words: str) -> str:
    return words if len(words) <= MOST_LETTERS else words[: MOST_LETTERS - 1] + "\u2026"


def _gap(place: Place, busy: Mapping[str, int]) -> float:
    """The height of a standing branch's box: between two rows, at the node that more branches join."""
    upper, lower = sorted(place.rows)
    at_b = busy[place.branch.b] >= busy[place.branch.a]
    row = place.rows[1] if at_b else place.rows[0]
    first = upper if row == upper else lower - 1
    return (_y(first) + _y(first + 1)) / 2.0


def _wedge(middle: Point, start: Point, end: Point) -> tuple[Point, ...]:
    """A triangle at the box's side towards the end, pointing there."""
    if start[1] == end[1]:
        side = 1.0 if end[0] > start[0] else -1.0
        x = middle[0] + side * (BOX_WIDTH / 2.0)
        return (x, middle[1] - WEDGE), (x, middle[1] + WEDGE), (x + side * 1.6 * WEDGE, middle[1])
    side = 1.0 if end[1] > start[1] else -1.0
    y = middle[1] + side * (BOX_HEIGHT / 2.0)
    return (middle[0] - WEDGE, y), (middle[0] + WEDGE, y), (middle[0], y + side * 1.6 * WEDGE)


# --- as SVG ----------------------------------------------------------------------------------------------------------


def diagram_svg(diagram: Diagram) -> str:
    """The diagram as SVG text."""
    parts = []
    for stroke in diagram.strokes:
        ends = (*stroke.start, *stroke.end)
        if not stroke.heavy:
            parts.append(line(*ends, "#ffffff", ' stroke-width="5"'))
        parts.append(line(*ends, INK, f' stroke-width="{HEAVY if stroke.heavy else LIGHT}"'))
    parts += [f'<circle cx="{x:.1f}" cy="{y:.1f}" r="{JOINT}" fill="{INK}"/>' for x, y in diagram.joints]
    for each in diagram.boxes:
        (x, y), step = each.middle, LINE_HEIGHT
        sizes = f'width="{BOX_WIDTH}" height="{BOX_HEIGHT}" rx="3" fill="{SHADE}" stroke="{INK}"'
        parts.append(f'<rect x="{x - BOX_WIDTH / 2.0:.1f}" y="{y - BOX_HEIGHT / 2.0:.1f}" {sizes}/>')
        if each.wedge:
            corners = " ".join(f"{a:.1f},{b:.1f}" for a, b in each.wedge)
            parts.append(f'<polygon points="{corners}" fill="{INK}"/>')
        first = y - (len(each.words) - 1) * step / 2.0 + 4.0
        for place, words in enumerate(each.words):
            parts.append(text(x, first + place * step, words, "middle", INK if place == 0 else FAINT))
    parts += [text(x, y, words) for x, y, words in diagram.names]
    return document(diagram.width, diagram.height, diagram.title, parts)
