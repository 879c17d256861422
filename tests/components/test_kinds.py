"""What must hold of every component kind, whatever its law: one representative each, or several where its keys change the equations.

A kind that is added without a representative makes the first test fail.
"""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

import simcore
from grammar.reader import read_expression
from simcore.components import KINDS
from simcore.components.frame import Carried, Frame, NonlinearBranch
from simcore.equations.plain import evaluate
from simcore.equations.values import derivative
from simcore.figures.expressions import signal_of
from tests.equations.conftest import frame_from

LAW = "saturation_current = 1 nA, ideality_factor = 1.8"
FIRED = "firing_angle = 60 deg, firing_reference = voltage(a -> b)"
REPRESENTATIVES: dict[str, list[str]] = {
    "source": ["a -> b: source X, sine = 5 V peak, frequency = 50 Hz, series_resistance = 1 Ohm, series_inductance = 1 mH"],
    "three_phase": ["(a, b, c): three_phase X, sine = 5 V phase rms, frequency = 50 Hz, series_resistance = 1 Ohm\nc -> b: resistor R_c, 10 Ohm"],
    "resistor": ["a -> b: resistor X, 10 Ohm"],
    "capacitor": [
        "a -> b: capacitor X, 100 uF",
        "a -> b: capacitor X, 100 uF, series_resistance = 1 Ohm, series_inductance = 1 mH, leakage_resistance = 1 kOhm, thermal_resistance = 20 K/W",
    ],
    "inductor": [
        "a -> b: inductor X, 10 mH, series_resistance = 1 Ohm",
        "a -> b: inductor X, 10 mH, series_resistance = 1 Ohm, saturation_current = 0.5 A",
        "a -> b: inductor X, 10 mH, saturation_current = 0.5 A",
    ],
    "transformer": [
        "(a -> b) : (s -> b): transformer X, turns = 2 : 1, magnetising = 0.1 H, leakage = 1 mH : 0.2 mH, resistance = 1 Ohm : 0.2 Ohm\ns -> b: resistor R_s, 10 Ohm",
        "(a -> b) : (s -> b): transformer X, turns = 2 : 1, magnetising = 0.1 H, saturation_current = 0.2 A, resistance = 1 Ohm : 0.2 Ohm\ns -> b: resistor R_s, 10 Ohm",
        "(a -> b) : (s -> b): transformer X, rated_voltage = 8 V : 4 V, rated_power = 8 W, short_circuit_voltage = 10 %, copper_loss = 0.5 W, no_load_current = 0.1 A\ns -> b: resistor R_s, 10 Ohm",
    ],
    "diode": [
        f"a -> b: diode X, {LAW}",
        f"a -> b: diode X, {LAW}, series_resistance = 0.1 Ohm, reverse_leakage = 1 uA @ 5 V, data_temperature = 300 K, temperature = 350 K",
        f"a -> b: diode X, {LAW}, junction_capacitance = 1 nF @ 4 V, carrier_lifetime = 20 us",
        f"a -> b: diode X, {LAW}, breakdown_voltage = 4 V @ 1 mA, breakdown_resistance = 1 Ohm, in_series = 2, in_parallel = 3",
        "a -> b: diode X, forward = [0.65 V @ 10 mA, 0.8 V @ 0.3 A, 0.95 V @ 1 A]",
    ],
    "thyristor": [f"a -> b: thyristor X, {LAW}, {FIRED}", f"a -> b: thyristor X, {LAW}, {FIRED}, carrier_lifetime = 20 us"],
    "switch": [
        "a -> b: switch X, initially = closed, closed_resistance = 0.1 Ohm",
        "a -> b: switch X, closed_resistance = 0.1 Ohm, control = voltage(a -> b), closes_above = 3 V, opens_below = -3 V",
    ],
    "load": [
        "a -> b: load X, current = 0.1 A",
        "a -> b: load X, resistance = 20 Ohm",
        "a -> b: load X, resistance = [0 s: 20 Ohm, 4 ms: 20 Ohm, 4 ms: 50 Ohm, 10 ms: 50 Ohm], period = 10 ms",
        "a -> b: load X, power = 0.5 W, cut_in = 6 V, cut_out = 3 V",
        "a -> b: load X, power = [0 s: 0 W, 5 ms: 1 W], cut_in = 6 V, cut_out = 3 V, period = 5 ms",
    ],
    "fuse": ["a -> b: fuse X, resistance = 0.1 Ohm, melting_i2t = 1 mA^2 s, rated_current = 0.1 A", "a -> b: fuse X, resistance = 1 Ohm"],
    "inrush_limiter": ["a -> b: inrush_limiter X, cold_resistance = 10 Ohm, sensitivity = 2800 K, dissipation = 5 mW/K, heat_capacity = 1 mJ/K"],
    "clamp": ["a -> b: clamp X, clamping = [4 V @ 1 mA, 6 V @ 1 A]"],
}
CASES = [(kind, text) for kind, texts in REPRESENTATIVES.items() for text in texts]
NAMES = [f"{kind}-{number}" for kind, texts in REPRESENTATIVES.items() for number in range(len(texts))]
FED = [(kind, text) for kind, text in CASES if kind not in ("source", "three_phase")]
FED_NAMES = [name for name in NAMES if name.split("-")[0] not in ("source", "three_phase")]
SINE = "v -> b: source drive, sine = 10 V peak, frequency = 50 Hz\nv -> a: resistor R_v, 5 Ohm\nreference b\n"
LOADED = "a -> b: resistor R_v, 5 Ohm\nreference b\n"


