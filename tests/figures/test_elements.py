"""Figures of elements and expressions, on solutions made of closed forms."""

import inspect
import math

import numpy as np
import pytest

from grammar.description import Binary, Branch, Call, Name, Negative, Number, Part
from grammar.quantities import AMPERE, JOULE, NONE, VOLT, WATT
from simcore.design.circuit import Change, Circuit, Element, Observed, PlannedStudy, Port
from simcore.figures.catalogue import FIGURES
from simcore.figures.evaluate import computing, figure_of, figures_with_bounds
from simcore.figures.expressions import name_text, signal_of
from simcore.figures.figure import CHANCE, SAFETY
from simcore.figures.overview import balance, diode_rows, signal_rows
from simcore.figures.record import Record, UnknownName
from simcore.figures.signal import SignalError
from tests.figures.fake_solution import FakeSolution, branch, circuit_of, steady, zero

FREQUENCY, PERIOD = 50.0, 0.02
OMEGA = 2.0 * math.pi * FREQUENCY
INTERPOLATION = 1e-8


def name(text: str) -> Name:
    return Name((Part(text),))


def call(function: str, *arguments: object, study: str | None = None) -> Call:
    parts = tuple(name(part) if isinstance(part, str) else part for part in arguments)
    return Call(function, parts, study)  # type: ignore[arg-type]


def half_wave(crest: float = 10.0, pieces: int = 2000, **changes: object) -> FakeSolution:
    """An ideal diode from a sine source into 5 Ohm: node s is the source, u the output."""

    def output(t: np.ndarray) -> np.ndarray:
        return np.maximum(crest * np.sin(OMEGA * t), 0.0)

    circuit = circuit_of(
        [
            branch("mains", "source", "s", "0"),
            branch("D1", "diode", "s", "u"),
            branch("R_L", "resistor", "u", "0", resistance=5.0),
        ],
        observes={"u_out": Observed("u_out", Call("voltage", (name("u"),)), "V", "output")},
    )
    values: dict[str, object] = {"period": PERIOD, **changes}
    return FakeSolution(
        circuit,
        np.linspace(0.0, PERIOD, pieces + 1),
        {"s": lambda t: crest * np.sin(OMEGA * t), "u": output, "0": zero},
        {
            ("mains", ""): lambda t: -output(t) / 5.0,
            ("D1", ""): lambda t: output(t) / 5.0,
            ("R_L", ""): lambda t: output(t) / 5.0,
        },
        **values,  # type: ignore[arg-type]
    )


@pytest.fixture(scope="module")
def records() -> dict[str, Record]:
    return {"run": Record(half_wave()), "other": Record(half_wave(crest=20.0))}


def value(expression: object, records: dict[str, Record]) -> float:
    figure = figure_of(expression, "run", records)  # type: ignore[arg-type]
    assert figure.defined, figure.note
    return figure.value


@pytest.mark.parametrize("name", FIGURES)
def test_every_declared_figure_is_computed_from_a_record_and_its_arguments(name: str) -> None:
    accepted = inspect.signature(computing(FIGURES[name])).parameters
    assert len(accepted) == 1 + len(FIGURES[name].arguments)


def test_names_are_written_as_the_circuit_holds_them() -> None:
    two = Name((Part("B", (Number(2.0),)), Part("mid", (Number(1.0), Number(0.0)))))
    assert name_text(two) == "B[2].mid[1][0]"


