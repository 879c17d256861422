"""The circuit as a diagram: lines, symbols and words at points, for whoever puts them on paper, and as SVG text.

Rows and columns become distances here: a column is as wide as what is written in it, a row as high as the symbols above
it. Knows an arrangement and symbols; no circuits' meaning.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

from simcore.design.circuit import Circuit
from simcore.figures.overview import VALVES
from simcore.report.arranging import MOST_BRANCHES, Arrangement, Place, arrange, branches_of
from simcore.report.svg import INK, document, line, text
from simcore.report.symbols import BUMP, BUMPS, HALF_WIDTH, Outline, Point, Symbol, symbol_of

TALL, MEDIUM, SHORT, MARGIN = 84.0, 54.0, 32.0, 30.0
"""Between two rows: with symbols there, beside what lies in one of them, with wires only. And around all."""
LETTER, LINE_HEIGHT, AIR = 6.2, 13.0, 8.0
"""Width of a letter, about; height of a line of words; what keeps things apart."""
CLEAR = 26.0
"""Above and below the middle of a symbol that stands: free of other nodes' lines."""
CORE = 16.0
"""From a winding to the middle of the core beside it."""
MOST_LETTERS = 17
FAINT = "#555555"
THIN, DRAWN, JOINT = 1.2, 1.5, 2.6


@dataclass(frozen=True)
class Words:
    """Words at a point; anchor: "start", "middle" or "end"; faint: those that say less."""

    at: Point
    words: str
    anchor: str = "start"
    faint: bool = False


@dataclass(frozen=True)
class Mark:
    """A branch as drawn; box: left, top, right and bottom of its symbol with what is written beside it."""

    name: str
    outlines: Sequence[Outline]
    words: Sequence[Words]
    box: tuple[float, float, float, float]


@dataclass(frozen=True)
class Diagram:
    """Everything to draw, in dots from the upper left corner: wires, joints where more than two meet, then marks;
    others: cores of transformers and what shows the references; names: of the nodes."""

    title: str
    width: float
    height: float
    wires: Sequence[tuple[Point, Point]]
    joints: Sequence[Point]
    marks: Sequence[Mark]
    others: Sequence[Outline]
    names: Sequence[Words]


def diagram_of(circuit: Circuit) -> Diagram | None:
    """The diagram of a circuit; None where it has too many branches to be read."""
    branches = branches_of(circuit)
    if not 0 < len(branches) <= MOST_BRANCHES:
        return None
    return _Drawing(arrange(branches, circuit.references), circuit.references).diagram(f"{circuit.name}: the circuit")


def width_of(words: str) -> float:
    """About how wide words are."""
    return LETTER * len(words)


def _short(words: str) -> str:
    return words if len(words) <= MOST_LETTERS else words[: MOST_LETTERS - 1] + "\u2026"