def test_every_kind_has_a_representative() -> None:
    assert list(REPRESENTATIVES) == list(KINDS)
    assert all(f" {kind} X" in text for kind, text in CASES)


def framed(kind: str, text: str) -> tuple[Frame, dict[str, float]]:
    """A representative's frame, and values for all its inputs but the branches' own."""
    frame, _ = frame_from(f"{text}\n{LOADED if kind in ('source', 'three_phase') else SINE}")
    inputs = {f"p{index}": number for index, number in enumerate(frame.numbers)}
    return frame, {**inputs, "t": 1e-3, "h": 1e-5, "floor_voltage": 0.1, "floor_current": 1e-3}


def laws(kind: str, text: str) -> list[tuple[Frame, NonlinearBranch, dict[str, float]]]:
    """Its nonlinear branches with every input set, each with its flags down and up."""
    found = []
    frame, inputs = framed(kind, text)
    for up in (0.0, 1.0):
        stands = {**inputs, **{f"p{flag.position}": up for flag in frame.flags}}
        carried = [branch.carried for branch in frame.branches if isinstance(branch, NonlinearBranch) and branch.carried]
        for each in carried:
            stands[each.before.arguments[0]] = float(evaluate([each.initial], stands)[0])
        found += [(frame, branch, stands) for branch in frame.branches if isinstance(branch, NonlinearBranch)]
    return found


WITH_LAWS = [(kind, text) for kind, text in CASES if laws(kind, text)]
LAW_NAMES = [name for name, case in zip(NAMES, CASES, strict=True) if case in WITH_LAWS]
by_law = pytest.mark.parametrize(("kind", "text"), WITH_LAWS, ids=LAW_NAMES)


def spread(branch: NonlinearBranch, inputs: dict[str, float]) -> np.ndarray:
    """Voltages from well below to above where the law bends, without its kinks."""
    scale, critical = (float(evaluate([value], inputs)[0]) for value in (branch.scale, branch.critical))
    top = min(critical, 20.0 * max(scale, 0.1))
    return np.concatenate([-np.geomspace(7.0, 1e-3, 12), np.linspace(0.0113, 0.97, 20) * top])


# --- laws by themselves -----------------------------------------------------------------------------------------------------


@by_law
def test_derivatives_agree_with_differences(kind: str, text: str) -> None:
    """Of the current and of what is carried, by the branch's variable: central differences of fourth order, to 1e-6 of the slope and
    1e-9 of the value over the step, which is what rounding leaves."""
    for _, branch, inputs in laws(kind, text):
        name = branch.variable.arguments[0]
        targets = [branch.current, *([branch.carried.after] if branch.carried else [])]
        slopes = [derivative(target, branch.variable) for target in targets]
        for at in spread(branch, inputs):
            step = 1e-3 * min(max(abs(at), 1e-2), 20.0 * float(evaluate([branch.scale], inputs)[0]))
            points = [np.array([evaluate(targets, {**inputs, name: at + k * step})], dtype=float)[0] for k in (-2, -1, 1, 2)]
            found = (points[0] - 8.0 * points[1] + 8.0 * points[2] - points[3]) / (12.0 * step)
            size = np.max(np.abs(points), axis=0)
            exact = np.array([float(slope) for slope in evaluate(slopes, {**inputs, name: at})])
            assert np.all(np.abs(exact - found) <= 1e-6 * np.abs(exact) + 1e-12 * size / step + 1e-300), (at, exact, found)


