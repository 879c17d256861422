"""Events of every kind against closed forms, through text: switches, opened and shorted parts, values set in flight, sources' corners."""

from __future__ import annotations

import math

import numpy as np
import pytest

import simcore
from simcore.face import Result

TANK = "a -> g: capacitor C, 100 uF, initial_voltage = 10 V\na -> b: resistor R, 1 kOhm\nb -> g: switch S, closed_resistance = 1 mOhm, open_resistance = 1 GOhm"


def solved(text: str, study: str = "s") -> Result:
    return simcore.read_text(text + "\nobserve u = voltage(a)\n", "check").run(study)


def at(result: Result, time: float) -> float:
    """The observed signal at an instant."""
    from simcore.figures.expressions import observed

    return float(observed("u", result.solved.record).value(time))


def test_switch_by_its_own_time() -> None:
    """R C discharge from 20 ms on: u = 10 V exp(-(t - 20 ms) / 100 ms)."""
    text = TANK.replace("switch S,", "switch S, closes_at = 20 ms,")
    result = solved(text + "\nreference g\nstudy s: transient, duration = 120 ms")
    assert at(result, 0.019) == pytest.approx(10.0, rel=1e-5)
    assert at(result, 0.12) == pytest.approx(10.0 * math.exp(-1.0), rel=1e-4)


def test_close_and_open_by_events_overrule() -> None:
    events = "at 10 ms: close S\n at 60 ms: open S\n"
    result = solved(TANK + f"\nreference g\nstudy s: transient, duration = 120 ms {{\n{events}}}")
    assert at(result, 0.06) == pytest.approx(10.0 * math.exp(-0.5), rel=1e-4)
    assert at(result, 0.12) == pytest.approx(10.0 * math.exp(-0.5), rel=1e-4)


def test_set_changes_a_value_in_flight() -> None:
    """Time constant of 100 ms, then of 50 ms."""
    text = (
        "let R_x = 1 kOhm\na -> g: capacitor C, 100 uF, initial_voltage = 10 V\na -> g: resistor R, R_x\nreference g\n"
    )
    result = solved(text + "study s: transient, duration = 200 ms {\n at 100 ms: set R_x = 500 Ohm\n}")
    assert at(result, 0.1) == pytest.approx(10.0 * math.exp(-1.0), rel=1e-4)
    assert at(result, 0.2) == pytest.approx(10.0 * math.exp(-3.0), rel=1e-4)


def test_short_puts_a_milliohm() -> None:
    text = "e -> g: source V, constant = 10 V\ne -> a: resistor R1, 1 Ohm\na -> g: resistor R2, 1 Ohm\nreference g\n"
    result = solved(text + "study s: transient, duration = 2 ms {\n at 1 ms: short R2\n}")
    assert at(result, 0.0005) == pytest.approx(5.0, rel=1e-6)
    assert at(result, 0.0015) == pytest.approx(10.0 * 1e-3 / 1.001, rel=1e-6)


def test_an_open_source_carries_no_current_and_comes_back() -> None:
    text = "a -> g: source V, constant = 10 V, series_resistance = 1 Ohm\na -> g: resistor R, 9 Ohm\nreference g\n"
    result = solved(text + "study s: transient, duration = 3 ms {\n at 1 ms: open V\n at 2 ms: close V\n}")
    assert [round(at(result, t), 6) for t in (0.0005, 0.0015, 0.0025)] == [9.0, 0.0, 9.0]
    current = result.trace("current(V)")
    inside = (current.time > 1.1e-3) & (current.time < 1.9e-3)
    assert inside.any() and np.all(current.value[inside] == 0.0)


def test_an_opened_capacitor_keeps_its_charge() -> None:
    text = "a -> g: capacitor C, 100 uF, initial_voltage = 10 V\na -> g: resistor R, 1 kOhm\nreference g\n"
    result = solved(text + "study s: transient, duration = 200 ms {\n at 50 ms: open C\n at 150 ms: close C\n}")
    assert at(result, 0.1) == pytest.approx(0.0, abs=1e-9)
    assert at(result, 0.2) == pytest.approx(10.0 * math.exp(-1.0), rel=1e-4)


def test_after_goes_on_where_a_study_ended() -> None:
    text = (
        "let R_x = 1 kOhm\na -> g: capacitor C, 100 uF, initial_voltage = 10 V\na -> g: resistor R, R_x\nreference g\n"
    )
    text += "study first: transient, duration = 100 ms, set R_x = 2 kOhm\nstudy s: transient, after = first, duration = 100 ms"
    result = solved(text)
    assert at(result, 0.0) == pytest.approx(10.0 * math.exp(-0.5), rel=1e-4)
    assert at(result, 0.1) == pytest.approx(10.0 * math.exp(-1.0), rel=1e-4), "what the first study set still holds"


def test_after_a_settled_state_the_sources_keep_their_place() -> None:
    """Sine on R: the settled period starts at 90 deg, the study after it a quarter later."""
    text = "a -> g: source V, sine = 1 V peak, frequency = 50 Hz\na -> g: resistor R, 1 Ohm\nreference g\n"
    text += "study first: settled, angle = 90 deg\nstudy s: transient, after = first, duration = 20 ms\n"
    text += "study later: transient, after = first, angle = 180 deg, duration = 20 ms"
    assert at(solved(text, "first"), 0.0) == pytest.approx(1.0, abs=1e-9)
    assert at(solved(text), 0.005) == pytest.approx(0.0, abs=1e-4)
    assert at(solved(text, "later"), 0.005) == pytest.approx(-1.0, abs=1e-4)


def test_an_angle_counts_from_the_first_source_though_it_is_open() -> None:
    """1 V peak on 1 Ohm, closed 5 ms after 90 deg: 1 ms later it stands at 198 deg; so it does after a study that had it open."""
    text = "a -> g: source V, sine = 1 V peak, frequency = 50 Hz\na -> g: resistor R, 1 Ohm\nreference g\n"
    text += "study off: transient, duration = 7 ms, open V\nstudy s: transient, duration = 10 ms, angle = 90 deg, open V {\n at 5 ms: close V\n}\n"
    for study in (text, text.replace("angle = 90 deg, open V", "after = off, angle = 90 deg")):
        result = solved(study)
        assert at(result, 4e-3) == 0.0
        assert at(result, 6e-3) == pytest.approx(math.sin(math.radians(198.0)), rel=1e-4)


def test_corners_and_jumps_of_a_source_are_hit() -> None:
    points = "points = [0 s: 0 V, 1 ms: 4 V, 1 ms: 1 V, 2 ms: 1 V]"
    result = solved(
        f"a -> g: source V, {points}\na -> g: resistor R, 1 Ohm\nreference g\nstudy s: transient, duration = 3 ms"
    )
    trace = result.trace("u")
    at_jump = trace.value[np.isclose(trace.time, 1e-3, rtol=0, atol=1e-15)]
    assert at_jump.tolist() == pytest.approx([4.0, 1.0], abs=1e-9)
    assert float(result.figure("mean(u)")) == pytest.approx((2.0 + 1.0 + 1.0) / 3.0, rel=1e-6)
