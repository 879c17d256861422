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
from simcore.figures.record import Record
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
_NOTHING = 1e-6
"""A: less is the leakage of a thyristor that is not fired."""


def cautions(proof: Proof) -> list[str]:
    """The cautions of a design, its own before the general ones."""
    own = (_never_fired, _voltages, _energy, _bleeding)
    return [*warnings_of(proof.circuit), *(line for found in own for line in found(proof)), *GENERAL]


def _never_fired(proof: Proof) -> Iterator[str]:
    """Thyristors that carry nothing in a study: as meant, or because their firing reference is too small."""
    for element in proof.circuit.elements.values():
        if element.kind != "thyristor":
            continue
        studies = [name for name, study in proof.studies.items() if _carries(study.record, element) < _NOTHING]
        if studies:
            yield (
                f"{element.name} carries nothing in {', '.join(studies)}: if it should, let its firing reference rise "
                "beyond 1 % of the circuit's largest voltage."
            )


def _carries(record: Record, element: Element) -> float:
    """The largest current of an element in the judged window, A."""
    return measure.peak(record.window(record.current(element.name))).value


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
