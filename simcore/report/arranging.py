"""Where nodes and branches go in a circuit diagram, in rows and columns.

A node is a horizontal line in a row. A branch stands upright in a column between the lines of its nodes, or lies in the
row where both are its neighbours there. Diodes conduct to the upper rail, sources stand left, loads right, the
windings of a transformer side by side. So nothing ever covers anything, and the same circuit is always arranged in the
same way. Knows elements; draws nothing.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import networkx

from simcore.components import KINDS
from simcore.design.circuit import Circuit, Element
from simcore.design.graph import is_current_source, port_name
from simcore.design.overview import value_text
from simcore.figures.overview import VALVES
from simcore.figures.record import DELIVERING
from simcore.report.columns import Column, ordered
from simcore.report.levels import Branch, Sketch, levels_of, sketched

MOST_BRANCHES = 150
"""What a diagram can show so that it can still be read."""


@dataclass(frozen=True)
class Place:
    """A branch in a column, from row to row; a's row first. Both rows are the same where it lies; forward: whether a is
    then on the left."""

    branch: Branch
    column: int
    rows: tuple[int, int]
    forward: bool = True

    @property
    def lies(self) -> bool:
        """Whether it lies in a row."""
        return self.rows[0] == self.rows[1]


@dataclass(frozen=True)
class Arrangement:
    """places: of the branches; rows: node -> its row, counted from the top; columns: how many there are."""

    places: Sequence[Place]
    rows: dict[str, int]
    columns: int


def branches_of(circuit: Circuit) -> list[Branch]:
    """The branches of a circuit with what is written beside them."""
    return [
        Branch(
            port_name(element, port),
            element.name,
            element.kind,
            _value(element, port.index),
            port.a,
            port.b,
            port.index,
            *_form(element),
        )
        for element in circuit.elements.values()
        for port in element.ports
    ]


def _value(element: Element, index: int) -> str:
    """The data sheet's name, or the first value that is no rating; of a ratio the part that is this port's."""
    if element.sheet and index == 0:
        return element.sheet
    windings = element.kind == "transformer"
    for key in KINDS[element.kind].keys:
        given = element.given.get(key.name)
        if given is None or (key.name not in _OF_WINDINGS if windings else key.rating):
            continue
        if key.form == "ratio" and isinstance(given, tuple):
            given = given[index : index + 1]
        return _OF_WINDINGS.get(key.name, "") + value_text(key, given, element.unit)
    return ""


_OF_WINDINGS = {"turns": "turns: ", "rated_voltage": ""}
"""What is written beside a winding, and the words before it."""


def _form(element: Element) -> tuple[str, bool]:
    """The form of a branch, and whether it is a source that never changes."""
    given = element.given
    if element.kind == "load":
        return next(letter for key, letter in _LOADS.items() if given.get(key) is not None), False
    if element.kind not in DELIVERING:
        return "", False
    changes = "changing" if given.get("points") is not None or given.get("samples") is not None else "steady"
    form = "sine" if given.get("sine") is not None else changes
    return "current" if is_current_source(element) else form, form == "steady"


_LOADS = {"power": "P", "current": "I", "resistance": "R"}


def arrange(branches: Sequence[Branch], references: Sequence[str]) -> Arrangement:
    """Arrange a circuit of one branch at least."""
    sketch = sketched(branches, references)
    level = levels_of(sketch)
    column = _columns(sketch, level)
    lying = _lying(sketch, column, level)
    rows = _rows(branches, column, level, lying)
    places = [
        Place(each, column[each.name], (rows[each.a], rows[each.b]), lying.get(each.name, True)) for each in branches
    ]
    return Arrangement(places, rows, max(column.values()) + 1)


# --- columns ---------------------------------------------------------------------------------------------------------


def _columns(sketch: Sketch, level: dict[str, int]) -> dict[str, int]:
    """Branch -> column: part by part, in each sources or the windings that feed it first, loads and the windings that
    lead out of it last, what is between by distance; then as written. Two alike, one on top of the other, share one."""
    lead = {each.owner: sketch.part[each.a] for each in sketch.branches if each.index == 0}

    def group(branch: Branch) -> tuple[int, int]:
        part = sketch.part[branch.a]
        if branch.kind == "transformer" and branch.index > 0 and lead[branch.owner] != part:
            return part, 0
        if branch.kind == "transformer" and branch.index == 0:
            return part, 3
        late = sketch.loads(branch) and max(sketch.distance[branch.a], sketch.distance[branch.b]) > 0
        return part, 0 if sketch.feeds(branch) else (2 if late else 1)

    def rank(branch: Branch) -> tuple[tuple[int, int], int, int]:
        flat = level[branch.a] == level[branch.b]
        return (
            group(branch),
            max(sketch.distance[branch.a], sketch.distance[branch.b]),
            (1 if branch.kind in VALVES else (0 if flat else 2)),
        )

    columns: list[Column] = []
    open_ends: dict[tuple[str, str, int], Column] = {}
    for branch in sorted(sketch.branches, key=rank):
        low, high = sorted((branch.a, branch.b), key=lambda node: level[node])
        stands = level[low] != level[high]
        shared = None
        if stands and not sketch.feeds(branch):
            shared = open_ends.pop((branch.kind, low, 1), None) or open_ends.pop((branch.kind, high, -1), None)
            if shared is not None and (shared.group != group(branch) or not shared.free(level[low], level[high])):
                shared = None
        if shared is None:
            columns.append(shared := Column(group(branch)))
        shared.add(branch.name, (branch.a, branch.b), (level[low], level[high]))
        if stands:
            open_ends[(branch.kind, high, 1)] = open_ends[(branch.kind, low, -1)] = shared
    return {name: at for at, column in enumerate(ordered(columns, level)) for name in column.names}


def _lying(sketch: Sketch, column: dict[str, int], level: dict[str, int]) -> dict[str, bool]:
    """The branches that can lie in a row, since all else at one end stands left of them, all else at the other right;
    whether the left one is their first."""
    branches = sketch.branches
    at: dict[str, dict[str, int]] = {}
    for branch in branches:
        for node in (branch.a, branch.b):
            at.setdefault(node, {})[branch.name] = column[branch.name]
    found = {}
    for branch in branches:
        fixed = sketch.feeds(branch) or branch.kind == "transformer" or branch.a == branch.b
        if fixed or level[branch.a] != level[branch.b]:
            continue
        own = column[branch.name]
        ends = [[place for name, place in at[node].items() if name != branch.name] for node in (branch.a, branch.b)]
        for forward, (left, right) in ((False, ends[::-1]), (True, ends)):
            if all(place < own for place in left) and all(place > own for place in right):
                found[branch.name] = forward
    return found


@dataclass
class _Line:
    """Nodes that lie in one row, joined by lying branches, and the columns that they take."""

    nodes: list[str]
    columns: list[int] = field(default_factory=list)


def _rows(
    branches: Sequence[Branch], column: dict[str, int], level: dict[str, int], lying: dict[str, bool]
) -> dict[str, int]:
    """Node -> row from the top. Lines of one level share a row where neither reaches the other."""
    chains = networkx.Graph()
    chains.add_nodes_from(level)
    chains.add_edges_from((branch.a, branch.b) for branch in branches if branch.name in lying)
    line_of: dict[str, _Line] = {}
    for part in networkx.connected_components(chains):
        line = _Line([node for node in level if node in part])
        line_of.update(dict.fromkeys(line.nodes, line))
    for branch in branches:
        for node in (branch.a, branch.b):
            line_of[node].columns.append(column[branch.name])
    found: dict[str, int] = {}
    first = 0
    for height in sorted(set(level.values()), reverse=True):
        lines = _ordered([node for node in level if level[node] == height], branches, line_of)
        taken: list[list[_Line]] = []
        for line in lines:
            row = next((row for row in taken if not any(_meet(line, other) for other in row)), None)
            if row is None:
                taken.append(row := [])
            row.append(line)
        for place, row in enumerate(taken):
            found.update((node, first + place) for line in row for node in line.nodes)
        first += len(taken)
    return found


def _meet(line: _Line, other: _Line) -> bool:
    return min(line.columns) <= max(other.columns) and min(other.columns) <= max(line.columns)


def _ordered(nodes: Sequence[str], branches: Sequence[Branch], line_of: dict[str, _Line]) -> list[_Line]:
    """The lines of a level from top to bottom: a branch's first node above its second where that can be had."""
    lines = {id(line_of[node]): line_of[node] for node in nodes}
    order = {key: place for place, key in enumerate(lines)}
    above = networkx.DiGraph()
    above.add_nodes_from(lines)
    for branch in branches:
        upper, lower = id(line_of[branch.a]), id(line_of[branch.b])
        if upper in lines and lower in lines and upper != lower and not networkx.has_path(above, lower, upper):
            above.add_edge(upper, lower)
    return [lines[key] for key in networkx.lexicographical_topological_sort(above, key=lambda key: order[key])]
