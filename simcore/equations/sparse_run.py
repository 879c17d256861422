"""The run of a circuit that is too large to be emitted, or whose elimination without pivoting lost a pivot.

The same algorithm and the same face as the emitted run (see run_source), on arrays, with scipy's sparse LU in place of
the emitted elimination. Device laws and results are still emitted, their size being linear in the circuit.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from simcore.equations.assemble import System
from simcore.equations.emit import Emitter
from simcore.equations.plain import evaluate
from simcore.equations.run_interface import (
    BEYOND,
    BLOCKED,
    CONTROLS,
    DONE,
    EVENT,
    FULL,
    JUMP,
    NO_CONVERGENCE,
    PATIENCE,
    ROUNDING,
    SHORT,
    UNEVEN,
    record_width,
)
from simcore.equations.values import Value

_DECOMPOSED = 500
"""Unknowns up to which a singular matrix is decomposed to name one."""
_FLOORS = ("floor_voltage", "floor_current")
_WEIGHTS = {1: (1.0, 0.0, 0.0), 2: (-1.0, 2.0, 0.0), 3: (0.5, -4.0, 4.5)}
_ERRORS = {1: (0.0, 0.0, 0.0), 2: (-1.0, 1.0, 0.0), 3: (0.5, -2.0, 1.5)}


def function_source(name: str, arguments: dict[str, int], targets: list[Value]) -> str:
    """A function of arrays (argument letter -> length) and of scalars (the step, the time at its end, the sizes of a
    voltage and a current that need no accuracy) that returns the targets as a tuple."""
    emitter = Emitter({"variant": [], "step": [], "time": [], "iteration": targets})
    lines = [f"def {name}({', '.join((*arguments, 'h', 't', *_FLOORS))}):"]
    for letter, count in arguments.items():
        if count:
            lines.append(f"    {', '.join(f'{letter}{index}' for index in range(count))}, = {letter}")
    for stage in ("variant", "step", "time", "iteration"):
        lines += [f"    {line}" for line in emitter.lines[stage]]
    values = "".join(f"{emitter.name(target)}, " for target in targets)
    return "\n".join([*lines, f"    return ({values})", ""])


class SparseRun:
    """A system's run on arrays; assembled without elimination. Call it like the emitted function."""

    def __init__(self, system: System, compile_source: Any, watched: list[int]):
        self._system = system
        self._watched = np.array(watched, dtype=int)
        numbers, states, junctions = len(system.frame.numbers), len(system.states), len(system.junctions)
        self._counts = (states, junctions, len(watched), len(system.columns), len(system.thresholds))
        arguments = {"p": numbers, "y": states, "v": junctions}
        stamps = [value for companion in system.companions for value in (companion.conductance, companion.offset)]
        self._stamps = compile_source(function_source("stamps", arguments, stamps), "stamps")
        results = [junction.new for junction in system.junctions]
        results += [state.new for state in system.states] + [column.value for column in system.columns]
        results += system.thresholds
        arguments["s"] = len(system.reduction.free)
        positions = {id(companion.conductance): index for index, companion in enumerate(system.companions)}
        self._slopes = [positions[id(junction.slope)] for junction in system.junctions]
        self._results = compile_source(function_source("results", arguments, results), "results")

    def __call__(self, p: list[float], s: list[float], out: list[float], c: tuple[float, ...]) -> tuple[int, ...]:
        return _Attempt(self, p, s, out, dict(zip(CONTROLS, c, strict=True))).go()


