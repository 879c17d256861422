"""Recorded traces: how a file is read, and what is refused of it."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

import simcore
from grammar.mistakes import DescriptionError
from grammar.quantities import AMPERE, VOLT
from simcore.components.recorded import spectrum
from simcore.design.recorded import Unreadable, trace_of

CIRCUIT = """a -> b: source e, samples = "{file}"{more}
a -> b: resistor R, 100 Ohm
reference b
observe u = voltage(a)
study s: settled, accuracy = 0.01 %
"""


def test_columns_units_and_prefixes() -> None:
    text = "time [ms],u [kV],i [mA]\r\n0,1,2\r\n1.5,-1,3\r\n"
    assert trace_of(text, None) == (((0.0, 1000.0), (1.5e-3, -1000.0)), VOLT)
    assert trace_of(text, "i") == (((0.0, 2e-3), (1.5e-3, 3e-3)), AMPERE)


def test_of_an_instant_that_stands_twice_the_later_value_counts() -> None:
    assert trace_of("time [s],u [V]\n0,1\n1,2\n1,5\n2,3\n", None)[0] == ((0.0, 1.0), (1.0, 5.0), (2.0, 3.0))


@pytest.mark.parametrize(
    ("text", "column", "what"),
    [
        ("", None, "holds no trace"),
        ("time [s]\n0\n1\n", None, "holds no trace"),
        ("u [V],time [s]\n0,1\n1,2\n", None, "first column is no time"),
        ("time,u [V]\n0,1\n1,2\n", None, "without a unit"),
        ("time [s],u [W]\n0,1\n1,2\n", None, "neither in V nor in A"),
        ("time [s],u [parsec]\n0,1\n1,2\n", None, "not known"),
        ("time [s],u [V]\n0,1\n1,two\n", None, "holds no number"),
        ("time [s],u [V]\n0,1\n1,nan\n", None, "holds no number"),
        ("time [s],u [V]\n0,1\n1\n", None, "holds no number"),
        ("time [s],u [V]\n1,1\n0,2\n", None, "times do not rise"),
        ("time [s],u [V]\n0,1\n1,2\n", "v", "no column v"),
        ("time [s],u [V]\n" + "0,0\n" * 20_001, None, "more than 20000 rows"),
    ],
)
def test_what_is_no_trace(text: str, column: str | None, what: str) -> None:
    with pytest.raises(Unreadable, match=what) as fault:
        trace_of(text, column)
    assert fault.value.cure


def test_harmonics_come_back_whatever_the_start() -> None:
    """A sum of three sines sampled from 3 ms on, whose amplitudes and phases are known."""
    times = 3e-3 + 0.02 * np.arange(1, 501) / 500
    values = 4.0 + 300 * np.sin(2 * np.pi * 50 * times + 0.3) + 20 * np.sin(2 * np.pi * 350 * times - 2.0)
    found = spectrum(list(zip(times.tolist(), values.tolist(), strict=True)), 0.02)
    assert found.mean == pytest.approx(4.0, rel=1e-12) and found.missed < 1e-12
    (first, second) = found.harmonics
    assert first == (1, pytest.approx(300.0, rel=1e-12), pytest.approx(0.3, rel=1e-9))
    assert second == (7, pytest.approx(20.0, rel=1e-12), pytest.approx(-2.0, rel=1e-9))


def recorded(folder: Path, more: str, name: str = "mains.csv") -> simcore.Design:
    rows = [f"{k / 20_000!r},{325.0 * math.sin(2.0 * math.pi * k / 400)!r}" for k in range(401)]
    (folder / "mains.csv").write_text("time [s],u_mains [V]\n" + "\n".join(rows) + "\n")
    path = folder / "design.rect"
    path.write_text(CIRCUIT.format(file=name, more=more))
    return simcore.read(path)


def test_a_recorded_sine_supplies_like_the_sine(tmp_path: Path) -> None:
    result = recorded(tmp_path, ", period = 20 ms, scale = 0.5").run("s")
    assert float(result.figure("rms(u)")) == pytest.approx(0.5 * 325.0 / math.sqrt(2.0), rel=1e-5)


def test_without_a_period_it_plays_once(tmp_path: Path) -> None:
    design = recorded(tmp_path, "")
    text = design.text.replace("study s: settled", "study s: transient, duration = 25 ms")
    result = simcore.read_text(text, "x", tmp_path).run("s")
    assert float(result.figure("valley(u)")) == pytest.approx(-325.0, rel=1e-4)
    assert float(result.figure("mean(u)")) == pytest.approx(0.0, abs=1e-3)


@pytest.mark.parametrize("name", ["../mains.csv", "/etc/hostname", "no.csv", "link.csv", "."])
def test_only_files_of_the_folder_are_read(tmp_path: Path, name: str) -> None:
    inside = tmp_path / "inside"
    inside.mkdir()
    (tmp_path / "mains.csv").write_text("time [s],u [V]\n0,1\n1,2\n")
    (inside / "link.csv").symlink_to(tmp_path / "mains.csv")
    with pytest.raises(DescriptionError, match="can't be read"):
        recorded(inside, "", name).run("s")


def test_a_trace_shorter_than_the_period(tmp_path: Path) -> None:
    with pytest.raises(DescriptionError, match="shorter than the period"):
        recorded(tmp_path, ", period = 40 ms").run("s")
