"""Random graphs of all kinds of element, and every element of every worked circuit opened or shorted: each ends."""

from __future__ import annotations

import pytest
from ending import ended
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import simcore
from simcore.equations import kernel

LAW = "saturation_current = {} A, ideality_factor = {}"
KINDS: dict[str, st.SearchStrategy[str]] = {
    "resistor": st.floats(-6.0, 9.0).map(lambda p: f"{10.0**p!r} Ohm"),
    "capacitor": st.tuples(st.floats(-12.0, -1.0), st.sampled_from(["", ", series_resistance = 10 mOhm", ", leakage_resistance = 1 MOhm"])).map(lambda p: f"{10.0 ** p[0]!r} F{p[1]}"),
    "inductor": st.tuples(st.floats(-9.0, 0.0), st.sampled_from(["", ", series_resistance = 1 Ohm"])).map(lambda p: f"{10.0 ** p[0]!r} H{p[1]}"),
    "diode": st.tuples(st.floats(-15.0, -6.0), st.floats(0.5, 3.0), st.sampled_from(["", ", series_resistance = 50 mOhm", ", junction_capacitance = 10 pF @ 4 V", ", breakdown_voltage = 30 V @ 1 mA"])).map(lambda p: LAW.format(repr(10.0 ** p[0]), repr(p[1])) + p[2]),
    "source": st.sampled_from(["sine = 10 V peak, frequency = 50 Hz, series_resistance = 1 Ohm", "constant = 5 V, series_resistance = 1 mOhm", "constant = 10 mA", "points = [0 s: 0 V, 1 ms: 5 V, 1 ms: -5 V], series_resistance = 1 Ohm"]),
    "switch": st.sampled_from(["closes_at = 3 ms, closed_resistance = 10 mOhm, open_resistance = 1 GOhm", "initially = closed, opens_at = 2 ms, closed_resistance = 10 mOhm, open_resistance = 10 MOhm"]),
    "load": st.sampled_from(["resistance = 100 Ohm", "current = 10 mA", "power = 100 mW, cut_in = 5 V, cut_out = 2 V"]),
    "thyristor": st.floats(0.0, 170.0).map(lambda angle: LAW.format("1e-9", "1.8") + f", firing_angle = {angle!r} deg, firing_reference = voltage(n0), holding_current = 1 mA"),
    "clamp": st.just("clamping = [15 V @ 1 mA, 25 V @ 10 A]"),
    "fuse": st.just("resistance = 20 mOhm, melting_i2t = 1 A^2 s"),
    "inrush_limiter": st.just("cold_resistance = 5 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K, heat_capacity = 300 mJ/K"),
}  # fmt: skip


STUDIES = ["operating_point", "transient, duration = 4 ms", "transient, duration = 4 ms, angle = 90 deg"]