@by_law
def test_no_law_delivers_at_rest(kind: str, text: str) -> None:
    """Settled (a step that lasts for ever) no law has a current against its voltage, and none at no voltage; the breakdown's picoampere
    at no voltage is what its exponential leaves there."""
    for _, branch, inputs in laws(kind, text):
        if branch.carried is not None and branch.carried.quantity == "flux":
            continue
        name, still = branch.variable.arguments[0], {**inputs, "h": 1e15}
        offset = float(evaluate([branch.offset], inputs)[0])
        for at in spread(branch, inputs):
            current = float(evaluate([branch.current], {**still, name: at - offset})[0])
            assert current * at >= -1e-20 or abs(current) < 2e-12 * 3.0, (at, current)
        nothing = float(evaluate([branch.current], {**still, name: -offset})[0])
        assert abs(nothing) <= 1e-15


@by_law
def test_what_is_carried_moves_by_the_branch_equation(kind: str, text: str) -> None:
    """Charge: i = i(long step) + dq/dt. Flux: its change is voltage times step. Heat and temperature: they rise with loss only."""
    for _, branch, inputs in laws(kind, text):
        if branch.carried is None:
            continue
        for at in spread(branch, inputs):
            for step in (1e-9, 1e-5, 1e-2):
                _check_carried(branch, branch.carried, inputs, float(at), step)


def _check_carried(branch: NonlinearBranch, carried: Carried, inputs: dict[str, float], at: float, step: float) -> None:
    stands = {**inputs, branch.variable.arguments[0]: at, "h": step}
    current, after, before = (float(each) for each in evaluate([branch.current, carried.after, carried.before], stands))
    if carried.quantity == "charge":
        at_rest = float(evaluate([branch.current], {**stands, "h": 1e30})[0])
        assert current == pytest.approx(at_rest + (after - before) / step, rel=1e-9, abs=1e-15)
        slope = float(evaluate([derivative(carried.after, branch.variable)], stands)[0])
        assert slope > 0.0 or after == 0.0 or abs(after) < 1e-30, "a capacitance is above zero"
    elif carried.quantity == "flux":
        assert after - before == pytest.approx(step * at, rel=1e-9, abs=1e-18)
        assert current * after >= 0.0
    else:
        assert carried.quantity in ("heat", "temperature")
        assert after >= before and current * at >= 0.0


# --- in a circuit ---------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("kind", "text"), FED, ids=FED_NAMES)
def test_passive_kinds_never_deliver_more_than_they_took(kind: str, text: str) -> None:
    """From rest the energy taken is at no instant below zero: three periods behind 5 Ohm, to 1e-4 of what went through."""
    result = simcore.read_text(f"{text}\n{SINE}study s: transient, duration = 60 ms\n", kind).run("s")
    record = result.solved.record
    taken = signal_of(read_expression("power(X)", "power")[0], record).running()
    through = record.power("drive").running().largest_magnitude()
    assert taken.lowest() >= -1e-4 * through
    assert result.solved.kirchhoff < 1e-6


@pytest.mark.parametrize(("kind", "text"), FED, ids=FED_NAMES)
def test_turned_round_and_driven_the_other_way_it_is_the_same(kind: str, text: str) -> None:
    """Both ends exchanged and the drive negative: currents with the other sign, the same power."""
    turned = re.sub(r"\ba\b(?= ->)", "#", text, count=1).replace("-> b", "-> a", 1).replace("#", "b", 1)
    turned = turned.replace("voltage(a -> b)", "voltage(b -> a)")
    assert turned != text
    drive = SINE.replace("drive, sine", "drive, phase = 180 deg, sine")
    study = "study s: transient, duration = 40 ms\n"
    mean = [
        float(simcore.read_text(f"{part}\n{fed}{study}", kind).run("s").figure("mean_power(drive)"))
        for part, fed in ((text, SINE), (turned, drive))
    ]
    assert mean[1] == pytest.approx(mean[0], rel=2e-3, abs=1e-9)


