"""What happens to a rail, against closed forms, through text and engine: brown-out and return, load step, soft start, re-strike.

A stiff source into a peak rectifier: while a bridge conducts the rail is |V sin|, it lets go at the angle whose tangent is -omega R C,
and falls as an exponential until it meets |V sin| again (common practice, no source; roots by bisection). At a crest of 1 kV two drops of 7 mV
are 1.4e-5.
"""

from __future__ import annotations

import math

import pytest
from checking import SHARP, close, solved
from scipy.optimize import brentq, minimize_scalar

FINE = "accuracy = 0.01 %"
OMEGA = 2.0 * math.pi * 50.0
CREST, OHM, FARAD = 1000.0, 1000.0, 100e-6
DROPS = 0.02
"""V that the two diodes of a path take at most."""

BRIDGE = f"""
let V = {CREST!r} V
let R_load = {OHM!r} Ohm
a -> b: source e, sine = V peak, frequency = 50 Hz
a -> p: diode D1, {SHARP}
b -> p: diode D2, {SHARP}
g -> a: diode D3, {SHARP}
g -> b: diode D4, {SHARP}
p -> g: capacitor C, {FARAD!r} F
p -> g: resistor R, R_load
reference g
observe u = voltage(p)
study before: settled, {FINE}
"""


def lets_go(ohm: float) -> float:
    """Angle in a half cycle at which the capacitor takes over, rad."""
    return math.pi - math.atan(OMEGA * ohm * FARAD)


def meets(crest: float, volts: float, ohm: float, angle: float, earliest: float) -> float:
    """Angle from a zero crossing on, rad, at which a rail that falls from `volts` at `angle` meets the next half cycle of a crest that
    begins at the angle `earliest`, a multiple of pi."""

    def above(now: float) -> float:
        return volts * math.exp(-(now - angle) / (OMEGA * ohm * FARAD)) - crest * math.sin(now - earliest)

    return float(brentq(above, earliest, earliest + 0.5 * math.pi, xtol=1e-14))


def surge(angle: float, ohm: float) -> float:
    """Current at an angle of the half cycle of the full crest, A."""
    return OMEGA * FARAD * CREST * math.cos(angle) + CREST * math.sin(angle) / ohm


def test_brown_out_and_return() -> None:
    """The crest falls to 60 % at a zero crossing and is back three half cycles later, while the rail has not yet come down to it: the
    time to 80 % of the crest, the lowest voltage, and the surge when it comes back."""
    text = f"""{BRIDGE}study dip: transient, after = before, duration = 60 ms, {FINE} {{
        at 10 ms: set V = {0.6 * CREST!r} V
        at 40 ms: set V = {CREST!r} V
    }}"""
    result = solved(text, "dip")
    go = lets_go(OHM)
    held = CREST * math.sin(go)
    to_level = OMEGA * OHM * FARAD * math.log(held / (0.8 * CREST))
    close(result, f"time_until_below(u, {0.8 * CREST!r} V)", (go + to_level - math.pi) / OMEGA, 2e-4, exact_to=DROPS / 8e3)
    back = meets(CREST, held, OHM, go, 4.0 * math.pi)
    assert 0.6 * CREST < CREST * math.sin(back) < 0.8 * CREST
    close(result, "valley(u)", CREST * math.sin(back), 0.0, 0.3, exact_to=DROPS)
    close(result, "peak(current(D1))", surge(back, OHM), 2e-3)


def test_load_step() -> None:
    """A quarter of the resistance from 7 ms on, while the capacitor feeds the load: the valley that follows and the recharging peak."""
    text = f"""{BRIDGE}study step: transient, after = before, duration = 15 ms, {FINE} {{
        at 7 ms: set R_load = {OHM / 4.0!r} Ohm
    }}"""
    result = solved(text, "step")
    go, moment = lets_go(OHM), 7e-3 * OMEGA
    then = CREST * math.sin(go) * math.exp(-(moment - go) / (OMEGA * OHM * FARAD))
    back = meets(CREST, then, OHM / 4.0, moment, math.pi) - math.pi
    close(result, "valley(u)", CREST * math.sin(back), 0.0, 0.3, exact_to=DROPS)
    close(result, "peak(current(D2))", surge(back, OHM / 4.0), 2e-3)


def test_soft_start_relay() -> None:
    """300 V charge 1 mF through 100 Ohm; 20 ms after 200 V a relay puts 1 Ohm in parallel: both inrush currents, and when it bypasses."""
    text = f"""
    v -> g: source e, constant = 300 V
    v -> p: resistor soft, 100 Ohm
    v -> r: resistor wires, 1 Ohm
    r -> p: switch K, closed_resistance = 1 uOhm, control = voltage(p), closes_above = 200 V, opens_below = 100 V, delay = 20 ms
    p -> g: capacitor C, 1 mF
    reference g
    study start: transient, duration = 200 ms, {FINE}
    """
    result = solved(text, "start")
    bypass = 0.1 * math.log(3.0) + 0.02
    rest = 300.0 * math.exp(-bypass / 0.1)
    close(result, "peak(current(soft))", 3.0, 1e-4)
    close(result, "time_until_above(current(K), 1 A)", bypass, 1e-4)
    close(result, "peak(current(K))", rest, 2e-4)


def test_restrike_at_the_worst_phase() -> None:
    """A half-wave rail that has fallen for a period meets its source again, at the phase where the difference of both is largest: the
    rail still falls while it waits, so a little past the crest. The peak is that difference over the source's resistance. The phase
    counts from the source's sine though it is open before."""
    text = f"""
    a -> g: source e, sine = {CREST!r} V peak, frequency = 50 Hz, series_resistance = 1 Ohm
    a -> p: diode D, {SHARP}
    p -> g: capacitor C, 20 mF, initial_voltage = 900 V
    p -> g: resistor R, 1 Ohm
    reference g
    study off: transient, duration = 20 ms, open e, {FINE}
    study again: transient, after = off, duration = 0.2 ms, angle = worst for peak(current(D)), close e, {FINE}
    """
    result = solved(text, "again")

    def less(angle: float) -> float:
        return 900.0 * math.exp(-1.0 - angle / OMEGA / 20e-3) - CREST * math.sin(angle)

    worst = minimize_scalar(less, bounds=(0.5, 2.5), method="bounded", options={"xatol": 1e-9})
    assert 91.0 < math.degrees(worst.x) < 120.0
    note = next(note for note in result.solved.notes if "worst phase" in note)
    assert float(note.split(":")[1].split()[0]) == pytest.approx(math.degrees(worst.x), abs=1.0)
    close(result, "peak(current(D))", -worst.fun, 1e-3, 0.1, exact_to=0.1)
