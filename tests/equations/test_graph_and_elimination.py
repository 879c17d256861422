"""The scalar graph, the elimination and the emitted run against exact arithmetic, finite differences and plain evaluation."""

from __future__ import annotations

import math
import os
import subprocess
import sys
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from simcore.equations.eliminate import Elimination
from simcore.equations.emit import operation_counts
from simcore.equations.kernel import Kernel
from simcore.equations.plain import evaluate
from simcore.equations.reduce import ContradictoryLoop
from simcore.equations.values import Graph, Level, cos, derivative, exp, log, sin, sqrt

LAWS = {
    "sum": lambda x: 2.0 + x + 3.0,
    "difference": lambda x: 5.0 - x - 1.0,
    "product": lambda x: x * x * 3.0,
    "quotient": lambda x: (1.0 + x) / (2.0 + x * x),
    "sign": lambda x: -(x * x),
    "exp": lambda x: exp(x * 2.0),
    "log": lambda x: log(x + 3.0),
    "sqrt": lambda x: sqrt(x * x + 1.0),
    "sin": lambda x: sin(x * 3.0),
    "cos": lambda x: cos(x) * x,
}


@pytest.mark.parametrize("name", LAWS)
def test_derivative_against_finite_differences(name: str) -> None:
    graph = Graph()
    x = graph.input("x", Level.ITERATION)
    value = LAWS[name](x)
    slope = derivative(value, x)
    for at in (0.3, 1.7):
        step = 1e-6
        ends = [evaluate([value], {"x": at + sign * step})[0] for sign in (1.0, -1.0)]
        assert evaluate([slope], {"x": at})[0] == pytest.approx((ends[0] - ends[1]) / (2.0 * step), rel=1e-7)


def test_sharing_folding_and_levels() -> None:
    graph = Graph()
    a, h, v = (
        graph.input("a", Level.VARIANT, True),
        graph.input("h", Level.STEP, True),
        graph.input("v", Level.ITERATION),
    )
    assert a * h is a * h
    assert (graph.constant(2.0) * 3.0).constant == 6.0
    assert v + 0.0 is v and v * 1.0 is v and (v * 0.0).constant == 0.0 and (-v).graph.negate(-v) is v
    assert (a + h).level is Level.STEP and (a * v).level is Level.ITERATION
    assert (a + h).positive and (a * h).positive and not (a - h).positive and exp(v).positive


EPSILON = 2.0**-52
conductances = st.floats(-12.0, 3.0).map(lambda power: 10.0**power)


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_elimination_against_exact_arithmetic(data: st.DataObject) -> None:
    """Random networks over fifteen decades of conductance: no unknown is further off than rounding what flows in can
    make it, which the inverse of the exact matrix (no negative entry) tells."""
    count = data.draw(st.integers(2, 6))
    nodes = [f"n{index}" for index in range(count)]
    graph = Graph()
    elimination = Elimination(graph, list(nodes))
    exact = [[Fraction(0)] * count for _ in nodes]
    right, sizes = [Fraction(0)] * count, [Fraction(0)] * count
    inputs: dict[str, float] = {}
    for first in range(count):
        for second in [*range(first + 1, count), None]:
            value, source = data.draw(conductances), data.draw(st.floats(0.0, 300.0))
            name = f"g{len(inputs)}"
            inputs[name] = value
            conductance = graph.input(name, Level.ITERATION, True)
            weights = {nodes[first]: graph.one}
            if second is not None:
                weights[nodes[second]] = graph.constant(-1.0)
            elimination.stamp(weights, conductance, -(conductance * source))
            signs = {first: 1, **({second: -1} if second is not None else {})}
            for i, sign in signs.items():
                right[i] += sign * Fraction(value) * Fraction(source)
                sizes[i] += Fraction(value) * Fraction(source)
                for j, other in signs.items():
                    exact[i][j] += sign * other * Fraction(value)
    solution = elimination.solve()
    found = evaluate([solution[node] for node in nodes], inputs)
    wanted, reach = _solve(exact, right), _solve(exact, sizes)
    for got, want, size in zip(found, wanted, reach, strict=True):
        assert abs(got - float(want)) <= 16.0 * EPSILON * float(size)
    assert not elimination.guards