LIMITS = {
    "diode, reversed": (f"b -> a: diode X, {LAW}", 10.0, 1e-9, 2e-2),
    "diode, forward": (f"a -> b: diode X, {LAW}", 10.0, (10.0 - 0.98) / 5.0, 1e-2),
    "thyristor, not fired": (f"a -> b: thyristor X, {LAW}, {FIRED}", 10.0, 0.0, 0.0),
    "switch, open": ("a -> b: switch X", 10.0, 1e-8, 1e-6),
    "switch, closed": ("a -> b: switch X, initially = closed", 10.0, 10.0 / 5.001, 1e-6),
    "switch, its control not there yet": ("a -> b: switch X, control = voltage(v), closes_above = 11 V", 10.0, 1e-8, 1e-6),
    "load of power, below its cut-in": ("a -> b: load X, power = 1 W, cut_in = 11 V, cut_out = 5 V", 10.0, 1e-11, 1e-3),
    "load of current": ("a -> b: load X, current = 0.5 A", 10.0, 0.5, 1e-5),
    "load of current, on a dead rail": ("a -> b: load X, current = 0.5 A", 0.0, 0.0, 0.0),
    "fuse, whole": ("a -> b: fuse X, resistance = 1 Ohm, melting_i2t = 1 A^2 s", 10.0, 10.0 / 6.0, 1e-6),
    "inrush limiter, cold": (
        "a -> b: inrush_limiter X, cold_resistance = 15 Ohm, sensitivity = 3000 K, dissipation = 1 kW/K, heat_capacity = 1 kJ/K",
        10.0,
        0.5,
        1e-4,
    ),
    "clamp, well below": ("a -> b: clamp X, clamping = [100 V @ 1 mA, 150 V @ 10 A]", 10.0, 2e-11, 1e-2),
    "inductor, at once": ("a -> b: inductor X, 1 kH, saturation_current = 1 A", 10.0, 0.0, 0.0),
}


@pytest.mark.parametrize("name", LIMITS)
def test_off_and_on(name: str) -> None:
    """What it carries in the first millisecond of a constant voltage behind 5 Ohm; of 1 kH that is 5 uA, and a junction or load that is
    off has the conductance that keeps its nodes defined, 1e-12 S."""
    text, volts, amperes, share = LIMITS[name]
    drive = f"v -> b: source drive, constant = {volts!r} V\nv -> a: resistor R_v, 5 Ohm\nreference b\n"
    result = simcore.read_text(f"{text}\n{drive}study s: transient, duration = 1 ms\n", "limit").run("s")
    found = abs(float(result.figure("mean(current(X))")))
    assert found == pytest.approx(amperes, rel=share, abs=1e-5 if "at once" in name else 2e-11 if amperes == 0.0 else 0.0)


# --- building -----------------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("kind", "text"), CASES, ids=NAMES)
def test_building_is_repeatable(kind: str, text: str) -> None:
    """Twice the same equations and numbers; the same equations too when every value but those of angles is 3 % larger."""
    first, second = (framed(kind, text)[0] for _ in range(2))
    assert first.signature() == second.signature() and first.numbers == second.numbers
    size = r"(?<![\w.^])(\d+(?:\.\d+)?)(?= (?:[munpk]?(?:V|A|Ohm|F|H|s|W|K)\b|[munpk]?(?:V|A|W)/))"
    larger = re.sub(size, lambda match: repr(1.03 * float(match[1])), text)
    other = framed(kind, larger)[0]
    assert other.signature() == first.signature()
    assert (other.numbers, other.waveforms) != (first.numbers, first.waveforms)
    assert len(other.numbers) == len(first.numbers)
    assert all(math.isfinite(number) for number in other.numbers)


def test_every_kind_is_in_a_worked_circuit() -> None:
    worked = [simcore.read(path).circuit for path in sorted(simcore.library_folder().glob("*.rect"))]
    used = {element.kind for circuit in worked for element in circuit.elements.values()}
    assert used == set(KINDS)


@pytest.mark.parametrize("path", sorted((simcore.library_folder() / "parts").glob("*.rect")), ids=lambda path: path.stem)
def test_every_data_sheet_of_the_library_can_be_used(path) -> None:
    """Each as an element beside a source, and every file says that its values are generic."""
    text = path.read_text()
    assert "generic" in text.split("\n\n")[0] and "no make" in text.split("\n\n")[0]
    sheets = re.findall(r"^datasheet (\w+): (\w+)", text, re.MULTILINE)
    assert sheets or path.stem == "three_phase"
    for name, kind in sheets:
        ends = "a -> b" if kind != "transformer" else "(a -> b) : (s -> b)" + (" : (u -> b)" if "12V_12V" in name else "")
        more = f", {FIRED}" if kind == "thyristor" else ""
        loads = "\n".join(f"{node} -> b: resistor R_{node}, 1 kOhm" for node in "su" if f"({node} ->" in ends)
        design = simcore.read_text(f'use "parts/{path.name}"\n{ends}: {kind} X, {name}{more}\n{loads}\n{SINE}', name)
        assert design.circuit.elements["X"].kind == kind
