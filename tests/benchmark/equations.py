"""The measured circuits as one would write them by hand for a general solver, in the form that suits it best.

The states are capacitor voltages. The one node that no capacitor holds is solved for inside, by a safeguarded Newton
iteration on a scalar that starts from the last answer: with the node as an algebraic unknown, SUNDIALS IDA takes twice
the steps on the bridge and fails on the ladders, since nothing damps its steps on the exponentials.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Protocol

import numpy as np

from tests.benchmark.circuits import IDEALITY_FACTOR, SATURATION_CURRENT, Bridge, Ladder, SixPulse

SCALE = IDEALITY_FACTOR * 1.380649e-23 / 1.602176634e-19 * 298.15
"""n k T / q in V at 25 degC (SI, exact since 2019)."""
LEAK = 1e-12
_AGREEMENT = 1e-9
_STRAIGHT = 45.0
"""Voltage over SCALE beyond which the law goes on straight, so that no trial value overflows; no solution comes near."""
_LARGEST_EXPONENT = 300.0
_TRIALS = 100


class Equations(Protocol):
    """A circuit from rest: rates of the states and their Jacobian; stored: 1 for each state that has a rate, 0 for one
    whose "rate" must vanish instead."""

    states: int
    stored: Sequence[float]

    def rates(self, time: float, states: np.ndarray) -> np.ndarray | list[float]: ...

    def jacobian(self, time: float, states: np.ndarray) -> np.ndarray: ...

    def output(self, states: np.ndarray) -> np.ndarray:
        """Output voltage, of states of shape (states, n)."""
        ...


class _Terminal:
    """The voltage p at a source's terminal: what the source gives there is what flows on through two kinds of path,

    (source - p) * conductance = I_S (exp((p + up) / scale) - exp((down - p) / scale)) + leak * p - back.
    """

    def __init__(self, circuit: Bridge | Ladder, scale: float, leak: float):
        self._crest, self._speed = circuit.crest, 2.0 * math.pi * circuit.frequency
        self.conductance = 1.0 / circuit.source_resistance
        self._scale, self._leak = scale, leak
        self._room = scale * math.log(4.0 * circuit.crest * self.conductance / SATURATION_CURRENT)
        self._last = 0.0

    def solve(self, time: float, up: float, down: float, back: float) -> float:
        """p in V; it lies where neither path would carry more than the source can give, or, where trial states leave no
        such place, where both carry the same."""
        source = self._crest * math.sin(self._speed * time)
        low, high = down - self._room, self._room - up
        p = min(max(self._last, low), high)
        if low > high:
            low, high, p = high, low, 0.5 * (down - up)
        for _ in range(_TRIALS):
            rising = SATURATION_CURRENT * math.exp(min((p + up) / self._scale, _LARGEST_EXPONENT))
            falling = SATURATION_CURRENT * math.exp(min((down - p) / self._scale, _LARGEST_EXPONENT))
            missing = (source - p) * self.conductance - rising + falling - self._leak * p + back
            low, high = (p, high) if missing > 0.0 else (low, p)
            new = p + missing / (self.conductance + self._leak + (rising + falling) / self._scale)
            new = new if low <= new <= high else 0.5 * (low + high)
            change, p = new - p, new
            if abs(change) <= _AGREEMENT:
                break
        self._last = p
        return p


class BridgeEquations:
    """The bridge, reduced by its symmetry to the voltage v of the reservoir and p between the a.c. terminals: diodes
    opposite each other see the same voltage, (p - v) / 2 or -(p + v) / 2."""

    states = 1
    stored = (1.0,)

    def __init__(self, circuit: Bridge):
        self.circuit = circuit
        self._terminal = _Terminal(circuit, 2.0 * SCALE, LEAK)

    def _diodes(self, time: float, v: float) -> tuple[float, float, float, float]:
        """Currents of both pairs of diodes, then their slopes."""
        p = self._terminal.solve(time, -v, -v, 0.0)
        forward = SATURATION_CURRENT * math.exp(0.5 * (p - v) / SCALE)
        backward = SATURATION_CURRENT * math.exp(-0.5 * (p + v) / SCALE)
        slopes = forward / SCALE + LEAK, backward / SCALE + LEAK
        forward += 0.5 * LEAK * (p - v) - SATURATION_CURRENT
        return forward, backward - 0.5 * LEAK * (p + v) - SATURATION_CURRENT, *slopes

    def rates(self, time: float, states: np.ndarray) -> list[float]:
        v = float(states[0])
        forward, backward, _, _ = self._diodes(time, v)
        return [(forward + backward - v / self.circuit.load) / self.circuit.capacitance]

    def jacobian(self, time: float, states: np.ndarray) -> np.ndarray:
        _, _, slope, other = self._diodes(time, float(states[0]))
        turn = 0.5 * (slope - other) / (self._terminal.conductance + 0.5 * (slope + other))
        rate = 0.5 * slope * (turn - 1.0) - 0.5 * other * (turn + 1.0) - 1.0 / self.circuit.load
        return np.array([[rate / self.circuit.capacitance]])

    def output(self, states: np.ndarray) -> np.ndarray:
        return states[0]

    def diode_current(self, time: float, v: float) -> float:
        """Current of D1 in A."""
        return self._diodes(time, v)[0]


class BridgeNodes:
    """The bridge as nodal analysis gives it, without thought for its symmetry: the voltages of both a.c. terminals and
    of the output, four diodes of their own. What flows into a terminal must vanish, or charges a stray capacitance (F)
    from it to the reference, which makes rates of all."""

    states = 3

    def __init__(self, circuit: Bridge, stray: float):
        self.circuit = circuit
        self.stored = (1.0 if stray else 0.0,) * 2 + (1.0,)
        self._capacitances = (stray or 1.0, stray or 1.0, circuit.capacitance)
        self._speed, self._conductance = 2.0 * math.pi * circuit.frequency, 1.0 / circuit.source_resistance

    def rates(self, time: float, states: np.ndarray) -> list[float]:
        x, y, a = (float(voltage) for voltage in states)
        source = self._conductance * (self.circuit.crest * math.sin(self._speed * time) - x + y)
        first, second, third, fourth = (_diode(voltage)[0] for voltage in (x - a, y - a, -x, -y))
        flows = source - first + third, fourth - source - second, first + second - a / self.circuit.load
        return [flow / capacitance for flow, capacitance in zip(flows, self._capacitances, strict=True)]

    def jacobian(self, time: float, states: np.ndarray) -> np.ndarray:
        x, y, a = (float(voltage) for voltage in states)
        first, second, third, fourth = (_diode(voltage)[1] for voltage in (x - a, y - a, -x, -y))
        tie, load = self._conductance, 1.0 / self.circuit.load
        flows = [
            [-tie - first - third, tie, first],
            [tie, -tie - second - fourth, second],
            [first, second, -first - second - load],
        ]
        return np.array(flows) / np.array(self._capacitances)[:, None]

    def output(self, states: np.ndarray) -> np.ndarray:
        return states[2]


class SixPulseNodes:
    """The six-pulse bridge as nodal analysis gives it: states are the currents of the three lines and of the choke, then
    the voltages of the bridge's terminals x, y, z and a against m, as in BridgeNodes. The star point of the lines, which
    are alike, lies where their currents sum to nothing."""

    states = 8
    line_resistance, line_inductance, choke_resistance = 20e-3, 1e-3, 50e-3

    def __init__(self, circuit: SixPulse, stray: float):
        self.circuit = circuit
        self.stored = (1.0,) * 4 + (1.0 if stray else 0.0,) * 4
        self._held = np.array([self.line_inductance] * 3 + [circuit.inductance] + [stray or 1.0] * 4)
        self._speed, self._phases = 2.0 * math.pi * circuit.frequency, np.array([0.0, 1.0, 2.0]) * -2.0 * math.pi / 3.0

    def rates(self, time: float, states: np.ndarray) -> np.ndarray:
        lines, choke, terminals, a = states[:3], float(states[3]), states[4:7], float(states[7])
        driving = self.circuit.crest * np.sin(self._speed * time + self._phases) - terminals
        driving -= driving.mean()
        up = [_diode(float(x) - a)[0] for x in terminals]
        down = [_diode(-float(x))[0] for x in terminals]
        flows = np.empty(8)
        flows[:3] = driving - self.line_resistance * lines
        flows[3] = a - (self.choke_resistance + self.circuit.load) * choke
        flows[4:7] = lines - up + down
        flows[7] = sum(up) - choke
        return flows / self._held

    def jacobian(self, time: float, states: np.ndarray) -> np.ndarray:
        terminals, a = states[4:7], float(states[7])
        up = np.array([_diode(float(x) - a)[1] for x in terminals])
        down = np.array([_diode(-float(x))[1] for x in terminals])
        found = np.zeros((8, 8))
        found[:3, :3] = -self.line_resistance * np.eye(3)
        found[:3, 4:7] = 1.0 / 3.0 - np.eye(3)
        found[3, 3], found[3, 7] = -self.choke_resistance - self.circuit.load, 1.0
        found[4:7, :3], found[4:7, 4:7], found[4:7, 7] = np.eye(3), -np.diag(up + down), up
        found[7, 4:7], found[7, 7], found[7, 3] = up, -up.sum(), -1.0
        return found / self._held[:, None]

    def output(self, states: np.ndarray) -> np.ndarray:
        return states[3] * self.circuit.load


def _diode(voltage: float) -> tuple[float, float]:
    """A diode's current and slope."""
    ratio = voltage / SCALE
    steep = SATURATION_CURRENT * math.exp(min(ratio, _STRAIGHT))
    current = steep * (1.0 + max(ratio - _STRAIGHT, 0.0)) - SATURATION_CURRENT + LEAK * voltage
    return current, steep / SCALE + LEAK


