"""No kind costs the elimination its positive sums: every law's slope is known not to fall."""

from __future__ import annotations

import pytest

import simcore
from simcore.components.build import build_frame
from simcore.equations.assemble import assemble
from simcore.equations.grounding import grounded

LAW = "saturation_current = 1 nA, ideality_factor = 1.8"
PARTS = {
    "load of constant power": "p -> g: load X, power = 10 W, cut_in = 9 V, cut_out = 7 V",
    "load of constant current over time": "p -> g: load X, current = [0 s: 1 A, 1 ms: 2 A]",
    "load of resistance over time": "p -> g: load X, resistance = [0 s: 1 Ohm, 1 ms: 2 Ohm]",
    "clamp": "p -> g: clamp X, clamping = [12 V @ 1 mA, 20 V @ 10 A]",
    "inductor that saturates": "p -> g: inductor X, 1 mH, saturation_current = 1 A, series_resistance = 1 Ohm",
    "fuse": "p -> g: fuse X, resistance = 1 Ohm, melting_i2t = 1 A^2 s",
    "inrush limiter": "p -> g: inrush_limiter X, cold_resistance = 10 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K, heat_capacity = 1 J/K",
    "switch by a signal": "p -> g: switch X, control = voltage(e), closes_above = 1 V",
    "thyristor": f"p -> g: thyristor X, {LAW}, firing_angle = 30 deg, firing_reference = voltage(e)",
    "diode with all": f"p -> g: diode X, {LAW}, series_resistance = 10 mOhm, junction_capacitance = 15 pF @ 4 V, carrier_lifetime = 1 us, breakdown_voltage = 20 V, breakdown_resistance = 1 Ohm, reverse_leakage = 1 uA @ 10 V",
}


@pytest.mark.parametrize("name", PARTS)
def test_a_part_keeps_the_sums_positive(name: str) -> None:
    text = f"e -> g: source V, sine = 10 V peak, frequency = 50 Hz\ne -> p: diode D, {LAW}\n{PARTS[name]}\nreference g\n"
    circuit = simcore.read_text(text, "x").circuit
    frame = build_frame(circuit)
    system = assemble(frame, grounded(frame, circuit.references))
    assert len(system.junctions) >= 1
    assert not system.guards
