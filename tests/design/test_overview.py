"""What `look` and the report say of a design: studies in a sentence, what was worked out of data sheets, warnings."""

from __future__ import annotations

import pytest

import simcore
from simcore.design.overview import Overview, describe, sentence
from simcore.judge.cautions import cautions
from simcore.report.look import look

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


# --- what is worked out of data sheets ----------------------------------------------------------------------------------------

FITTED = """datasheet good: diode {{ forward = [0.55 V @ 1 mA, 0.65 V @ 10 mA, 0.76 V @ 100 mA, 1 V @ 1 A] }}
a -> b: source e, sine = 12 V rms, frequency = 50 Hz
a -> p: diode D1, good
a -> p: diode D2, good
a -> p: diode D3, forward = [{points}]
p -> b: resistor R, 100 Ohm
reference b
study s: operating_point
"""


def overview(points: str) -> Overview:
    return describe(simcore.read_text(FITTED.format(points=points), "x").circuit)


def test_a_fit_is_shown_with_what_it_misses_once_for_diodes_alike() -> None:
    """Three points for three unknowns are met; of the data sheet's four, each residual stands with its point."""
    found = overview("0.6 V @ 10 mA, 0.7 V @ 100 mA, 0.9 V @ 1 A")
    assert list(found.worked_out) == ["D1, D2", "D3"]
    first, *misses = found.worked_out["D1, D2"]
    assert first.startswith("fitted: saturation_current = ") and "ideality_factor = " in first and "series_resistance" in first
    assert [miss.split(" ", 3)[3] for miss in misses] == ["550 mV @ 1 mA", "650 mV @ 10 mA", "760 mV @ 100 mA", "1 V @ 1 A"]
    assert any(miss.split()[2] == "above" for miss in misses) and any(miss.split()[2] == "below" for miss in misses)
    assert not found.warnings
    shown = look(found, "x")
    assert "Worked out" in shown and "D1, D2" in shown and "Warnings" not in shown


def test_a_poor_fit_is_a_warning_with_its_worst_point() -> None:
    """The second point lies a sixth of its voltage off what a junction could do between its neighbours; a report warns of it too."""
    points = "0.6 V @ 10 mA, 0.61 V @ 100 mA, 0.93 V @ 1 A, 1 V @ 10 A"
    (warning,) = overview(points).warnings
    assert warning == "D3: the law fits the forward points poorly: 99 mV above 610 mV @ 100 mA, 16 % of it"
    assert warning in look(overview(points), "x")
    assert warning in cautions(simcore.read_text(FITTED.format(points=points), "x").prove())