@st.composite
def graphs(draw: st.DrawFn, most: int, studies: tuple[str, ...] = tuple(STUDIES)) -> str:
    """A source and up to so many elements between any nodes; what would make it unsound is drawn as well."""
    count = draw(st.integers(2, most))
    nodes = [f"n{index}" for index in range(draw(st.integers(1, max(1, count // 2))))] + ["g"]
    lines = ["reference g", "n0 -> g: source feed, sine = 10 V peak, frequency = 50 Hz, series_resistance = 0.1 Ohm"]
    for index in range(count):
        a, b = draw(st.sampled_from(nodes)), draw(st.sampled_from(nodes))
        if a != b and draw(st.integers(0, 11)) == 0:
            lines.append(f"({a} -> {b}) : ({draw(st.sampled_from(nodes[:-1]))} -> g): transformer X{index}, turns = 1 : {draw(st.integers(1, 20))}, resistance = 10 mOhm : 10 mOhm")  # fmt: skip
        elif a != b:
            kind = draw(st.sampled_from(sorted(KINDS)))
            lines.append(f"{a} -> {b}: {kind} X{index}, {draw(KINDS[kind])}")
    lines += [f"{node} -> g: resistor tie_{node}, 10 MOhm" for node in nodes[:-1]]
    kind = draw(st.sampled_from(studies))
    return "\n".join([*lines, f"study s: {kind}, accuracy = 1 %"]) + "\n"


@settings(max_examples=150, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(graphs(14))
def test_random_graphs_end(text: str) -> None:
    with pytest.MonkeyPatch.context() as monkeypatch:
        ended(text, monkeypatch)


@settings(max_examples=130, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(graphs(14, ("operating_point",)))
def test_random_graphs_rest(text: str) -> None:
    with pytest.MonkeyPatch.context() as monkeypatch:
        ended(text, monkeypatch)


@settings(max_examples=20, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(graphs(60, ("operating_point",)))
def test_large_random_graphs_rest(text: str) -> None:
    with pytest.MonkeyPatch.context() as monkeypatch:
        ended(text, monkeypatch)


@pytest.mark.nightly
@settings(max_examples=5000, deadline=None, suppress_health_check=list(HealthCheck))
@given(graphs(60))
def test_many_random_graphs_end(text: str) -> None:
    with pytest.MonkeyPatch.context() as monkeypatch:
        ended(text, monkeypatch)


@pytest.mark.parametrize(
    "part",
    [
        f"a -> b: thyristor X, {LAW.format('1e-9', '1.8')}, firing_angle = 30 deg, firing_reference = voltage(a), holding_current = 1 mA",
        "a -> b: inrush_limiter X, cold_resistance = 5 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K, heat_capacity = 300 mJ/K",
        "a -> b: fuse X, resistance = 20 mOhm, melting_i2t = 1 A^2 s",
        "a -> b: clamp X, clamping = [15 V @ 1 mA, 25 V @ 10 A]",
        "a -> b: load X, power = 100 mW, cut_in = 5 V, cut_out = 2 V",
    ],
    ids=["thyristor", "inrush_limiter", "fuse", "clamp", "load"],
)
def test_each_kind_on_arrays_as_emitted(part: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """What is too large to be emitted is solved on arrays, kind by kind with the same figures."""
    text = f"reference g\na -> g: source e, sine = 20 V peak, frequency = 50 Hz, series_resistance = 1 Ohm\n{part}\nb -> g: resistor R, 10 Ohm\nstudy s: transient, duration = 20 ms\n"
    figures = []
    for most in (kernel.EMITTED_AT_MOST, 0):
        monkeypatch.setattr(kernel, "EMITTED_AT_MOST", most)
        figures.append(simcore.read_text(text).run("s").figure("rms(current(X))"))
    assert abs(float(figures[0]) - float(figures[1])) <= figures[0].bound + figures[1].bound + 1e-9


WORKED = {path.stem: path for path in sorted(simcore.library_folder().glob("*.rect"))}
FAULTS = [
    (stem, verb, name)
    for stem, path in WORKED.items()
    for verb in ("open", "short")
    for name in simcore.read(path).circuit.elements
]


def faulty(stem: str, verb: str, name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """The first study of a worked circuit with one of its elements open or short."""
    design = simcore.read(WORKED[stem])
    study = design.studies[0]
    lines = [line for line in WORKED[stem].read_text().splitlines() if not line.startswith(("require", "sweep"))]
    lines = [f"{line}, {verb} {name}" if line.startswith(f"study {study}:") else line for line in lines if not line.startswith("study ") or line.startswith(f"study {study}:")]  # fmt: skip
    ended("\n".join(lines) + "\n", monkeypatch)


@pytest.mark.parametrize(("stem", "verb", "name"), FAULTS[::8])
def test_a_fault_in_a_worked_circuit_ends(stem: str, verb: str, name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    faulty(stem, verb, name, monkeypatch)


@pytest.mark.nightly
@pytest.mark.parametrize(("stem", "verb", "name"), FAULTS)
def test_every_fault_in_a_worked_circuit_ends(
    stem: str, verb: str, name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    faulty(stem, verb, name, monkeypatch)