def test_figures_of_a_half_wave_rectifier(records: dict[str, Record]) -> None:
    # Rows 2A1 and 2B1 of the published resistive-load figures (Millman and Halkias 1972, from memory; computed): mean
    # V_m/pi, rms V_m/2, reverse peak V_m; the power factor of the source is 1/sqrt(2), and so is its utilisation by the
    # load's whole power (row 2B1 counts the DC power only, 4/pi^2 of that).
    assert value(call("mean", "u_out"), records) == pytest.approx(10.0 / math.pi, rel=INTERPOLATION)
    assert value(call("reverse_peak", "D1"), records) == pytest.approx(10.0, rel=INTERPOLATION)
    assert value(call("mean_power", "R_L"), records) == pytest.approx(5.0, rel=INTERPOLATION)
    assert value(call("mean_power", "mains"), records) == pytest.approx(-5.0, rel=INTERPOLATION)
    assert value(call("energy", "R_L"), records) == pytest.approx(5.0 * PERIOD, rel=INTERPOLATION)
    assert value(call("apparent_power", "mains"), records) == pytest.approx(5.0 * math.sqrt(2.0), rel=INTERPOLATION)
    assert value(call("power_factor", "mains"), records) == pytest.approx(math.sqrt(0.5), rel=INTERPOLATION)
    assert value(call("displacement_factor", "mains"), records) == pytest.approx(1.0, rel=INTERPOLATION)
    assert value(call("displacement_factor", "R_L"), records) == pytest.approx(1.0, rel=INTERPOLATION)
    assert value(call("efficiency", "mains", "R_L"), records) == pytest.approx(1.0, rel=INTERPOLATION)
    assert value(call("utilisation", "mains", "R_L"), records) == pytest.approx(math.sqrt(0.5), rel=INTERPOLATION)
    assert value(call("i2t", call("current", "D1")), records) == pytest.approx(PERIOD, rel=INTERPOLATION)
    assert value(call("conduction_angle", "D1"), records) == pytest.approx(math.pi - 2e-3, abs=1e-6)
    assert value(call("junction_temperature", "D1"), records) == 298.15
    assert value(call("harmonic", call("current", "D1"), Number(2.0)), records) == pytest.approx(
        2.0 * 0.212206591 / math.sqrt(2.0), rel=INTERPOLATION
    )


def test_arithmetic_and_figures_at_other_studies(records: dict[str, Record]) -> None:
    difference = Binary("-", call("mean", "u_out", study="other"), call("mean", "u_out"))
    assert value(difference, records) == pytest.approx(10.0 / math.pi, rel=INTERPOLATION)
    half = Binary("/", Negative(call("rms", "u_out")), Number(2.0))
    assert value(half, records) == pytest.approx(-2.5, rel=INTERPOLATION)
    squared = Binary("^", call("rms", "u_out"), Number(2.0))
    assert figure_of(squared, "run", records).dimension == VOLT * VOLT
    assert value(call("sqrt", squared), records) == pytest.approx(5.0, rel=INTERPOLATION)
    assert value(call("max", call("rms", "u_out"), Number(7.0, "V")), records) == 7.0
    missing = figure_of(call("mean", "u_out", study="none"), "run", records)
    assert not missing.defined and "study none was not solved" in missing.note


def test_what_has_no_value_says_why(records: dict[str, Record]) -> None:
    cases = {
        "divides by zero": Binary("/", call("mean", "u_out"), Number(0.0)),
        "different units": Binary("+", call("mean", "u_out"), call("mean_power", "R_L")),
        "no element is called R_X": call("mean_power", "R_X"),
        "whole number": call("harmonic", "u_out", Number(1.5)),
        "no figure": call("voltage", "u"),
        "nothing observed is called nowhere": call("mean", "nowhere"),
    }
    for words, expression in cases.items():
        figure = figure_of(expression, "run", records)
        assert not figure.defined and words in figure.note, figure.note


def test_harmonics_need_a_period() -> None:
    still = {"run": Record(half_wave(period=None))}
    assert "no period" in figure_of(call("distortion", "u_out"), "run", still).note
    short = {"run": Record(half_wave(window=(0.0, 0.9 * PERIOD)))}
    assert "shorter than a period" in figure_of(call("conduction_angle", "D1"), "run", short).note


def test_periodic_figures_take_the_whole_periods_that_end_with_the_window() -> None:
    solution = half_wave(period=PERIOD / 4.0, window=(0.0, 0.7 * PERIOD))
    # Quarters from 0.2 to 0.7 of the sine's period: it conducts from 0.2 to 0.5, three fifths of what is seen.
    record = Record(solution)
    assert record.whole_periods() == pytest.approx((0.2 * PERIOD, 0.7 * PERIOD))
    angle = figure_of(call("conduction_angle", "D1"), "run", {"run": record})
    assert angle.value == pytest.approx(2.0 * math.pi * 0.6, abs=1e-2)