class LadderEquations:
    """The multiplier. States: voltages of the capacitors A, then B; p is node a0[0]."""

    def __init__(self, circuit: Ladder):
        self.circuit = circuit
        count = circuit.stages
        self.states = 2 * count
        self.stored = (1.0,) * self.states
        self._terminal = _Terminal(circuit, SCALE, 2.0 * count * LEAK)
        self._load = 1.0 / (circuit.load + circuit.end_resistance)
        full = np.ones((count, count))
        below, above = np.tril(full), np.triu(full)
        self._turns = np.block([[below, np.tril(full, -1)], [-below, -below]])
        """Voltages of the diodes D, then E, by the states, without p."""
        self._sums = np.block([[-above, above], [-np.triu(full, 1), above]])
        """Currents of the capacitors by those of the diodes."""

    def _diodes(self, time: float, states: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Currents of the diodes D and E, and their slopes, shape (2, stages) each."""
        count = self.circuit.stages
        sums = np.cumsum(states.reshape(2, count), axis=1)
        behind = np.empty((2, count))
        behind[0] = sums[0]
        behind[0, 1:] += sums[1, :-1]
        behind[1] = -sums[0] - sums[1]
        most = behind.max(axis=1)
        down, up = most + SCALE * np.log(np.exp((behind - most[:, None]) / SCALE).sum(axis=1))
        p = self._terminal.solve(time, float(up), float(down), LEAK * float(behind[0].sum() - behind[1].sum()))
        behind[0] -= p
        behind[1] += p
        ratio = behind / SCALE
        steep = SATURATION_CURRENT * np.exp(np.minimum(ratio, _STRAIGHT))
        current = steep * (1.0 + np.maximum(ratio - _STRAIGHT, 0.0)) + LEAK * behind - SATURATION_CURRENT
        return current, steep / SCALE + LEAK

    def rates(self, time: float, states: np.ndarray) -> np.ndarray:
        count = self.circuit.stages
        currents = np.cumsum(self._diodes(time, states)[0][:, ::-1], axis=1)[:, ::-1]
        result = np.empty((2, count))
        result[0] = currents[1] - currents[0]
        result[1] = currents[1] - float(states[count:].sum()) * self._load
        result[1, :-1] -= currents[0, 1:]
        return result.ravel() / self.circuit.capacitance

    def jacobian(self, time: float, states: np.ndarray) -> np.ndarray:
        count = self.circuit.stages
        slopes = self._diodes(time, states)[1].ravel()
        turns = slopes[:, None] * self._turns
        terminal = turns[:count].sum(axis=0) - turns[count:].sum(axis=0)
        terminal /= self._terminal.conductance + slopes.sum()
        turns[:count] -= slopes[:count, None] * terminal
        turns[count:] += slopes[count:, None] * terminal
        result = self._sums @ turns
        result[count:, count:] -= self._load
        return result / self.circuit.capacitance

    def output(self, states: np.ndarray) -> np.ndarray:
        return states[self.circuit.stages :].sum(axis=0) * (self.circuit.load * self._load)


def equations_of(circuit: Bridge | Ladder) -> Equations:
    """A circuit's hand-written equations, as from rest."""
    return BridgeEquations(circuit) if isinstance(circuit, Bridge) else LadderEquations(circuit)