class _Attempt:
    """One call of a run: its numbers as arrays, and its counts."""

    def __init__(self, run: SparseRun, p: list[float], s: list[float], out: list[float], control: dict[str, float]):
        self.run, self.p, self.saved, self.out, self.c = run, p, s, out, control
        states, junctions, watched, columns, thresholds = run._counts
        cuts = np.cumsum([2, states, junctions, states, watched, columns, thresholds])
        parts = [np.array(s[start:end]) for start, end in zip(cuts[:-1], cuts[1:], strict=True)]
        self.z, self.u, self.peaks, self.watched_peaks, self.ends, self.passed = parts
        armed = [threshold.armed for threshold in run._system.frame.thresholds]
        self.armed = np.array([all((p[flag.position] > 0.5) == up for flag, up in each) for each in armed], dtype=bool)
        self.event = self.stuck = 0
        self._errors = np.zeros(0)
        inputs = {f"p{index}": number for index, number in enumerate(p)}
        self.small = tuple(control[name] for name in _FLOORS)
        inputs |= dict(zip(_FLOORS, self.small, strict=True))
        fixed = [value for each in run._system.junctions for value in (each.scale, each.critical, each.straight)]
        numbers = np.array([float(value) for value in evaluate(fixed, inputs)]).reshape(junctions, 3)
        self.scale, self.critical, self.straight = numbers[:, 0], numbers[:, 1], numbers[:, 2] > 0.0
        self.flattens = np.array([junction.flattens for junction in run._system.junctions], dtype=bool)
        self.shares = np.array([junction.agreement for junction in run._system.junctions])
        self.on = self.critical - 3.0 * self.scale
        small = [state.small for state in run._system.states]
        self.floors = np.array([float(value) for value in evaluate(small, inputs)])
        self.incidence = self._incidence(inputs)
        self.position = self.steps = self.rejected = self.solves = self.iterations = self.failures = 0
        self.now, self.wish, self.landing, self.uneven = s[0], s[1], False, UNEVEN
        self.voltages = np.array([column.branch is None for column in run._system.columns], dtype=bool)

    def _incidence(self, inputs: dict[str, float]) -> Any:
        """Weights of the free unknowns in each companion's voltage, shape (unknowns, companions), sparse."""
        from scipy.sparse import csc_matrix

        free = {unknown: index for index, unknown in enumerate(self.run._system.reduction.free)}
        rows, columns, values = [], [], []
        for column, companion in enumerate(self.run._system.companions):
            for unknown, weight in companion.form.weights.items():
                rows.append(free[unknown])
                columns.append(column)
                values.append(float(evaluate([weight], inputs)[0]))
        return csc_matrix((values, (rows, columns)), shape=(len(free), len(self.run._system.companions)))

    def go(self) -> tuple[int, ...]:
        """The time loop."""
        c, width = self.c, record_width(self.run._system)
        status = DONE
        while (left := c["t_end"] - self.now) > 0.0:
            if c["record"] > 0.0 and self.position + width > c["room"]:
                status = FULL
                break
            if self.steps + self.rejected >= c["attempts"]:
                status = FULL
                break
            size = min(self.wish, c["largest"])
            last = size >= left * 0.999999
            size = left if last else (0.5 * left if size > 0.5 * left else size)
            stop = c["t_end"] if last else self.now + size
            found = self._extrapolated(size, stop)
            if found is None:
                if self._failed(size):
                    status = NO_CONVERGENCE
                    break
            elif self._controlled(size, found):
                self._accept(size, stop, found)
                if self.event:
                    status = EVENT
                    break
            elif not self._error < 1e30 and size <= c["smallest"]:
                status, self.stuck = NO_CONVERGENCE, self._most_wrong()
                break
        groups = (self.z, self.u, self.peaks, self.watched_peaks, self.ends, self.passed)
        self.saved[:] = [self.now, self.wish, *(float(number) for group in groups for number in group)]
        which = self.event if status == EVENT else self.stuck if status == NO_CONVERGENCE else self._most_wrong()
        return status, self.position, self.steps, self.rejected, self.solves, self.iterations, 0, which

    def _extrapolated(self, size: float, stop: float) -> list[tuple[np.ndarray, list[np.ndarray], np.ndarray]] | None:
        """States, columns at each part and junction voltages, for each division; None where Newton fails."""
        found: list[tuple[np.ndarray, list[np.ndarray], np.ndarray]] = []
        ahead = np.zeros_like(self.u)
        for division in range(1, int(self.c["order"]) + 1):
            h, y, n, parts = size / division, self.z, self.u, []
            for part in range(1, division + 1):
                t = stop if part == division else self.now + part * h
                guess = n + ahead / division if division > 1 else n
                solved = self._newton(guess, y, h, t)
                if solved is None:
                    return None
                n, y, columns = solved
                parts.append(columns)
            if division == 1:
                ahead = np.where((self.u > self.on) & (n > self.on), n - self.u, 0.0)
            found.append((y, parts, n))
        return found

    def _newton(self, n: np.ndarray, y: np.ndarray, h: float, t: float) -> Any:
        states, junctions, *_ = self.run._counts
        self.solves += 1
        history = tuple(y.tolist())
        for count in range(1, int(self.c["limit"]) + 1):
            v = n
            try:
                known = (self.p, history, tuple(v.tolist()))
                stamps = np.array(self.run._stamps(*known, h, t, *self.small)).reshape(-1, 2)
                x = self._solved(stamps)
                if x is None:
                    return None
                results = np.array(self.run._results(*known, tuple(x.tolist()), h, t, *self.small))
            except ArithmeticError:
                self.stuck = int(np.argmax(v / self.scale)) + 1 if junctions else 0
                return None
            n, good = self._limited(v, results[:junctions], stamps[self.run._slopes, 0], count)
            if good:
                self.iterations += count
                return n, results[junctions : junctions + states], results[junctions + states :]
        self.iterations += int(self.c["limit"])
        return None

    def _solved(self, stamps: np.ndarray) -> np.ndarray | None:
        """The free unknowns for the companions' conductances and offsets; None where nothing determines them."""
        from scipy.sparse.linalg import splu

        matrix = (self.incidence.multiply(stamps[:, 0]) @ self.incidence.T).tocsc()
        right = -(self.incidence @ stamps[:, 1])
        try:
            factors = splu(matrix)
        except RuntimeError:
            self.stuck = -1 - self.run._counts[0] - _loosest(matrix)
            return None
        x = factors.solve(right)
        return x + factors.solve(right - matrix @ x)

    def _limited(self, v: np.ndarray, n: np.ndarray, slopes: np.ndarray, count: int) -> tuple[np.ndarray, bool]:
        """The convergence test and the limiting of equations/limiting, on arrays."""
        step, off = n - v, -6.0 * self.scale
        close = np.abs(step) <= self.c["agreement"] * self.shares * self.scale
        slack = BLOCKED if count <= PATIENCE else np.inf
        blocked = ((n < off) & (v < off)) | ((n < 0.0) & (v < 0.0) & (np.abs(step) <= slack * self.scale))
        blocked &= ~self.flattens
        rounding = np.abs(step) <= ROUNDING * np.abs(n)
        noise = 0.0 if count <= PATIENCE else self.c["tolerance"] * self.c["floor_current"]
        nothing = ((n <= self.critical) & (np.abs(step) * slopes <= noise)) | self.straight
        moving = ~(close | blocked | rounding | nothing)
        limit = moving & (n > self.critical) & (step > 0.0) & ~self.flattens
        with np.errstate(all="ignore"):
            inside = np.minimum(v + self.scale * np.log1p(step / self.scale), self.critical + BEYOND * self.scale)
            entering = self.scale * np.log(n / self.scale)
        limited = np.where(limit, np.where(v > 0.0, inside, entering), n)
        limited = np.where(moving & self.flattens & (n * v < 0.0), 0.0, limited)
        if moving.any():
            self.stuck = int(np.flatnonzero(moving)[-1]) + 1
        return limited, not bool(moving.any())

    def _failed(self, size: float) -> bool:
        self.rejected += 1
        self.failures += 1
        self.wish = size * 0.25
        self.u = np.minimum(self.u, self.critical)
        return self.failures > 20 or self.c["order"] == 1

    def _controlled(self, size: float, found: list) -> bool:
        """Whether a step is accurate enough; sets the next one's size."""
        order = int(self.c["order"])
        self._error = 0.0
        self.kink = bool(np.any((self.u > self.on) != (found[-1][2] > self.on)))
        if order == 1:
            return True
        if self.kink and size > 1.01 * self.c["kink_size"] and size > self.c["smallest"]:
            self.rejected += 1
            self.wish = self.c["kink_size"]
            return False
        difference = _combine(_ERRORS[order], [states for states, _, _ in found])
        errors = np.abs(difference) / np.maximum(self.peaks, self.floors) / self.c["tolerance"]
        if order == 3:
            scale = np.maximum(self.watched_peaks, self.c["floor_current"]) * self.c["watch_tolerance"]
            errors = np.concatenate([errors, self._bend(found) / scale])
        self._error = error = float(np.max(errors, initial=0.0))
        self._errors = errors
        factor = 2.0 if error < 1e-3 else 0.9 * error ** (-1.0 / order)
        if not error <= 1.0 and size > self.c["smallest"]:
            self.rejected += 1
            self.wish = size * max(0.2, factor) if factor > 0.0 else size * 0.2
            return False
        if not error < 1e30:
            return False
        crossed = self.armed & (self._reached(found) > 0.0) & (self.passed <= 0.0)
        if size > self.c["event_size"] and np.any(crossed):
            self.rejected += 1
            before, after = self.passed[crossed], self._reached(found)[crossed]
            self.wish = max(0.6 * self.c["event_size"], float(np.min(SHORT * size * before / (before - after))))
            return False
        self.wish = size if 0.9 <= factor <= 1.2 else max(self.c["smallest"], size * min(2.0, max(0.2, factor)))
        return True

    def _most_wrong(self) -> int:
        """The state or watched current whose error is largest, or no number, as `nearest` takes it."""
        if not len(self._errors):
            return 0
        states, worst = self.run._counts[0], int(np.argmax(self._errors))
        return -1 - (worst if worst < states else states + int(self.run._watched[worst - states]))

    def _reached(self, found: list) -> np.ndarray:
        """How far each threshold is passed at the end of a step."""
        columns = self.run._counts[3]
        return _combine(_WEIGHTS[int(self.c["order"])], [parts[-1][columns:] for _, parts, _ in found])

    def _approach(self, size: float, reached: np.ndarray) -> None:
        """Note the threshold that is passed; where one is neared, end the next step short of it."""
        over = np.flatnonzero(self.armed & (reached > 0.0))
        self.event = int(over[-1]) + 1 if len(over) and self.c["order"] > 1 else 0
        near = self.armed & (reached <= 0.0) & (reached > self.passed)
        if self.c["order"] > 1 and np.any(near):
            ahead = float(np.min(SHORT * size * reached[near] / (self.passed[near] - reached[near])))
            if ahead < self.wish:
                self.wish = max(0.6 * self.c["event_size"], ahead)
        self.passed = reached

    def _bend(self, found: list) -> np.ndarray:
        """What a quadratic misses of the watched currents, from the third difference (see run_source)."""
        one, two, three = ([part[self.run._watched] for part in parts] for _, parts, _ in found)
        end = _combine(_WEIGHTS[3], [one[-1], two[-1], three[-1]])
        moved = 36.0 * (two[-1] - one[-1]) - 22.5 * (three[-1] - one[-1])
        return 0.0481 * np.abs(9.0 * end + 72.0 * two[0] - 27.0 * three[0] - 54.0 * three[1] + moved)

    def _accept(self, size: float, stop: float, found: list) -> None:
        weights = _WEIGHTS[int(self.c["order"])]
        self.failures, self.steps, self.now = 0, self.steps + 1, stop
        fade = 1.0 - min(1.0, self.c["fade"] * size)
        self.z = _combine(weights, [states for states, _, _ in found])
        self.peaks = np.maximum(np.abs(self.z), self.peaks * fade)
        columns = self.run._counts[3]
        ends = _combine(weights, [parts[-1][:columns] for _, parts, _ in found])
        mean = _combine(weights, [sum(parts)[:columns] / len(parts) for _, parts, _ in found])
        self.watched_peaks = np.maximum(np.abs(ends[self.run._watched]), self.watched_peaks * fade)
        if self.landing or self.kink:
            self.wish, self.landing = min(self.wish, self.c["kink_size"]), False
        self._cut(size, found[-1][2])
        self._approach(size, self._reached(found))
        if self.c["record"] > 0.0:
            jump = self._jumped(found)
            ends = found[-1][1][-1][:columns] if jump else ends
            middle = 1.5 * mean - 0.25 * (self.ends + ends)
            row = [stop, *np.stack([middle, ends], axis=1).ravel().tolist(), float(self.kink or jump)]
            self.out[self.position : self.position + len(row)] = row
            self.position += len(row)
            self.ends = ends
        self.uneven = UNEVEN if self.kink else self.uneven - 1

    def _jumped(self, found: list) -> bool:
        """Whether extrapolation would overshoot a jump of a voltage (see record_source)."""
        if self.c["order"] != 3 or not (self.kink or self.uneven > 0):
            return False
        columns = self.run._counts[3]
        difference = _combine(_ERRORS[3], [parts[-1][:columns][self.voltages] for _, parts, _ in found])
        return bool(np.any(np.abs(difference) > JUMP * self.c["floor_voltage"] * self.c["tolerance"]))

    def _cut(self, size: float, n: np.ndarray) -> None:
        """Shorten the next step to end where a blocked junction is about to conduct."""
        rising = (n < self.on - self.scale) & (n > self.u)
        for index in np.flatnonzero(rising):
            ahead = (self.on[index] - n[index]) * size / (n[index] - self.u[index]) * 1.02
            if max(0.05 * self.wish, self.c["smallest"]) < ahead < self.wish:
                self.wish, self.landing = float(ahead), True
        self.u = n


def _loosest(matrix: Any) -> int:
    """Of a singular matrix, the unknown that it leaves most free: the largest of its null vector, or the weakest
    diagonal where it is too large to be decomposed."""
    if matrix.shape[0] > _DECOMPOSED or not np.all(np.isfinite(matrix.data)):
        return int(np.argmin(np.nan_to_num(np.abs(matrix.diagonal()))))
    return int(np.argmax(np.abs(np.linalg.svd(matrix.toarray())[2][-1])))


def _combine(weights: tuple[float, float, float], values: list[np.ndarray]) -> np.ndarray:
    result = np.zeros_like(values[0])
    for weight, value in zip(weights, values, strict=False):
        result = result + weight * value
    return result