def test_figures_of_a_cut_window_and_times_from_an_event() -> None:
    records = {"run": Record(half_wave(window=(PERIOD / 2.0, PERIOD), first_event=PERIOD / 4.0))}
    assert value(call("mean", "u_out"), records) == pytest.approx(0.0, abs=1e-9)
    below = call("time_until_below", "u_out", Number(5.0, "V"))
    # 10 V sin(omega t) falls to 5 V at 150 deg, 60 deg after the event at 90 deg.
    assert value(below, records) == pytest.approx(PERIOD / 6.0, rel=1e-8)


def test_signals_from_expressions(records: dict[str, Record]) -> None:
    record = records["run"]
    times = np.linspace(0.0001, PERIOD - 0.0001, 401)
    source = 10.0 * np.sin(OMEGA * times)
    output = np.maximum(source, 0.0)
    across = signal_of(call("voltage", Branch(name("s"), name("u"))), record)
    assert across.value(times) == pytest.approx(source - output, abs=1e-7)
    assert signal_of(call("voltage", "D1"), record).value(times) == pytest.approx(source - output, abs=1e-7)
    product = signal_of(Binary("*", call("voltage", "u"), call("current", "R_L")), record)
    assert product.dimension == WATT
    assert product.value(times) == pytest.approx(output**2 / 5.0, abs=1e-7)
    assert signal_of(call("power", "R_L"), record).value(times) == pytest.approx(output**2 / 5.0, abs=1e-7)
    shifted = signal_of(Binary("/", Binary("-", name("u_out"), Number(1.0, "V")), Number(2.0, "A")), record)
    assert shifted.value(times) == pytest.approx((output - 1.0) / 2.0, abs=1e-7)
    limited = signal_of(call("min", call("abs", call("voltage", "s")), Number(3.0, "V")), record)
    assert limited.value(times) == pytest.approx(np.minimum(abs(source), 3.0), abs=1e-6)
    turned = signal_of(Binary("/", Number(1.0, "V"), Binary("+", name("u_out"), Number(1.0, "V"))), record)
    assert turned.dimension == NONE
    assert turned.value(times) == pytest.approx(1.0 / (output + 1.0), abs=1e-7)
    with pytest.raises(SignalError, match="different units"):
        signal_of(Binary("+", name("u_out"), call("current", "R_L")), record)
    with pytest.raises(UnknownName, match="no signal"):
        signal_of(call("mean", "u_out"), record)


def test_bounds_come_from_the_difference_of_two_solutions() -> None:
    coarse = {"run": Record(half_wave(crest=10.01))}
    fine = {"run": Record(half_wave(crest=10.0))}
    (figure,) = figures_with_bounds([("run", call("rms", "u_out"))], coarse, fine)
    assert figure.value == pytest.approx(5.0, rel=INTERPOLATION)
    assert figure.bound == pytest.approx(SAFETY * 0.005 + CHANCE * 5.0, rel=1e-4)
    (half_known,) = figures_with_bounds([("run", call("rms", "u_out"))], {}, fine)
    assert half_known.bound == math.inf
    (same,) = figures_with_bounds([("run", call("rms", "u_out"))], fine, fine)
    assert same.bound is not None and 0.0 < same.bound < 1e-10


def three_phase() -> FakeSolution:
    """A set of 100 V crest a phase into 10 Ohm a phase, the third phase open."""
    ports = tuple(Port(f"L{k}", f"l{k}", "n") for k in (1, 2, 3))
    circuit = circuit_of([Element("grid", "three_phase", ports, {})])

    def phase(k: int):
        return lambda t: 100.0 * np.sin(OMEGA * t - 2.0 * math.pi / 3.0 * (k - 1))

    potentials = {f"l{k}": phase(k) for k in (1, 2, 3)} | {"n": zero, "0": zero}
    currents = {("grid", f"L{k}"): (lambda t, k=k: -phase(k)(t) / 10.0) for k in (1, 2)} | {("grid", "L3"): zero}
    return FakeSolution(circuit, np.linspace(0.0, PERIOD, 2001), potentials, currents, period=PERIOD)


