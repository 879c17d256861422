"""Studies in a sentence, as `look` and the report say them."""

from __future__ import annotations

import pytest

import simcore
from simcore.design.overview import sentence

CIRCUIT = """
a -> g: source mains, sine = 10 V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> g: resistor R1, 100 Ohm
reference g
study s: transient, duration = 100 ms, angle = {angle}
"""


@pytest.mark.parametrize(
    ("angle", "start"),
    [
        ("90 deg", "starting at 90 deg of the first sine"),
        (
            "worst for peak(current(D1))",
            "starting at the phase of the first sine that makes peak(current(D1)) highest",
        ),
        ("worst for -mean(voltage(p))", "starting at the phase of the first sine that makes mean(voltage(p)) lowest"),
    ],
)
def test_a_sentence_says_at_which_phase_a_study_starts(angle: str, start: str) -> None:
    circuit = simcore.read_text(CIRCUIT.format(angle=angle)).circuit
    assert sentence(circuit.studies["s"]) == f"from rest, for 100 ms, {start}"
