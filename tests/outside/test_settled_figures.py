"""Every settled figure of `waveforms/settled-figures.csv`: mean, rms, largest and smallest of each signal of the waveform circuits
(Newton on the period map outside, with general-purpose integrators; 1e-9 on means and rms values, 1e-7 on extrema)."""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path

import pytest
from checking import DIODE, close, solved
from test_waveforms import BRIDGE, CASCADE, HALF_WAVE, INDUCTIVE, SERIES, SIX_PULSE

from simcore.face import Result

RECOVERY = f"""
a -> g: source e, sine = 50 V peak, frequency = 50 kHz
a -> x: resistor R, 100 Ohm
x -> g: diode D, {DIODE}, carrier_lifetime = 0.5 us
x -> g: capacitor C_p, 50 pF
reference g
study settled: settled, accuracy = 0.01 %
"""

# The circuit of each letter of the file, and what its signals are there, with the size that "nothing" is a share of.
CIRCUITS = {
    "W1": (
        BRIDGE,
        {
            "u_out_V": ("voltage(plus)", 13.2),
            "i_source_A": ("-current(e)", 3.7),
            "i_D1_A": ("current(D1)", 3.7),
            "i_D2_A": ("current(D2)", 3.7),
            "p_D1_W": ("power(D1)", 3.8),
            "p_load_W": ("power(R_L)", 12.0),
        },
    ),
    "W7": (
        SERIES,
        {
            "v_C_V": ("voltage(plus) - current(C1) * 45 mOhm", 13.2),
            "u_out_V": ("voltage(plus)", 13.2),
            "i_source_A": ("-current(e)", 3.6),
            "i_D1_A": ("current(D1)", 3.6),
            "i_C_A": ("current(C1)", 2.7),
            "p_D1_W": ("power(D1)", 3.7),
            "p_load_W": ("power(R_L)", 12.0),
        },
    ),
    "W2": (
        CASCADE,
        {
            "v_C1_V": ("voltage(C1)", 99.0),
            "x_V": ("voltage(x)", 197.0),
            "u_out_V": ("voltage(out)", 196.0),
            "i_D1_A": ("current(D1)", 0.07),
            "i_D2_A": ("current(D2)", 0.064),
        },
    ),
    "W3": (
        HALF_WAVE,
        {"u_out_V": ("voltage(out)", 9.2), "i_D_A": ("current(D)", 0.157), "p_D_W": ("power(D)", 0.148)},
    ),
    "W4": (
        INDUCTIVE + "study settled: settled, accuracy = 0.01 %\n",
        {"i_A": ("current(L)", 1.43), "v_D_V": ("voltage(D)", 20.0)},
    ),
    "W5": (RECOVERY, {"v_D_V": ("voltage(D)", 50.0), "i_A": ("current(R)", 0.5)}),
    "W6": (
        SIX_PULSE,
        {
            "u_out_V": ("voltage(plus)", 554.0),
            "i_L1_A": ("-current(e.L1)", 16.7),
            "i_D1_A": ("current(D1)", 16.7),
            "i_D4_A": ("current(D4)", 16.7),
            "p_D1_W": ("power(D1)", 18.3),
            "v_D1_V": ("voltage(D1)", 555.0),
        },
    ),
}
LEAK = 1e-6
"""Share of a crest that the leak across a blocked diode may add; the outside equations have none."""
FLOATING = 2e-3
"""The same for the diode voltage of the six-pulse bridge: while no diode conducts its rails float, and only leakages place them. Ours
leak by a conductance; outside the tails of two exponentials balance, of less than 1e-30 A."""


@cache
def settled(circuit: str, accuracy: str) -> Result:
    text = CIRCUITS[circuit][0].replace("DURATION", "20 ms").replace("ANGLE", "")
    return solved(text.replace("settled: settled, accuracy = 0.01 %", f"settled: settled, accuracy = {accuracy}"), "settled")


def rows() -> list[dict[str, str]]:
    with (Path(__file__).with_name("waveforms") / "settled-figures.csv").open() as file:
        return list(csv.DictReader(file))


def test_no_row_is_left_out() -> None:
    named = {(circuit, signal) for circuit, (_, signals) in CIRCUITS.items() for signal in signals}
    assert {(row["circuit"], row["signal"]) for row in rows()} == named and len(rows()) == 31


@pytest.mark.parametrize("accuracy", ["1 %", "0.1 %", "0.01 %"])
@pytest.mark.parametrize("row", rows(), ids=lambda row: f"{row['circuit']}-{row['signal']}")
def test_settled_row(row: dict[str, str], accuracy: str) -> None:
    """Five times the accuracy asked for, of the crest; each printed bound is held to the true error in the same breath."""
    signal, crest = CIRCUITS[row["circuit"]][1][row["signal"]]
    result = settled(row["circuit"], accuracy)
    figures = {
        "mean": f"mean({signal})",
        "rms": f"rms({signal})",
        "max": f"valley({signal}) + ripple({signal})",
        "min": f"valley({signal})",
    }
    allowed = 5.0 * float(accuracy.split()[0]) / 100.0 * crest
    for column, figure in figures.items():
        exact_to = LEAK
        if (row["circuit"], row["signal"]) == ("W6", "v_D1_V"):
            exact_to, allowed = FLOATING, max(allowed, FLOATING * crest)
        close(result, figure, float(row[column]), 0.0, allowed, exact_to * crest)