class _Drawing:
    """An arrangement on its way to a diagram."""

    def __init__(self, arrangement: Arrangement, references: Sequence[str]):
        self.places = arrangement.places
        self.rows = arrangement.rows
        self.references = references
        self.words = {place: self._words(place) for place in self.places}
        self.paired = _paired(self.places)
        busy = Counter(node for place in self.places for node in (place.branch.a, place.branch.b))
        busy.update(references)
        self.gap = {place: _gap(place, busy) for place in self.places if not place.lies}
        self.y = self._heights()
        self.x = self._widths(arrangement.columns)
        self.ends = self._ends_of_nodes()
        self.lines = [(min(across), max(across), self.y[self.rows[node]]) for node, across in self.ends.items()]

    def diagram(self, title: str) -> Diagram:
        marks, wires = [], []
        for place in self.places:
            mark, more = self._mark(place)
            marks.append(mark)
            wires += more
        names = [Words((min(across) + 4.0, self.y[self.rows[node]] - 5.0), node) for node, across in self.ends.items()]
        wires += [((left, y), (right, y)) for left, right, y in self.lines if left < right]
        others = [*self._cores(), *(stroke for node in self.references for stroke in self._reference(node))]
        right = max(*(mark.box[2] for mark in marks), *(each.at[0] + width_of(each.words) for each in names))
        bottom = max(*(mark.box[3] for mark in marks), *(y for outline in others for _, y in outline.points), 0.0)
        height = max(bottom, *self.y) + MARGIN
        return Diagram(title, right + MARGIN, height, wires, self._joints(), marks, others, names)

    # --- rows and columns --------------------------------------------------------------------------------------------

    def _words(self, place: Place) -> tuple[str, ...]:
        return tuple(_short(each) for each in (place.branch.name, place.branch.value) if each)

    def _heights(self) -> list[float]:
        """The height of each row: as far below the one above as what stands or lies between them needs."""
        count = max(self.rows.values()) + 1
        gaps = [SHORT] * (count - 1)
        for place in self.places:
            row = place.rows[0]
            if place.lies:
                for gap in (row - 1, row):
                    if 0 <= gap < len(gaps):
                        gaps[gap] = max(gaps[gap], MEDIUM)
        for place, gap in self.gap.items():
            if place.branch.kind in VALVES or abs(place.rows[0] - place.rows[1]) == 1:
                gaps[gap] = TALL
        for place, gap in self.gap.items():
            if max(gaps[min(place.rows) : max(place.rows)]) < MEDIUM:
                gaps[gap] = TALL
        lies_first = any(place.lies and place.rows[0] == 0 for place in self.places)
        first = MARGIN + (HALF_WIDTH + LINE_HEIGHT if lies_first else LINE_HEIGHT)
        return [first + sum(gaps[:row]) for row in range(count)]

    def _widths(self, count: int) -> list[float]:
        """Where each column's wire stands: columns are as wide as their symbols and words."""
        left, right = [HALF_WIDTH + AIR] * count, [HALF_WIDTH + AIR] * count
        for place in self.places:
            wide, at = max(map(width_of, self.words[place])), place.column
            if place.lies:
                half = max(symbol_of(place.branch.kind, place.branch.form).reach, wide / 2.0) + AIR
                left[at], right[at] = max(left[at], half), max(right[at], half)
                continue
            side = self.paired.get(place, 0)
            if place.branch.kind == "transformer" and not side:
                wide += CORE - HALF_WIDTH + AIR
            for widths, core in ((left, -1), (right, 1)):
                if side == core:
                    widths[at] = CORE
                elif core == (-side or 1):
                    widths[at] = max(widths[at], HALF_WIDTH + AIR + wide + AIR)
        self._widen_for_names(left, right)
        found = [MARGIN + left[0]]
        for at in range(1, count):
            found.append(found[-1] + right[at - 1] + left[at])
        self.half = [min(one, other) for one, other in zip(left, right, strict=True)]
        return found

    def _widen_for_names(self, left: list[float], right: list[float]) -> None:
        """Room for the name of a node, which stands over the left end of its line, before the next wire that stands."""
        lying = {place.column for place in self.places if place.lies}
        first: dict[str, tuple[int, bool]] = {}
        for place in self.places:
            for node in (place.branch.a, place.branch.b):
                first[node] = min(first.get(node, (len(left), False)), (place.column, place.lies))
        for node, (at, lies) in first.items():
            if at + 1 < len(left) and right[at] > CORE:
                wide = width_of(node) + AIR
                if lies:
                    left[at + 1] = max(left[at + 1], wide + (right[at + 1] if at + 1 in lying else 0.0))
                else:
                    right[at] = max(right[at], wide - left[at + 1])

    def _across(self, place: Place) -> tuple[float, float]:
        """Where along the row a branch meets the lines of its first and second node."""
        x = self.x[place.column]
        if not place.lies:
            return x, x
        half = self.half[place.column]
        return (x - half, x + half) if place.forward else (x + half, x - half)

    def _ends_of_nodes(self) -> dict[str, list[float]]:
        """Node -> where branches meet its line."""
        found: dict[str, list[float]] = {}
        for place in self.places:
            for node, x in zip((place.branch.a, place.branch.b), self._across(place), strict=True):
                found.setdefault(node, []).append(x)
        return found

    # --- branches ----------------------------------------------------------------------------------------------------

    def _mark(self, place: Place) -> tuple[Mark, list[tuple[Point, Point]]]:
        """A branch's symbol and words, and its wires."""
        branch, symbol = place.branch, symbol_of(place.branch.kind, place.branch.form)
        words = self.words[place]
        start, end = zip(self._across(place), (self.y[row] for row in place.rows), strict=True)
        if place.lies:
            x, y = (start[0] + end[0]) / 2.0, start[1]
            side = 1.0 if end[0] > start[0] else -1.0
            outlines, letters = _placed(symbol, lambda point: (x + side * point[1], y + point[0]))
            edges = (x - side * symbol.reach, y), (x + side * symbol.reach, y)
            half = max(symbol.reach + 1.0, max(map(width_of, words)) / 2.0)
            beside, over = max(symbol.side, 8.0), HALF_WIDTH + LINE_HEIGHT
            written = [
                Words((x, y + shift), each, "middle", shift > 0.0)
                for shift, each in zip((-beside - 4.0, beside + 12.0), words, strict=False)
            ]
            box = (x - half, y - over, x + half, y + over)
        else:
            core = self.paired.get(place, 0)
            x, y = start[0], self._middle(place)
            side, mirror = (1.0 if end[1] > start[1] else -1.0), (-1.0 if core == -1 else 1.0)
            outlines, letters = _placed(symbol, lambda point: (x + mirror * point[0], y + side * point[1]))
            edges = (x, y - side * symbol.reach), (x, y + side * symbol.reach)
            away = -1.0 if core == 1 else 1.0
            beside = CORE if branch.kind == "transformer" and not core else max(symbol.side, 10.0)
            place_of_words = x + away * (beside + 6.0)
            first = y - (len(words) - 1) * LINE_HEIGHT / 2.0 + 4.0
            written = [
                Words((place_of_words, first + at * LINE_HEIGHT), each, "end" if away < 0.0 else "start", at > 0)
                for at, each in enumerate(words)
            ]
            far = place_of_words + away * max(map(width_of, words))
            over = CLEAR - 1.0
            box = (min(x - HALF_WIDTH, far), y - over, max(x + HALF_WIDTH, far), y + over)
        return Mark(branch.name, outlines, [*written, *letters], box), [(start, edges[0]), (edges[1], end)]

    def _middle(self, place: Place) -> float:
        """The height of a symbol that stands: in the middle of its wire where no node's line is in the way, diodes
        beside one another at the node that more branches join."""
        upper, lower = sorted(place.rows)
        gap = self.gap[place]
        choices = [self._between(gap)]
        if place.branch.kind not in VALVES:
            middle = (self.y[upper] + self.y[lower]) / 2.0
            others = sorted(map(self._between, range(upper, lower)), key=lambda y: abs(y - middle))
            choices = [middle, *others]
        x = self.x[place.column]
        far = x + HALF_WIDTH + AIR + max(map(width_of, self.words[place]))
        for y in choices:
            if not any(
                left < far and right > x - HALF_WIDTH and abs(height - y) < CLEAR for left, right, height in self.lines
            ):
                return y
        return choices[0]

    def _between(self, gap: int) -> float:
        return (self.y[gap] + self.y[gap + 1]) / 2.0

    # --- nodes and cores ---------------------------------------------------------------------------------------------

    def _joints(self) -> list[Point]:
        """Where three wires or more meet: along the line of a node, up and down."""
        wires: Counter[tuple[str, float]] = Counter()
        for place in self.places:
            wires.update(zip((place.branch.a, place.branch.b), self._across(place), strict=True))
        found = []
        for (node, x), count in wires.items():
            across = self.ends[node]
            along = (x > min(across)) + (x < max(across))
            lying = any(place.lies and x in self._across(place) for place in self.places)
            if count + along >= 3 and not (lying and along + count == 2):
                found.append((x, self.y[self.rows[node]]))
        return found

    def _reference(self, node: str) -> Iterator[Outline]:
        """The mark of a reference: a bar below its line, where nothing else goes down; else left of it."""
        y, row = self.y[self.rows[node]], self.rows[node]
        down = {
            x
            for place in self.places
            for end, x, own, other in zip(
                (place.branch.a, place.branch.b), self._across(place), place.rows, place.rows[::-1], strict=True
            )
            if end == node and own == row and other > row
        }
        free = [x for x in sorted(self.ends[node]) if x not in down]
        left = min(self.ends[node])
        x = free[0] if free else left - HALF_WIDTH
        stem = ((x, y), (x, y + 12.0))
        yield Outline(stem if free else ((left, y), *stem))
        yield Outline(((x - 9.0, y + 12.0), (x + 9.0, y + 12.0), (x + 9.0, y + 14.0), (x - 9.0, y + 14.0)), True, True)

    def _cores(self) -> Iterator[Outline]:
        """Two lines between windings side by side, else beside each winding."""
        by_core: dict[tuple[str, float], list[float]] = {}
        for place in self.places:
            if place.branch.kind == "transformer" and not place.lies:
                x = self.x[place.column] + CORE * self.paired.get(place, 1)
                by_core.setdefault((place.branch.owner, x), []).append(self._middle(place))
        for (_, x), heights in by_core.items():
            for shift in (-2.5, 2.5):
                ends = min(heights) - BUMP * BUMPS, max(heights) + BUMP * BUMPS
                yield Outline(tuple((x + shift, y) for y in ends))


