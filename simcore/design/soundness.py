"""What is wrong with a circuit as a graph, before any equation is written: named by elements and nodes.

Loops of forced voltages and cut sets of forced currents are found by rank and by reachability. It knows which elements
force what, and no component laws.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from grammar.mistakes import Mistake
from grammar.spans import Span
from simcore.components.transformer import windings_of
from simcore.design.circuit import Circuit, Element, Port
from simcore.design.graph import forces_voltage, is_current_source, is_inductive, joined, port_name

SHOWN = 6
LARGEST_RANK = 150


def unsound(
    circuit: Circuit, spans: Mapping[str, Span | None], reference_spans: Mapping[str, Span | None]
) -> list[Mistake]:
    """The mistakes of a circuit's graph. spans: where each node is first named; reference_spans: where as a
    reference."""
    mistakes = _shorted(circuit) + _used_once(circuit, spans) + _references(circuit, spans, reference_spans)
    if not mistakes:
        mistakes = contradictions(circuit)
    if not mistakes:
        mistakes = _singular(circuit)
    return mistakes


def contradictions(circuit: Circuit) -> list[Mistake]:
    """What ideal elements force against one another. A part that something taken out leaves alone is no mistake."""
    return _voltage_loops(circuit) + _current_cuts(circuit)


def parts_of(circuit: Circuit) -> list[list[str]]:
    """The nodes of each part of the circuit; windings join no parts."""
    ports = (port for element in circuit.elements.values() for port in element.ports)
    return joined(circuit.nodes(), ((port.a, port.b) for port in ports))


def _shorted(circuit: Circuit) -> list[Mistake]:
    return [
        Mistake(
            f"{port_name(element, port)} is shorted on itself: both its ends are node {port.a}",
            "Give its two ends different nodes, or take it out.",
            element.span,
        )
        for element in circuit.elements.values()
        for port in element.ports
        if port.a == port.b
    ]


def _used_once(circuit: Circuit, spans: Mapping[str, Span | None]) -> list[Mistake]:
    uses: dict[str, list[str]] = {}
    for element in circuit.elements.values():
        ends = dict.fromkeys(end for port in element.ports for end in (port.a, port.b))
        counted = [end for port in element.ports for end in (port.a, port.b)]
        for end in ends:
            uses.setdefault(end, []).extend([element.name] * counted.count(end))
    return [
        Mistake(
            f"node {node} is used once, by {names[0]}",
            "Check its name, join something to it, or take it out.",
            spans.get(node) or circuit.elements[names[0]].span,
        )
        for node, names in uses.items()
        if len(names) == 1
    ]


def _references(
    circuit: Circuit, spans: Mapping[str, Span | None], reference_spans: Mapping[str, Span | None]
) -> list[Mistake]:
    """Each part of the circuit has one reference."""
    found = []
    for part in parts_of(circuit):
        inside = [node for node in circuit.references if node in part]
        if len(inside) > 1:
            what = f"nodes {' and '.join(inside)} are both references of one part of the circuit"
            found.append(
                Mistake(what, "Keep one: a part has one node that counts as 0 V.", reference_spans.get(inside[1]))
            )
        if not inside and not circuit.references:
            what = "no node counts as 0 V"
            cure = f"Add `reference {part[-1]}`, or the node you measure from."
            found.append(Mistake(what, cure, spans.get(part[0])))
        elif not inside:
            what = f"{_nodes(part)} {'have' if len(part) > 1 else 'has'} no path to a reference"
            names = ", ".join([*circuit.references, part[-1]])
            cure = f"Join this part to the rest, or give it its own, as in `reference {names}`."
            found.append(Mistake(what, cure, spans.get(part[0])))
    return found if circuit.references else found[:1]


def _nodes(names: Sequence[str]) -> str:
    shown = ", ".join(names[:SHOWN]) + (f" and {len(names) - SHOWN} more" if len(names) > SHOWN else "")
    return f"{'node' if len(names) == 1 else 'nodes'} {shown}"


def _list(names: Sequence[str]) -> str:
    shown = list(names[:SHOWN])
    if len(names) > SHOWN:
        return ", ".join(shown) + f" and {len(names) - SHOWN} more"
    return " and ".join(([", ".join(shown[:-1])] if len(shown) > 1 else []) + shown[-1:])


# --- forced voltages -------------------------------------------------------------------------------------------------


def weights_of(element: Element, port: Port) -> dict[str, float]:
    """A port's voltage as a sum of unknowns: its two nodes and, for a winding, the volts per turn of its core."""
    weights = {port.a: 1.0, port.b: -1.0}
    if element.kind == "transformer":
        turns = windings_of(element.given).turns
        weights[f"{element.name} core"] = -turns[port.index] / max(turns)
    return weights


def _voltage_loops(circuit: Circuit) -> list[Mistake]:
    """Forced voltages must be independent of one another: each row that is a sum of earlier ones closes a loop."""
    rows: list[tuple[str, dict[str, float], dict[int, float]]] = []
    names: list[tuple[Element, Port]] = []
    found = []
    for element in circuit.elements.values():
        for port in element.ports:
            if not forces_voltage(element, port):
                continue
            row, made_of = weights_of(element, port), {len(names): 1.0}
            names.append((element, port))
            for pivot, other, parts in rows:
                factor = row.get(pivot, 0.0) / other[pivot]
                if factor:
                    row = _less(row, other, factor)
                    made_of = _less(made_of, parts, factor)
            if row:
                rows.append((max(row, key=lambda unknown: abs(row[unknown])), row, made_of))
            else:
                found.append(_loop([names[index] for index in sorted(made_of)]))
    return found