def test_an_element_of_several_ports_adds_them_up_and_one_port_has_a_dotted_name() -> None:
    records = {"run": Record(three_phase())}
    assert value(call("mean_power", "grid.L1"), records) == pytest.approx(-500.0, rel=INTERPOLATION)
    assert value(call("mean_power", "grid"), records) == pytest.approx(-1000.0, rel=INTERPOLATION)
    assert value(call("apparent_power", "grid"), records) == pytest.approx(1000.0, rel=INTERPOLATION)
    assert value(call("power_factor", "grid"), records) == pytest.approx(1.0, rel=INTERPOLATION)
    assert value(call("power_factor", "grid.L2"), records) == pytest.approx(1.0, rel=INTERPOLATION)
    assert "grid.L1, grid.L2, grid.L3" in figure_of(call("mean", call("current", "grid")), "run", records).note
    assert "has no L7" in figure_of(call("mean_power", "grid.L7"), "run", records).note
    open_phase = figure_of(call("power_factor", "grid.L3"), "run", records)
    assert not open_phase.defined and "no apparent power" in open_phase.note


def oscillation() -> FakeSolution:
    """1 mH and 1 mF ring from 10 V; the inductor's negative resistance makes up for the capacitor's 0.1 Ohm."""
    rate = 1.0 / math.sqrt(1e-3 * 1e-3)

    def current(t: np.ndarray) -> np.ndarray:
        return 10.0 * np.sin(rate * t)

    def node(t: np.ndarray) -> np.ndarray:
        return 10.0 * np.cos(rate * t) - 0.1 * current(t)

    circuit: Circuit = circuit_of(
        [
            branch("L1", "inductor", "a", "0", inductance=1e-3, series_resistance=-0.1),
            branch("C1", "capacitor", "a", "0", capacitance=1e-3, series_resistance=0.1),
        ]
    )
    times = np.linspace(0.0, 2.0 * math.pi / rate * 0.8, 4001)
    currents = {("L1", ""): current, ("C1", ""): lambda t: -current(t)}
    branches = {
        "L1": [(steady(-0.1), steady(1e-3), zero, current, node)],
        "C1": [(steady(0.1), zero, steady(1e-3), lambda t: -current(t), node)],
    }
    return FakeSolution(circuit, times, {"a": node, "0": zero}, currents, branches=branches)


def test_stored_energy_is_behind_the_series_resistance() -> None:
    records = {"run": Record(oscillation())}
    largest = figure_of(call("stored_energy", "C1"), "run", records)
    assert largest.dimension == JOULE
    assert largest.value == pytest.approx(0.5 * 1e-3 * 100.0, rel=1e-7)
    assert value(call("stored_energy", "L1"), records) == pytest.approx(0.5 * 1e-3 * 100.0, rel=1e-7)
    assert value(call("stored_energy"), records) == pytest.approx(0.5 * 1e-3 * 100.0, rel=1e-7)


def test_a_transformer_stores_what_its_windings_magnetise_together() -> None:
    ports = (Port("w1", "a", "0"), Port("w2", "b", "0"))
    circuit = circuit_of([Element("T1", "transformer", ports, {})])
    branches = [
        (zero, steady(inductance), zero, steady(current), zero)
        for inductance, current in [(0.5, 3.0), (0.25, -20.0), (2.0, 1.0)]
    ]
    times = np.linspace(0.0, 1.0, 3)
    solution = FakeSolution(circuit, times, dict.fromkeys(("a", "b", "0"), zero), {}, branches={"T1": branches})
    expected = 0.5 * 0.5 * 9.0 + 0.5 * 0.25 * 400.0 + 0.5 * 2.0 * 1.0
    assert value(call("stored_energy", "T1"), {"run": Record(solution)}) == pytest.approx(expected, rel=1e-12)


def test_a_capacitance_that_changes_on_the_way_counts_as_it_is() -> None:
    circuit = circuit_of([branch("C1", "capacitor", "a", "0")])

    def capacitance(t: np.ndarray) -> np.ndarray:
        return np.where(t < 0.5, 1.0, 3.0)

    times = np.array([0.0, 0.49, 0.5, 1.0])
    branches = {"C1": [(zero, zero, capacitance, zero, steady(2.0))]}
    solution = FakeSolution(circuit, times, {"a": steady(2.0), "0": zero}, {}, branches=branches)
    assert value(call("stored_energy", "C1"), {"run": Record(solution)}) == pytest.approx(6.0, rel=1e-12)


