"""The circuit as a graph: nodes are circuit nodes, an edge is a port of an element. And which ports have no impedance.

It knows elements and ports, and no equations.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from simcore.components.transformer import windings_of
from simcore.design.circuit import Circuit, Element, Port

if TYPE_CHECKING:
    import networkx


def graph_of(circuit: Circuit) -> networkx.MultiDiGraph:
    """The circuit as a directed multigraph, edges from a port's first end to its second.

    Edge attributes: element and port, both names; kind. The edge's key is the port's full name, `T1.w2`.
    """
    import networkx

    graph = networkx.MultiDiGraph()
    graph.add_nodes_from(circuit.nodes())
    for element in circuit.elements.values():
        for port in element.ports:
            name = port_name(element, port)
            graph.add_edge(port.a, port.b, key=name, element=element.name, port=port.name, kind=element.kind)
    return graph


def joined(nodes: Sequence[str], branches: Iterable[tuple[str, str]]) -> list[list[str]]:
    """The connected components that branches make of nodes, each and all of them in the nodes' order. (Of graph_of's
    graph networkx tells the same; importing it takes longer than reading a description.)"""
    near: dict[str, list[str]] = {node: [] for node in nodes}
    for a, b in branches:
        near[a].append(b)
        near[b].append(a)
    rank = {node: index for index, node in enumerate(near)}
    seen: set[str] = set()
    parts = []
    for node in near:
        if node in seen:
            continue
        part = [node]
        seen.add(node)
        for each in part:
            fresh = [other for other in dict.fromkeys(near[each]) if other not in seen]
            seen.update(fresh)
            part += fresh
        parts.append(sorted(part, key=rank.__getitem__))
    return parts


def port_name(element: Element, port: Port) -> str:
    """The full name of a port: the element's, with the winding or phase behind a dot where it has several."""
    return f"{element.name}.{port.name}" if port.name else element.name


def is_current_source(element: Element) -> bool:
    """Whether the element forces its current."""
    return element.kind == "source" and element.unit == "A"


def forces_voltage(element: Element, port: Port) -> bool:
    """Whether a port fixes a voltage, or for a winding a ratio of voltages, whatever its current."""
    given = element.given
    if element.kind == "resistor":
        return given.get("resistance") == 0.0
    if element.kind in ("source", "three_phase"):
        impedance = any(given.get(key) for key in ("series_resistance", "series_inductance", "short_circuit_power"))
        return not is_current_source(element) and not impedance
    if element.kind == "transformer":
        windings = windings_of(given)
        return not (windings.leakage[port.index] or windings.resistance[port.index])
    return False


def is_inductive(element: Element, port: Port) -> bool:
    """Whether a port's current can't jump because an inductance is in series with it."""
    if element.kind == "transformer":
        return windings_of(element.given).leakage[port.index] > 0.0
    return element.kind == "inductor"