def _less(row: dict, other: Mapping, factor: float) -> dict:
    """row - factor times other, without what cancels."""
    result = dict(row)
    for unknown, weight in other.items():
        result[unknown] = result.get(unknown, 0.0) - factor * weight
    return {unknown: weight for unknown, weight in result.items() if abs(weight) > 1e-9}


def _loop(branches: Sequence[tuple[Element, Port]]) -> Mistake:
    names = [port_name(element, port) for element, port in branches]
    nodes = list(dict.fromkeys(end for _, port in branches for end in (port.a, port.b)))
    windings = any(element.kind == "transformer" for element, _ in branches)
    what = "voltage sources and ideal windings" if windings else "voltage sources"
    cure = "Give one of them a resistance: `series_resistance = 10 mOhm` for a source"
    cure += ", `resistance` for a winding." if windings else "."
    return Mistake(f"a loop of {what}: {_list(names)}, over {_nodes(nodes)}", cure, branches[-1][0].span)


# --- forced currents -------------------------------------------------------------------------------------------------


def _current_cuts(circuit: Circuit) -> list[Mistake]:
    """A current source needs a way back that is neither a current source nor an inductor."""
    found: list[Mistake] = []
    for with_inductors in (False, True):
        ways: list[tuple[str, str]] = []
        removed: list[tuple[Element, Port]] = []
        for element in circuit.elements.values():
            for port in element.ports:
                if is_current_source(element) or (with_inductors and is_inductive(element, port)):
                    removed.append((element, port))
                else:
                    ways.append((port.a, port.b))
        found = _cuts(joined(circuit.nodes(), ways), removed)
        if found:
            return found
    return found


def _cuts(parts: Sequence[Sequence[str]], removed: Sequence[tuple[Element, Port]]) -> list[Mistake]:
    side: dict[str, int] = {}
    for index, part in enumerate(parts):
        side.update(dict.fromkeys(part, index))
    found: list[Mistake] = []
    told: dict[int, None] = {}
    for source, port in removed:
        if not is_current_source(source) or side[port.a] == side[port.b]:
            continue
        ends = [side[port.a], side[port.b]]
        if any(end in told for end in ends):
            continue
        cut = min(ends, key=lambda index: len(parts[index]))
        told[cut] = None
        crossing = [(e, p) for e, p in removed if (side[p.a] == cut) != (side[p.b] == cut)]
        names = list(dict.fromkeys(port_name(e, p) for e, p in crossing))
        inductors = any(not is_current_source(e) for e, _ in crossing)
        what = "current sources and inductors" if inductors else "current sources"
        cure = "Give the current another way, such as a resistor across one of them."
        found.append(
            Mistake(
                f"a cut set of {what}: only {_list(names)} lead to {_nodes(parts[cut])}"
                if len(names) > 1
                else f"only current source {names[0]} leads to {_nodes(parts[cut])}",
                cure,
                source.span,
            )
        )
    return found


# --- the rest -----------------------------------------------------------------------------------------------


def _singular(circuit: Circuit) -> list[Mistake]:
    """Whether the equations determine everything once each impedance is some positive one; the last resort.

    A null vector names what is left open. Too large a circuit is left to the solver.
    """
    import numpy

    unknowns = _unknowns(circuit)
    if len(unknowns) > LARGEST_RANK:
        return []
    matrix = _matrix(circuit, unknowns)
    _, values, vectors = numpy.linalg.svd(matrix)
    if not len(values) or values[-1] > 1e-9 * values[0]:
        return []
    weights = numpy.abs(vectors[-1])
    names = [name for name, index in unknowns.items() if weights[index] > 1e-6 * weights.max()]
    plain = [name.removesuffix(" current").removesuffix(" core") for name in names]
    known = [name for name in dict.fromkeys(plain) if name]
    holders = [name.split(".w")[0] for name in known]
    first = next((circuit.elements[name] for name in holders if name in circuit.elements), None)
    what = f"ideal elements leave voltages or currents undetermined at {_list(known)}"
    cure = "Give the transformer a magnetising inductance or its windings a resistance, or join a resistor across them."
    span = first.span if first is not None else next(iter(circuit.elements.values())).span
    return [Mistake(what, cure, span)]


def _unknowns(circuit: Circuit) -> dict[str, int]:
    """Nodes but the references, cores and forced currents, numbered."""
    names = [node for node in circuit.nodes() if node not in circuit.references]
    for element in circuit.elements.values():
        names += [f"{element.name} core"] if element.kind == "transformer" else []
        names += [f"{port_name(element, port)} current" for port in element.ports if forces_voltage(element, port)]
    return {name: index for index, name in enumerate(names)}


def _matrix(circuit: Circuit, unknowns: Mapping[str, int]):  # type: ignore[no-untyped-def]
    """Modified nodal equations with a conductance of its own, between 1 and 2, for each impedance."""
    import numpy

    matrix = numpy.zeros((len(unknowns), len(unknowns)))
    count = 0
    for element in circuit.elements.values():
        if element.kind == "transformer" and windings_of(element.given).magnetising is not None:
            core = unknowns[f"{element.name} core"]
            matrix[core, core] += 1.0
        for port in element.ports:
            count += 1
            weights = {unknowns[name]: w for name, w in weights_of(element, port).items() if name in unknowns}
            if is_current_source(element):
                continue
            if forces_voltage(element, port):
                row = unknowns[f"{port_name(element, port)} current"]
                for column, weight in weights.items():
                    matrix[row, column] += weight
                    matrix[column, row] += weight
                continue
            conductance = 1.0 + (count * 0.6180339887498949) % 1.0
            for i, left in weights.items():
                for j, right in weights.items():
                    matrix[i, j] += conductance * left * right
    return matrix