def _placed(symbol: Symbol, put: Callable[[Point], Point]) -> tuple[list[Outline], list[Words]]:
    outlines = [Outline(tuple(map(put, each.points)), each.closed, each.filled) for each in symbol.outlines]
    letters = []
    for each in symbol.letters:
        x, y = put(each.middle)
        letters.append(Words((x, y + 4.0), each.words, "middle"))
    return outlines, letters


def _gap(place: Place, busy: Mapping[str, int]) -> int:
    """The row above a standing branch's symbol: at the node that more branches join."""
    upper, lower = sorted(place.rows)
    at_b = busy[place.branch.b] >= busy[place.branch.a]
    row = place.rows[1] if at_b else place.rows[0]
    return upper if row == upper else lower - 1


def _paired(places: Sequence[Place]) -> dict[Place, int]:
    """Windings with the core between them and another of theirs in the next column -> on which side, 1 for right."""
    by_owner: dict[str, list[Place]] = {}
    for place in places:
        if place.branch.kind == "transformer" and not place.lies:
            by_owner.setdefault(place.branch.owner, []).append(place)
    found: dict[Place, int] = {}
    for windings in by_owner.values():
        columns = sorted({place.column for place in windings})
        for one, other in pairwise(columns):
            beside = {place.column: place for place in windings}
            if other == one + 1 and beside[one] not in found:
                found.update({place: 1 for place in windings if place.column == one})
                found.update({place: -1 for place in windings if place.column == other})
    return found


# --- as SVG ----------------------------------------------------------------------------------------------------------


def diagram_svg(diagram: Diagram) -> str:
    """The diagram as SVG text."""
    width = f' stroke-width="{THIN}"'
    parts = [line(*start, *end, INK, width) for start, end in diagram.wires]
    parts += [f'<circle cx="{x:.1f}" cy="{y:.1f}" r="{JOINT}" fill="{INK}"/>' for x, y in diagram.joints]
    parts += [_outline(each) for each in diagram.others]
    for mark in diagram.marks:
        parts += [_outline(each) for each in mark.outlines]
        parts += map(_written, mark.words)
    parts += map(_written, diagram.names)
    return document(diagram.width, diagram.height, diagram.title, parts)


def _outline(outline: Outline) -> str:
    points = " ".join(f"{x:.1f},{y:.1f}" for x, y in outline.points)
    kind = "polygon" if outline.closed else "polyline"
    inside = (INK if outline.filled else "#ffffff") if outline.closed else "none"
    return f'<{kind} points="{points}" fill="{inside}" stroke="{INK}" stroke-width="{DRAWN}"/>'


def _written(words: Words) -> str:
    return text(*words.at, words.words, words.anchor, FAINT if words.faint else INK)
