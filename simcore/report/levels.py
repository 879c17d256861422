"""What an arrangement starts from: the branches of a circuit, how far each node is from a source, and on which level.

Knows elements by what they are for: sources, loads, diodes, windings; no columns and no distances on paper.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import networkx

from simcore.figures.overview import VALVES
from simcore.figures.record import DELIVERING

THROUGH_A_LOAD, THROUGH_A_DIODE = 60, 8
"""Branches that a way through one counts as: what lies before the diodes stands left of them."""


@dataclass(frozen=True)
class Branch:
    """A port of an element as it is drawn: current counts from a to b.

    owner: the element; value: its first value; index: of the port, from 0
    form: of a source "sine", "changing", "steady" or "current", of a load the letter of what stays constant, else ""
    steady: whether it is a source that never changes
    """

    name: str
    owner: str
    kind: str
    value: str
    a: str
    b: str
    index: int = 0
    form: str = ""
    steady: bool = False


@dataclass(frozen=True)
class Sketch:
    """A circuit while it is being arranged.

    distance: branches between each node and the nearest source; part: node -> which of the parts that only cores join,
    counted from the sources
    """

    branches: Sequence[Branch]
    references: Sequence[str]
    distance: dict[str, int]
    part: dict[str, int]

    @property
    def upwards(self) -> int:
        """Where diodes conduct to: 1 for upwards, to the rail that they feed; -1 for downwards, as everything flows
        where all is steady."""
        return 1 if any(_varies(each) for each in self.branches) else -1

    def feeds(self, branch: Branch) -> bool:
        """Whether a branch is where the diagram starts from: a source, but no battery beside alternating ones."""
        return _feeds(branch, self.branches)

    def loads(self, branch: Branch) -> bool:
        """Whether a branch only takes power."""
        return _loads(branch, self.references, self.branches)


def _feeds(branch: Branch, branches: Sequence[Branch]) -> bool:
    return branch.kind in DELIVERING and not (branch.steady and any(_varies(each) for each in branches))


def _varies(branch: Branch) -> bool:
    return branch.kind in DELIVERING and not branch.steady


def _loads(branch: Branch, references: Sequence[str], branches: Sequence[Branch]) -> bool:
    """A load, a clamp, a battery that is charged, or a resistor to a reference."""
    across = branch.a in references or branch.b in references
    charged = branch.kind in DELIVERING and not _feeds(branch, branches)
    return branch.kind in ("load", "clamp") or charged or (branch.kind == "resistor" and across)


def sketched(branches: Sequence[Branch], references: Sequence[str]) -> Sketch:
    """How far each node is from a source, and in which part. What loads the circuit is no way into it: it counts as a
    long one. What no source reaches counts from its first node."""
    graph = networkx.Graph()
    for branch in branches:
        loads = _loads(branch, references, branches)
        if not graph.has_edge(branch.a, branch.b) or not loads:
            way = THROUGH_A_DIODE if branch.kind in VALVES else 1
            graph.add_edge(branch.a, branch.b, weight=THROUGH_A_LOAD if loads else way)
    parts = [set(part) for part in networkx.connected_components(graph)]
    first: dict[str, Branch] = {}
    for branch in branches:
        other = first.setdefault(branch.owner, branch)
        if branch is not other:
            graph.add_edges_from([(other.a, branch.a), (other.a, branch.b)], weight=1)
    starts = [node for branch in branches if _feeds(branch, branches) for node in (branch.a, branch.b)]
    unreached = [next(iter(part)) for part in networkx.connected_components(graph) if not part & set(starts)]
    found = networkx.multi_source_dijkstra_path_length(graph, {*starts, *unreached} or set(references))
    parts.sort(key=lambda part: min(found[node] for node in part))
    distance = {node: int(found[node]) for node in graph}
    return Sketch(branches, references, distance, {node: at for at, part in enumerate(parts) for node in part})


# --- levels ----------------------------------------------------------------------------------------------------------

UPWARDS = 8.0
"""How much it matters that a diode conducts to the side that it should at all, however far."""

Wish = tuple[str, str, int, float]
"""Two nodes, how many levels the second should lie above the first, and how much that matters."""


def _wish(branch: Branch, sketch: Sketch) -> Wish:
    nearness = 1.0 + 1.0 / (1.0 + sketch.distance[branch.a] + sketch.distance[branch.b])
    across = branch.a in sketch.references or branch.b in sketch.references
    rise, weight = 0, (0.5 if branch.kind == "resistor" else 1.0) * nearness
    if branch.kind in VALVES:
        rise, weight = sketch.upwards, 4.0
    elif branch.kind in (*DELIVERING, "transformer"):
        rise, weight = (-1 if across or branch.kind == "three_phase" else 0), 0.3
    elif branch.kind == "capacitor":
        rise, weight = -1, 0.05
    elif sketch.loads(branch):
        rise, weight = -1, 0.02
    return branch.a, branch.b, rise, weight


def _wishes_of_windings(branches: Sequence[Branch]) -> list[Wish]:
    """Windings in series stand on top of each other; the first stands beside the others."""
    found = []
    by_owner: dict[str, list[Branch]] = {}
    for branch in branches:
        if branch.kind == "transformer":
            by_owner.setdefault(branch.owner, []).append(branch)
    for first, *others in by_owner.values():
        for one, other in zip(others, others[1:], strict=False):
            if one.b == other.a:
                found += [(each.a, each.b, -1, 12.0) for each in (one, other)]
        if others:
            found += [(others[0].a, first.a, 0, 0.1), (others[-1].b, first.b, 0, 0.1)]
    return found


def levels_of(sketch: Sketch) -> dict[str, int]:
    """Node -> level, rising; the least weighted sum of deviations from what branches want.

    A linear programme whose matrix is that of a network, so that its corners are whole numbers (A. J. Hoffman and
    J. B. Kruskal, Integral boundary points of convex polyhedra, 1956).
    """
    import numpy as np
    from scipy.optimize import linprog

    base = sketch.references[0] if sketch.references else next(iter(sketch.distance))
    wishes = [_wish(branch, sketch) for branch in sketch.branches] + _wishes_of_windings(sketch.branches)
    wishes += [(base, node, 0, 0.01) for node in sketch.references if node != base]
    valves = [(each.a, each.b)[:: sketch.upwards] for each in sketch.branches if each.kind in VALVES]
    wishes += [(lower, upper, 1, UPWARDS) for lower, upper in valves]
    nodes = {node: place for place, node in enumerate(sketch.distance)}
    count, edges = len(nodes), len(wishes)
    cost = np.zeros(count + edges)
    rows = np.zeros((2 * edges, count + edges))
    limits = np.zeros(2 * edges)
    for at, (first, second, rise, weight) in enumerate(wishes):
        cost[count + at] = weight
        for sign, row in ((1.0, 2 * at), (-1.0, 2 * at + 1)):
            if weight == UPWARDS and sign > 0.0:
                continue
            rows[row, nodes[second]] += sign
            rows[row, nodes[first]] -= sign
            rows[row, count + at] = -1.0
            limits[row] = sign * rise
    bounds = [(0.0, 0.0) if node == base else (-count, count) for node in nodes] + [(0.0, None)] * edges
    found = linprog(cost, rows, limits, bounds=bounds, method="highs-ds")
    return {node: round(float(found.x[place])) for node, place in nodes.items()}
