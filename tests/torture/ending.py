"""How a design ends: every study solved, or a reason that names a part of it."""

from __future__ import annotations

import re

import numpy as np

import simcore
from simcore.solve import engine

ALLOWED = 1e6
"""Work that a solution may take here: seconds instead of minutes."""


def ended(text: str, monkeypatch, allowed: float = ALLOWED) -> str:
    """"solved", or the reason, which names an element, a node or a source of the circuit; what is solved is finite."""
    monkeypatch.setattr(engine, "_WORK_AT_MOST", allowed)
    try:
        design = simcore.read_text(text, "torture")
        circuit = design.circuit
    except simcore.DescriptionError as wrong:
        assert "cure:" in str(wrong)
        return "not sound"
    end = "solved"
    for study in design.studies:
        try:
            result = design.run(study)
        except simcore.NoSolution as stop:
            end = stop.reason.name
            words = set(re.findall(r"[\w.\[\]]+", stop.detail))
            assert words & {*circuit.elements, *circuit.nodes()}, f"{stop} names no part"
            continue
        record = result.solved.record
        assert np.all(np.isfinite(record.times)) and result.solved.kirchhoff < 1e-3
        for element in circuit.elements.values():
            for port in element.ports:
                current = record.solution.current(element.name, port.name)
                voltage = record.solution.voltage(port.a, port.b)
                assert np.all(np.isfinite(current)) and np.all(np.isfinite(voltage)), element.name
    return end