def test_lead_inductance_is_taken_off_the_capacitors_voltage() -> None:
    # u = L di/dt + R i + u_C with i = 2 t, L = 3, R = 5, u_C = 7: u = 6 + 10 t + 7.
    circuit = circuit_of([branch("C1", "capacitor", "a", "0")])
    solution = FakeSolution(
        circuit,
        np.linspace(0.0, 1.0, 5),
        {"a": zero, "0": zero},
        {},
        branches={"C1": [(steady(5.0), steady(3.0), steady(0.2), lambda t: 2.0 * t, lambda t: 13.0 + 10.0 * t)]},
    )
    expected = 0.5 * 0.2 * 49.0 + 0.5 * 3.0 * 4.0
    assert value(call("stored_energy", "C1"), {"run": Record(solution)}) == pytest.approx(expected, rel=1e-12)


def test_the_books_close_where_energy_is_conserved_and_not_where_it_is_not() -> None:
    books = balance(Record(half_wave()))
    assert books.delivered.value == pytest.approx(0.1, rel=INTERPOLATION)
    assert books.loads.value == pytest.approx(0.1, rel=INTERPOLATION)
    assert books.share.value < INTERPOLATION
    rung = balance(Record(oscillation()))
    assert rung.stored.value == pytest.approx(0.0, abs=1e-8)
    wrong = half_wave()
    wrong.currents["R_L", ""] = lambda t: 0.9 * np.maximum(10.0 * np.sin(OMEGA * t), 0.0) / 5.0
    assert balance(Record(wrong)).share.value == pytest.approx(0.1, rel=1e-6)


def discharge(**changes: object) -> FakeSolution:
    """1 mF from 10 V into 10 Ohm, no source."""

    def output(t: np.ndarray) -> np.ndarray:
        return 10.0 * np.exp(-t / 0.01)

    circuit = circuit_of([branch("C1", "capacitor", "u", "0"), branch("R_L", "resistor", "u", "0")])
    currents = {("C1", ""): lambda t: -output(t) / 10.0, ("R_L", ""): lambda t: output(t) / 10.0}
    branches = {"C1": [(zero, zero, steady(1e-3), currents["C1", ""], output)]}
    times = np.linspace(0.0, 0.03, 2001)
    potentials = {"u": output, "0": zero}
    return FakeSolution(circuit, times, potentials, currents, branches=branches, **changes)  # type: ignore[arg-type]


def test_a_discharge_closes_its_books_without_a_source() -> None:
    books = balance(Record(discharge()))
    released = 0.05 * (1.0 - math.exp(-6.0))
    assert books.stored.value == pytest.approx(-released, rel=INTERPOLATION)
    assert books.loads.value == pytest.approx(released, rel=INTERPOLATION)
    assert books.share.value < INTERPOLATION
    assert books.note == ""


def test_books_that_an_event_opens_say_so() -> None:
    changed = PlannedStudy("run", "transient", events=((0.01, Change("short", "C1")),))
    assert "short C1 at 10 ms" in balance(Record(discharge(study=changed))).note
    elsewhere = PlannedStudy("run", "transient", events=((0.01, Change("open", "R_L")),))
    assert balance(Record(discharge(study=elsewhere))).note == ""
    before = discharge(study=changed, window=(0.02, 0.03))
    assert balance(Record(before)).note == ""


def test_tables_hold_signals_and_diodes_with_their_units(records: dict[str, Record]) -> None:
    (row,) = signal_rows(records["run"], records["run"])
    assert (row.name, row.label) == ("u_out", "output")
    assert list(row.figures) == ["mean", "rms", "peak", "valley", "ripple"]
    assert all(figure.dimension == VOLT and figure.bound is not None for figure in row.figures.values())
    (diode,) = diode_rows(records["run"])
    assert diode.figures["mean"].dimension == AMPERE
    assert diode.figures["mean"].value == pytest.approx(2.0 / math.pi, rel=INTERPOLATION)
    assert diode.figures["reverse peak"].value == pytest.approx(10.0, rel=INTERPOLATION)
    assert diode.figures["dissipation"].value == pytest.approx(0.0, abs=1e-7)


def test_where_nothing_is_observed_all_nodes_and_elements_are_shown() -> None:
    solution = half_wave()
    solution.circuit.observes.clear()
    names = [row.name for row in signal_rows(Record(solution))]
    assert names == ["voltage(s)", "voltage(u)", "current(mains)", "current(D1)", "current(R_L)"]
