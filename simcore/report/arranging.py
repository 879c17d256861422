"""Where nodes and branches go in a circuit diagram, in rows and columns.

A node is a horizontal line in a row. A branch stands upright in a column between the lines of its nodes, or lies in the
row where both are its neighbours there. Diodes conduct upwards where they can, sources stand left, loads right. So
nothing ever covers anything, and the same circuit is always arranged in the same way. Knows elements; draws nothing.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import networkx

from simcore.components import KINDS
from simcore.design.circuit import Circuit, Element
from simcore.design.graph import port_name
from simcore.design.overview import value_text
from simcore.figures.overview import VALVES
from simcore.figures.record import DELIVERING

MOST_BRANCHES = 150
"""What a diagram can show so that it can still be read."""

DETOUR = 20
"""Branches that a way through a load counts as."""


@dataclass(frozen=True)
class Branch:
    """A port of an element as it is drawn: current counts from a to b; owner: the element; value: its first value."""

    name: str
    owner: str
    kind: str
    value: str
    a: str
    b: str


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
        Branch(port_name(element, port), element.name, element.kind, _value(element, port.index), port.a, port.b)
        for element in circuit.elements.values()
        for port in element.ports
    ]


def _value(element: Element, index: int) -> str:
    """The data sheet's name, or the first value that is no rating; of a ratio the part that is this port's."""
    if element.sheet:
        return element.sheet
    for key in KINDS[element.kind].keys:
        given = element.given.get(key.name)
        if given is not None and not key.rating:
            if key.form == "ratio" and isinstance(given, tuple):
                given = given[index : index + 1]
            return value_text(key, given, element.unit)
    return ""


def arrange(branches: Sequence[Branch], references: Sequence[str]) -> Arrangement:
    """Arrange a circuit of one branch at least."""
    graph = _joined(branches, references)
    distance = _distances(graph, branches, references)
    level = _levels(branches, references, distance)
    column = _columns(branches, references, distance, level)
    lying = _lying(branches, column, level)
    rows = _rows(branches, column, level, lying)
    places = [
        Place(each, column[each.name], (rows[each.a], rows[each.b]), lying.get(each.name, True)) for each in branches
    ]
    return Arrangement(places, rows, max(column.values()) + 1)


def _joined(branches: Sequence[Branch], references: Sequence[str]) -> networkx.Graph:
    """Nodes joined by branches, and those of the windings of one transformer by their core. What loads the circuit is
    no way into it: it counts as a long one."""
    graph = networkx.Graph()
    first: dict[str, Branch] = {}
    for branch in branches:
        if not graph.has_edge(branch.a, branch.b) or not _loads(branch, references):
            graph.add_edge(branch.a, branch.b, weight=DETOUR if _loads(branch, references) else 1)
        other = first.setdefault(branch.owner, branch)
        if branch is not other:
            graph.add_edges_from([(other.a, branch.a), (other.a, branch.b)], weight=1)
    return graph


def _loads(branch: Branch, references: Sequence[str]) -> bool:
    """Whether a branch only takes power: a load, a clamp, or a resistor to a reference."""
    across = branch.a in references or branch.b in references
    return branch.kind in ("load", "clamp") or (branch.kind == "resistor" and across)


def _distances(graph: networkx.Graph, branches: Sequence[Branch], references: Sequence[str]) -> dict[str, int]:
    """Branches between each node and the nearest source; what no source reaches counts from its first node."""
    starts = [node for branch in branches if branch.kind in DELIVERING for node in (branch.a, branch.b)]
    unreached = [next(iter(part)) for part in networkx.connected_components(graph) if not part & set(starts)]
    found = networkx.multi_source_dijkstra_path_length(graph, {*starts, *unreached} or set(references))
    return {node: int(found[node]) for node in graph}


def _wanted(branch: Branch, references: Sequence[str], distance: dict[str, int]) -> tuple[int, float]:
    """How many levels a branch's second node should lie above its first, and how much that matters."""
    nearness = 1.0 + 1.0 / (1.0 + distance[branch.a] + distance[branch.b])
    across = branch.a in references or branch.b in references
    if branch.kind in VALVES:
        return 1, 4.0
    if branch.kind in (*DELIVERING, "transformer"):
        return (-1 if across else 0), 0.3
    if branch.kind == "capacitor":
        return -1, 0.05
    if _loads(branch, references):
        return -1, 0.02
    return 0, (0.5 if branch.kind == "resistor" else 1.0) * nearness


def _levels(branches: Sequence[Branch], references: Sequence[str], distance: dict[str, int]) -> dict[str, int]:
    """Node -> level, rising; the least weighted sum of deviations from what branches want.

    A linear programme whose matrix is that of a network, so that its corners are whole numbers (A. J. Hoffman and
    J. B. Kruskal, Integral boundary points of convex polyhedra, 1956).
    """
    import numpy as np
    from scipy.optimize import linprog

    nodes = {node: place for place, node in enumerate(distance)}
    count, edges = len(nodes), len(branches)
    cost = np.zeros(count + edges)
    rows = np.zeros((2 * edges, count + edges))
    limits = np.zeros(2 * edges)
    for at, branch in enumerate(branches):
        rise, cost[count + at] = _wanted(branch, references, distance)
        for sign, row in ((1.0, 2 * at), (-1.0, 2 * at + 1)):
            rows[row, nodes[branch.b]] += sign
            rows[row, nodes[branch.a]] -= sign
            rows[row, count + at] = -1.0
            limits[row] = sign * rise
    bounds = [(0.0, 0.0) if node in references else (-count, count) for node in nodes] + [(0.0, None)] * edges
    found = linprog(cost, rows, limits, bounds=bounds, method="highs-ds")
    return {node: round(float(found.x[place])) for node, place in nodes.items()}


def _columns(
    branches: Sequence[Branch], references: Sequence[str], distance: dict[str, int], level: dict[str, int]
) -> dict[str, int]:
    """Branch -> column, by distance from the sources, then as written, loads last; two alike, one on top of the other,
    share it."""

    def rank(branch: Branch) -> tuple[bool, bool, int, int]:
        ends = distance[branch.a], distance[branch.b]
        late = _loads(branch, references) and max(ends) > 0
        return branch.kind not in DELIVERING, late, max(ends), sum(ends)

    found: dict[str, int] = {}
    open_below: dict[tuple[str, str, int], str] = {}
    count = 0
    for branch in sorted(branches, key=rank):
        low, high = sorted((branch.a, branch.b), key=lambda node: level[node])
        shared = None
        if level[low] != level[high] and branch.kind not in DELIVERING:
            shared = open_below.pop((branch.kind, low, 1), None) or open_below.pop((branch.kind, high, -1), None)
        if shared is not None:
            found[branch.name] = found[shared]
            continue
        found[branch.name] = count
        count += 1
        if level[low] != level[high]:
            open_below.setdefault((branch.kind, high, 1), branch.name)
            open_below.setdefault((branch.kind, low, -1), branch.name)
    return found


def _lying(branches: Sequence[Branch], column: dict[str, int], level: dict[str, int]) -> dict[str, bool]:
    """The branches that can lie in a row, since all else at one end stands left of them, all else at the other right;
    whether the left one is their first."""
    at: dict[str, dict[str, int]] = {}
    for branch in branches:
        for node in (branch.a, branch.b):
            at.setdefault(node, {})[branch.name] = column[branch.name]
    found = {}
    for branch in branches:
        if branch.kind in DELIVERING or level[branch.a] != level[branch.b] or branch.a == branch.b:
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
    return min(line.columns) <= max(other.columns) + 1 and min(other.columns) <= max(line.columns) + 1


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
