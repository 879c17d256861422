"""Junctions that their own loss heats."""

from __future__ import annotations

import math

import pytest
from scipy.optimize import brentq, minimize_scalar

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


# --- runaway ------------------------------------------------------------------------------------------------------------------

LEAKY = """g -> a: source V, constant = 100 V
a -> g: diode D1, saturation_current = 1 nA, ideality_factor = 2, reverse_leakage = 1 mA @ 100 V, thermal_resistance = {resistance!r} K/W
reference g
study s: operating_point
"""


def lost(kelvin: float) -> float:
    """Loss in W at 100 V in reverse, of the leakage alone, by the law of Sze, Ng, Physics of Semiconductor Devices, 2007 (from memory):
    0.1 W times (T / T_0)^(3/n) exp(E_g / (n k) (1 / T_0 - 1 / T)), n = 2."""
    return 0.1 * (kelvin / 298.15) ** 1.5 * math.exp(1.12 * 1.602176634e-19 / (2.0 * 1.380649e-23) * (1.0 / 298.15 - 1.0 / kelvin))


def carried_away_at_most() -> tuple[float, float]:
    """The largest thermal resistance in K/W with a balance, and the temperature of that balance in K: where the line of what is carried
    away touches the curve of what is lost."""
    found = minimize_scalar(lambda kelvin: -(kelvin - 298.15) / lost(kelvin), bounds=(300.0, 400.0), method="bounded", options={"xatol": 1e-9})
    return -float(found.fun), float(found.x)


@pytest.mark.parametrize("share", [0.05, 0.7, 0.98])
def test_a_leaky_junction_settles_at_the_first_balance(share: float) -> None:
    most, hottest = carried_away_at_most()
    kelvin = brentq(lambda at: at - 298.15 - share * most * lost(at), 298.15, hottest, xtol=1e-10)
    result = simcore.read_text(LEAKY.format(resistance=share * most), "x").run("s")
    assert float(result.figure("junction_temperature(D1)")) == pytest.approx(kelvin, abs=2e-5)


@pytest.mark.parametrize("share", [1.02, 1.5, 5.0, 40.0])
def test_beyond_the_last_balance_it_runs_away(share: float) -> None:
    """Nothing but the way that its losses grow tells it; the message says what they are, and what of them is carried away."""
    with pytest.raises(NoSolution, match=r"thermal runaway.*D1, at .* degC: of .*W are carried away") as failure:
        simcore.read_text(LEAKY.format(resistance=share * carried_away_at_most()[0]), "x").run("s")
    assert failure.value.reason is Reason.RUNAWAY


def test_a_hot_state_beyond_a_runaway_is_no_balance() -> None:
    """Behind a resistance the loss is bounded, and there is a balance at which the diode blocks nothing any more: not one that a
    junction which starts cold comes to without having run away."""
    text = LEAKY.replace("g -> a: source V, constant = 100 V", "g -> a: source V, constant = 100 V, series_resistance = 50 Ohm")
    with pytest.raises(NoSolution, match="thermal runaway"):
        simcore.read_text(text.format(resistance=3.0 * carried_away_at_most()[0]), "x").run("s")


def test_junctions_side_by_side_that_share_unevenly_do_not_run_away() -> None:
    """The worst cooled of three takes current from the others as it warms up, more than twice its first loss; there is a balance."""
    diodes = "".join(f"a -> g: diode D{k}, {LAW}, thermal_resistance = {ohm} K/W\n" for k, ohm in ((1, 60), (2, 1), (3, 1)))
    result = simcore.read_text(f"a -> g: source I, constant = -3 A\n{diodes}reference g\nstudy s: operating_point\n", "x").run("s")
    loss, kelvin = (float(result.figure(text)) for text in ("mean_power(D1)", "junction_temperature(D1)"))
    assert kelvin == pytest.approx(298.15 + 60.0 * loss, abs=1e-5)
    assert float(result.figure("mean(current(D1))")) > 2.0


# --- capacitors ---------------------------------------------------------------------------------------------------------------

RIPPLE = """g -> a: source I, sine = 1.5 A rms, frequency = 100 Hz
a -> g: capacitor C1, 1000 uF, series_resistance = 100 mOhm, thermal_resistance = 20 K/W, endurance = 4000 h @ 105 degC, rated_temperature = 105 degC
a -> g: resistor R, 1 MOhm
reference g
ambient 60 degC
study s: settled
study after_it: transient, duration = 10 ms, after = s
study cold: transient, duration = 10 ms
require s: ratings of C1, margin = 10 %
require s: life(C1) >= 40000 h
"""


def test_the_core_of_a_capacitor_and_its_life() -> None:
    """60 degC and 20 K/W times (1.5 A)^2 times 0.1 Ohm = 64.5 degC: 4000 h times 2^((105 - 64.5) / 10) = 66 257 h (doubled each 10 K:
    common practice, no source)."""
    design = simcore.read_text(RIPPLE, "x")
    result = design.run("s")
    assert float(result.figure("core_temperature(C1)")) == pytest.approx(60.0 + 273.15 + 4.5, abs=1e-4)
    assert float(result.figure("life(C1)")) / 3600.0 == pytest.approx(4000.0 * 2.0**4.05, rel=1e-4)
    assert [str(verdict.state) for verdict in result.verdicts] == ["holds", "holds"]
    assert float(design.run("after_it").figure("peak(temperature(C1))")) == pytest.approx(337.65, abs=1e-3)
    cold = design.run("cold")
    assert float(cold.figure("peak(temperature(C1))")) == pytest.approx(333.15) and "transient" in cold.figure("life(C1)").note


def test_the_core_does_not_make_a_study_dearer() -> None:
    """Its temperature changes no equation, so nothing is solved for it."""
    works = [
        simcore.read_text(text, "x").run("s").solved.record.solution.work
        for text in (RIPPLE, RIPPLE.replace("thermal_resistance = 20 K/W", "temperature = 64.5 degC"))
    ]
    assert works[0] == works[1]


def test_a_measured_core_temperature_wins() -> None:
    text = RIPPLE.replace("thermal_resistance = 20 K/W", "thermal_resistance = 20 K/W, temperature = 85 degC")
    result = simcore.read_text(text, "x").run("s")
    assert float(result.figure("life(C1)")) / 3600.0 == pytest.approx(16000.0)


def test_what_all_rounds_cost_is_counted() -> None:
    """The state at the balance is looked for from the one before it: more than a round at one temperature in all, each starting from the last."""
    cold, warm = (
        simcore.read_text(SUPPLY.format(law=LAW.replace(", data_temperature = 300.15 K", "")).replace("thermal_resistance = 40 K/W", heat), "x").run("s").solved.record.solution
        for heat in ("temperature = 310 K, data_temperature = 300.15 K", "thermal_resistance = 40 K/W, data_temperature = 300.15 K")
    )
    for name in ("steps", "solves", "periods"):
        assert cold.statistics[name] < warm.statistics[name] < 5.0 * cold.statistics[name], name
    assert cold.work < warm.work
