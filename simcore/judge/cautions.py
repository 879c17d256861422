"""What a reader must be warned of: what no description says, and what this design can do to whoever touches it.

It reads solved studies; it lays nothing out.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from grammar.quantities import JOULE, SECOND, VOLT, show
from simcore.design.circuit import Circuit, Element
from simcore.design.overview import warnings_of
from simcore.figures import measure
from simcore.figures.element_figures import stored_energy
from simcore.proof import Proof

SAFE_DIRECT = 60.0
"""V: direct voltage that counts as safe to touch in the dry (IEC 62368-1:2018, table 4, ES1; from memory)."""
SAFE_PEAK = 42.4
"""V: crest of an alternating voltage that does (likewise)."""

GENERAL = (
    "This speaks of the description, not of what is built: measure before you trust.",
    "Mains voltage and charged capacitors kill. Isolation, creepage, earthing, fusing and fire are not looked at here.",
    "Local codes, and for whatever is connected to the mains licensed practice, come first.",
)

_DIGITS = 3


def cautions(proof: Proof) -> list[str]:
    """The cautions of a design, its own before the general ones."""
    return [*warnings_of(proof.circuit), *_voltages(proof), *_energy(proof), *_bleeding(proof), *GENERAL]


def _voltages(proof: Proof) -> Iterator[str]:
    crests = {element.name: _crest(proof, element) for element in proof.circuit.elements.values()}
    worst = max(crests, key=lambda name: crests[name], default="")
    if worst and crests[worst] > SAFE_PEAK:
        yield f"Up to {show(crests[worst], VOLT, _DIGITS)} stand across {worst}: not safe to touch."


def _crest(proof: Proof, element: Element) -> float:
    """The largest voltage across any of its ports in any study, V."""
    return max(
        measure.peak(study.record.window(study.record.between(port.a, port.b))).value
        for study in proof.studies.values()
        for port in element.ports
    )


def _energy(proof: Proof) -> Iterator[str]:
    energies = {name: stored_energy(study.record).value for name, study in proof.studies.items()}
    worst = max(energies, key=lambda name: energies[name], default="")
    if worst and energies[worst] > 0.0:
        yield f"Capacitors and inductors hold up to {show(energies[worst], JOULE, _DIGITS)} (in {worst})."


def _bleeding(proof: Proof) -> Iterator[str]:
    """For each pair of nodes with capacitors charged beyond what is safe: what discharges them without a source."""
    done: dict[frozenset[str], None] = {}
    for element in proof.circuit.elements.values():
        ends = _ends(element)
        if element.kind != "capacitor" or ends in done:
            continue
        done[ends] = None
        voltage = max(
            measure.peak(study.record.window(study.record.voltage(element.name))).value
            for study in proof.studies.values()
        )
        if voltage > SAFE_DIRECT:
            yield _bled(proof.circuit, ends, voltage)


def _bled(circuit: Circuit, ends: frozenset[str], voltage: float) -> str:
    """How long it takes through each resistance alone, the slowest first: loads may be off, a bleeder broken."""
    across = [element for element in circuit.elements.values() if _ends(element) == ends]
    capacitors = [element for element in across if element.kind == "capacitor"]
    start = f"{', '.join(element.name for element in capacitors)} charged to {show(voltage, VOLT, _DIGITS)}"
    ways = {element.name: found for element in across if (found := _resistance(element))}
    if not ways:
        return f"{start}: nothing across it is known to discharge it; it may stay dangerous for hours."
    charge = sum(element.given["capacitance"] for element in capacitors) * math.log(voltage / SAFE_DIRECT)
    slowest_first = sorted(ways, key=lambda name: -ways[name])
    times = ", ".join(f"{show(ways[name] * charge, SECOND, _DIGITS)} through {name}" for name in slowest_first)
    return f"{start}: {show(SAFE_DIRECT, VOLT)} are reached after {times} alone, while that stays connected."


def _resistance(element: Element) -> float | None:
    """What a resistor, or a capacitor's leakage, puts across its ends in ohm; None where there is nothing."""
    found = element.given.get({"resistor": "resistance", "capacitor": "leakage_resistance"}.get(element.kind, ""))
    return None if found is None else float(found)


def _ends(element: Element) -> frozenset[str]:
    return frozenset((element.ports[0].a, element.ports[0].b))