def _solve(matrix: list[list[Fraction]], right: list[Fraction]) -> list[Fraction]:
    """Gaussian elimination in exact arithmetic."""
    rows = [[*row, value] for row, value in zip(matrix, right, strict=True)]
    for pivot in range(len(rows)):
        swap = next(index for index in range(pivot, len(rows)) if rows[index][pivot] != 0)
        rows[pivot], rows[swap] = rows[swap], rows[pivot]
        for index in range(len(rows)):
            if index != pivot and rows[index][pivot] != 0:
                factor = rows[index][pivot] / rows[pivot][pivot]
                rows[index] = [a - factor * b for a, b in zip(rows[index], rows[pivot], strict=True)]
    return [row[-1] / row[index] for index, row in enumerate(rows)]


def test_windings_are_guarded_and_right() -> None:
    """A core's unknown couples with either sign: against a dense solve."""
    graph = Graph()
    elimination = Elimination(graph, ["a", "b", ("T", "core")])
    stamps = [
        ({"a": 1.0, ("T", "core"): -1.0}, 5.0),
        ({"b": 1.0, ("T", "core"): -0.1}, 7.0),
        ({("T", "core"): 1.0}, 0.01),
    ]
    stamps += [({"a": 1.0}, 2.0), ({"b": 1.0}, 0.5)]
    order = ["a", "b", ("T", "core")]
    matrix = np.zeros((3, 3))
    for weights, conductance in stamps:
        row = np.array([weights.get(unknown, 0.0) for unknown in order])
        matrix += conductance * np.outer(row, row)
        lifted = {unknown: graph.constant(weight) for unknown, weight in weights.items()}
        elimination.stamp(lifted, graph.input(f"g{conductance}", Level.STEP, True), graph.zero)
    elimination.stamp({"a": graph.one}, graph.zero, graph.constant(-3.0))
    inputs = {f"g{conductance}": conductance for _, conductance in stamps}
    solution = elimination.solve()
    found = evaluate([solution[unknown] for unknown in order], inputs)
    assert found == pytest.approx(np.linalg.solve(matrix, [3.0, 0.0, 0.0]), rel=1e-12)
    assert elimination.guards


def test_contradictory_loop_names_the_element(frame_of) -> None:
    frame, references = frame_of(
        "a -> b: source e1, constant = 1 V\na -> b: source e2, constant = 2 V\na -> b: resistor R, 1 Ohm\nreference b\n"
    )
    with pytest.raises(ContradictoryLoop, match="e2"):
        Kernel(frame, references)


# Operations of one Newton iteration, the law's own included: what the emitted inner loop holds. A row that grows is a loss.
ITERATION_OPERATIONS = {"half-wave": 16, "bridge": 71, "ladder-5": 265, "ladder-20": 1135}


@pytest.mark.parametrize("name", ITERATION_OPERATIONS)
def test_operation_counts(name: str, named_frame) -> None:
    system = Kernel(*named_frame(name)).system
    targets = [junction.new for junction in system.junctions]
    fast = [value for value in _needed(targets) if value.level is Level.ITERATION]
    assert len(fast) == ITERATION_OPERATIONS[name]
    assert operation_counts(targets)["exp"] == len(system.junctions)


def _needed(targets: list) -> list:
    from simcore.equations.values import ancestors

    return [value for value in ancestors(targets) if value.operation not in ("constant", "input")]


def test_operations_grow_linearly_with_the_ladder(named_frame) -> None:
    counts = []
    for stages in (10, 20, 40):
        system = Kernel(*named_frame(f"ladder-{stages}")).system
        counts.append(len(_needed([junction.new for junction in system.junctions])))
    assert (counts[2] - counts[1]) == pytest.approx(2 * (counts[1] - counts[0]), rel=0.1)


