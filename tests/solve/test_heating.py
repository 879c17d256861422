"""Junctions that their own loss heats."""

from __future__ import annotations

import pytest

import simcore
from simcore.solve.failure import NoSolution, Reason

LAW = "saturation_current = 1 nA, ideality_factor = 1.8, data_temperature = 300.15 K"
DRIVEN = """a -> g: source I, constant = -1 A
a -> g: diode D1, {law}, thermal_resistance = {resistance}, ambient = 298.15 K
reference g
observe u = voltage(a)
study s: operating_point
"""


def test_the_balance_at_constant_current() -> None:
    """1 A, 60 K/W, 25 degC: 353.48714 K and 0.92228574 V (computed from the law of Sze, Ng, Physics of Semiconductor
    Devices, 2007, from memory, by a bracketing root finder)."""
    result = simcore.read_text(DRIVEN.format(law=LAW, resistance="60 K/W"), "x").run("s")
    assert float(result.figure("junction_temperature(D1)")) == pytest.approx(353.48714, rel=1e-7)
    assert float(result.figure("mean(u)")) == pytest.approx(0.92228574, rel=1e-7)


def test_strings_and_parallel_diodes_share_their_loss() -> None:
    """Two in series and three in parallel carry a sixth of the loss each: as hot as one alone at a third of the current."""
    many = DRIVEN.format(law=LAW + ", in_series = 2, in_parallel = 3", resistance="60 K/W")
    one = DRIVEN.format(law=LAW, resistance="60 K/W").replace("-1 A", "-1 A / 3")
    hot, alike = (simcore.read_text(text, "x").run("s").figure("junction_temperature(D1)") for text in (many, one))
    assert float(hot) == pytest.approx(float(alike), rel=1e-9) and float(hot) > 310.0


SUPPLY = """a -> b: source w, sine = 12 V rms, frequency = 50 Hz, series_resistance = 0.5 Ohm
a -> p: diode D1, {law}, thermal_resistance = 40 K/W
p -> b: capacitor C, 2200 uF
p -> b: resistor R, 12 Ohm
reference b
study s: settled
study after_it: transient, after = s, duration = 20 ms
study cold: transient, duration = 20 ms
"""


def test_a_settled_state_is_in_balance_and_what_follows_starts_warm() -> None:
    design = simcore.read_text(SUPPLY.format(law=LAW), "x")
    settled, after, cold = (design.run(study) for study in ("s", "after_it", "cold"))
    temperature, loss = (float(settled.figure(text)) for text in ("junction_temperature(D1)", "mean_power(D1)"))
    assert temperature == pytest.approx(298.15 + 40.0 * loss, abs=0.02) and temperature > 310.0
    bound = settled.figure("junction_temperature(D1)").bound
    assert float(after.figure("junction_temperature(D1)")) == pytest.approx(temperature, abs=2.0 * bound + 1e-6)
    assert float(cold.figure("junction_temperature(D1)")) == pytest.approx(298.15, abs=1e-9)


def test_a_given_temperature_wins() -> None:
    text = DRIVEN.format(law=LAW + ", temperature = 310 K", resistance="60 K/W")
    assert float(simcore.read_text(text, "x").run("s").figure("junction_temperature(D1)")) == pytest.approx(310.0)


def test_thermal_runaway_is_named() -> None:
    """A leaky diode held at 500 V: the loss grows faster with the temperature than it is carried away."""
    text = (
        "g -> a: source V, constant = 500 V\na -> g: diode D1, saturation_current = 1 mA, ideality_factor = 1, "
        "thermal_resistance = 60 K/W\nreference g\nstudy s: operating_point\n"
    )
    with pytest.raises(NoSolution, match="D1.*cure") as failure:
        simcore.read_text(text, "x").run("s")
    assert failure.value.reason is Reason.RUNAWAY