@pytest.mark.parametrize("name", ["bridge", "half-wave", "ladder-5"])
def test_emitted_equals_plain_evaluation_to_the_bit(name: str, named_frame) -> None:
    """One backward-Euler step of the emitted run: the states it leaves are those of the graph, computed value by value."""
    frame, references = named_frame(name)
    kernel = Kernel(frame, references)
    saved = [0.0] * kernel.saved_count
    step = 1e-6
    saved[1] = step
    out = [0.0] * 10_000
    controls = (step, math.inf, 0.0, 1.0, 1, 100, 0.0, 1.0, len(out), 100, 1.0, 1.0, 1.0, 1e-6, math.inf, math.inf)
    result = kernel.run(list(frame.numbers), saved, out, controls)
    assert result[0] == 0
    system = kernel.system
    junctions = len(system.junctions)
    # The last iterate is not saved; it is found again by iterating the plain graph from zero under the same rules.
    inputs = {f"p{index}": number for index, number in enumerate(frame.numbers)} | {"h": step, "t": step}
    inputs |= {f"y{index}": 0.0 for index in range(len(system.states))}
    fixed = evaluate([value for j in system.junctions for value in (j.scale, j.critical)], inputs)
    v = [0.0] * junctions
    for _ in range(result[5]):
        now = inputs | {f"v{index}": value for index, value in enumerate(v)}
        new = [float(value) for value in evaluate([junction.new for junction in system.junctions], now)]
        states = [float(value) for value in evaluate([state.new for state in system.states], now)]
        v = [
            _limited(old, fresh, fixed[2 * i], fixed[2 * i + 1])
            for i, (old, fresh) in enumerate(zip(v, new, strict=True))
        ]
    assert saved[2 : 2 + len(states)] == states


def _limited(old: float, new: float, scale: float, critical: float) -> float:
    step = new - old
    if abs(step) <= 1e-6 * scale or (new < -6.0 * scale and old < -6.0 * scale):
        return new
    if new > critical and step > 0.0:
        return old + scale * math.log(1.0 + step / scale) if old > 0.0 else scale * math.log(new / scale)
    return new


def test_source_is_the_same_under_any_hash_seed() -> None:
    program = (
        "import sys; sys.path[:0] = ['tests/equations'];"
        "from conftest import frame_from, LADDER; from simcore.equations.kernel import Kernel;"
        "print(Kernel(*frame_from(LADDER.replace('STAGES', '4'))).source)"
    )
    texts = []
    for seed in ("1", "2"):
        environment = {**os.environ, "PYTHONHASHSEED": seed}
        texts.append(
            subprocess.run([sys.executable, "-c", program], env=environment, capture_output=True, check=True).stdout
        )
    assert texts[0] == texts[1] and len(texts[0]) > 10_000


def test_no_text_of_a_description_reaches_the_source(frame_of) -> None:
    frame, references = frame_of(
        "import_os -> system: source evil__name, constant = 1 V\nimport_os -> system: resistor exec_me, 1 Ohm\nreference system\n"
    )
    source = Kernel(frame, references).source
    assert not any(word in source for word in ("import", "system", "evil", "exec"))


def test_compiled_run_takes_the_same_steps(named_frame) -> None:
    """The emitted source is within what numba compiles, and gives the same states."""
    numba = pytest.importorskip("numba", reason="the extra `fast` is not installed")
    frame, references = named_frame("bridge")
    kernel = Kernel(frame, references)
    names = {"exp": math.exp, "log": math.log, "sqrt": math.sqrt, "sin": math.sin, "cos": math.cos}
    exec(compile(kernel.source, "<emitted>", "exec"), names)
    compiled = numba.njit(names["run"], error_model="numpy")
    controls = (0.02, 1e-3, 1e-11, 1e-3, 3, 25, 25.0, 0.0, 0, 10**6, 0.17, 1e-9, 0.03, 0.01, 2e-4, 2e-7)
    results = []
    for run, wrap in ((kernel.run, list), (compiled, np.array)):
        saved = wrap([0.0, 1e-6, *[0.0] * (kernel.saved_count - 2)])
        counts = run(wrap(frame.numbers), saved, wrap([0.0]), controls)
        results.append((tuple(int(count) for count in counts), [float(number) for number in saved]))
    assert results[0][0] == results[1][0]
    assert results[0][1] == pytest.approx(results[1][1], rel=1e-9, abs=1e-12)
