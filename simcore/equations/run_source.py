"""The whole run of a circuit as the source of one function: time loop, extrapolation, Newton iteration, step control.

Every solve is a backward-Euler step. A basic step of size H is taken once with H, twice with H/2 and three times with
H/3, and the results are extrapolated (Deuflhard, SIAM Review 27, 1985; Hairer and Wanner, Solving Ordinary Differential
Equations II, 1996, IV.9); with order 1 it is one backward-Euler step without error control, which gives the consistent
start of a segment and, with a huge H, the operating point. Kept within floats, math functions, lists and tuples, so
that it can be compiled as it stands.

The function's face is told in run_interface.
"""

from __future__ import annotations

from simcore.equations.assemble import System
from simcore.equations.emit import Emitter, names_first
from simcore.equations.limiting import limited
from simcore.equations.record_source import extrapolated, recording
from simcore.equations.run_interface import (
    BLOCKED,
    CONTROLS,
    EVENT,
    FULL,
    JUMP,
    NO_CONVERGENCE,
    PATIENCE,
    SHORT,
    UNEVEN,
    record_width,
    saved_groups,
    watched_columns,
)
from simcore.equations.values import Level, Value

_WEAK_PIVOT = 1e-10


class RunSource:
    """Writes the source of a system's run, `source`; with responses it also carries the derivative of the states."""

    def __init__(self, system: System, responses: bool = False):
        self.system = system
        self._responses = responses
        self.watched = watched_columns(system)
        self.emitter = Emitter(self._stages(), self._iterates())
        self._lines: list[str] = []
        self._often: list[str] = []
        self._build()
        self.source = "\n".join(names_first(self._lines, self._often)) + "\n"

    def _stages(self) -> dict[str, list[Value]]:
        system = self.system
        fixed = [value for j in system.junctions for value in (j.scale, j.critical, j.straight)]
        fixed += [state.small for state in system.states]
        after = [state.new for state in system.states] + [column.value for column in system.columns]
        after += [value for guard in system.guards for value in (guard.pivot, guard.start)] + system.thresholds
        return {
            "variant": fixed,
            "step": [],
            "time": [],
            "iteration": [value for junction in system.junctions for value in (junction.new, junction.slope)],
            "after": after,
            "response": system.responses if self._responses else [],
        }

    def _iterates(self) -> dict[int, str]:
        """The voltages that an iteration gives, called what the next one starts from."""
        numbered = [(f"n{index}", junction.new) for index, junction in enumerate(self.system.junctions)]
        return {new.index: name for name, new in reversed(numbered) if new.level is Level.ITERATION}

    def _add(self, indent: int, *lines: str) -> None:
        self._lines.extend("    " * indent + line for line in lines)

    def _each(self, indent: int, count: int, *templates: str) -> None:
        """Write the templates for each index; `#` stands for it."""
        for index in range(count):
            self._add(indent, *(template.replace("#", str(index)) for template in templates))

    def _build(self) -> None:
        states, junctions = len(self.system.states), len(self.system.junctions)
        self._prologue(states, junctions)
        self._add(1, "while True:")
        self._choose_size()
        self._extrapolation(states, junctions)
        self._on_failure(junctions)
        self._control(states)
        self._accept(states, junctions)
        self._epilogue(states, junctions)

    def _prologue(self, states: int, junctions: int) -> None:
        add = self._add
        add(0, "def run(p, s, out, c, m):" if self._responses else "def run(p, s, out, c):")
        if self._responses:
            add(1, "square = len(m) // 4")
        self._each(1, len(self.system.frame.numbers), "p# = p[#]")
        add(1, *(f"{name} = c[{index}]" for index, name in enumerate(CONTROLS)))
        add(1, *self.emitter.lines["variant"])
        for index, junction in enumerate(self.system.junctions):
            scale, critical = self.emitter.name(junction.scale), self.emitter.name(junction.critical)
            add(
                1,
                f"w{index} = {scale}",
                f"k{index} = {critical}",
                f"b{index} = {scale} * agreement * {junction.agreement!r}",
            )
            add(1, f"o{index} = {scale} * -6.0", f"g{index} = {critical} - 3.0 * {scale}")
        add(1, "now = s[0]", "wish = s[1]")
        position = 2
        for letter, count in saved_groups(self.system):
            add(1, *(f"{letter}{index} = s[{position + index}]" for index in range(count)))
            position += count
        columns = len(self.system.columns)
        self._each(1, states, "e1_# = 0.0", "e2_# = 0.0", "e3_# = 0.0")
        self._each(1, columns, "c1_# = 0.0", "c2_# = 0.0", "c3_# = 0.0", "m2_# = 0.0", "m3_# = 0.0")
        self._each(1, len(self.watched), "d_# = 0.0", "h# = 0.0")
        self._each(1, junctions, "n# = u#", "a# = 0.0")
        self._each(1, len(self.system.thresholds), "t1_# = 0.0", "t2_# = 0.0", "t3_# = 0.0", "event = 0")
        add(1, "take1, take2, take3, miss1, miss2, miss3 = 1.0, 0.0, 0.0, 0.0, 0.0, 0.0")
        add(1, "if order == 2:", "    take1, take2, take3, miss1, miss2, miss3 = -1.0, 2.0, 0.0, -1.0, 1.0, 0.0")
        add(1, "if order == 3:", "    take1, take2, take3, miss1, miss2, miss3 = 0.5, -4.0, 4.5, 0.5, -2.0, 1.5")
        add(1, "mean1, mean2, mean3 = 1.5 * take1, 0.75 * take2, 0.5 * take3")
        add(1, "status = 0", "position = 0", "steps = 0", "rejected = 0", "solves = 0", "iterations = 0", "weak = 0")
        add(1, "failures = 0", "landing = 0.0", "kink = 0.0", "stuck = 0", "largest_error = 0")
        add(1, f"jump_size = {JUMP!r} * floor_voltage * tolerance", f"uneven = {UNEVEN}")

    def _choose_size(self) -> None:
        self._add(
            2,
            "left = t_end - now",
            "if left <= 0.0:",
            "    break",
            f"if record > 0.0 and position + {record_width(self.system)} > room:",
            f"    status = {FULL}",
            "    break",
            "if steps + rejected >= attempts:",
            f"    status = {FULL}",
            "    break",
            "size = min(wish, largest)",
            "last = size >= left * 0.999999",
            "if last:",
            "    size = left",
            "elif size > 0.5 * left:",
            "    size = 0.5 * left",
            "stop = t_end if last else now + size",
            "failed = False",
            "division = 1",
        )

    def _extrapolation(self, states: int, junctions: int) -> None:
        add = self._add
        add(2, "while division <= order:")
        add(3, "h = size / division", *self.emitter.lines["step"])
        self._each(3, states, "y# = z#")
        self._each(3, junctions, "n# = u#")
        if self._responses:
            add(
                3,
                f"base = division * {states * states}",
                "for k in range(square):",
                "    m[base + k] = m[k]",
            )
        add(3, "part = 1", "while part <= division:")
        add(4, "t = stop if part == division else now + part * h")
        add(4, *self.emitter.lines["time"])
        self._newton(junctions)
        add(4, *self.emitter.lines["after"])
        for guard in self.system.guards:
            pivot, start = self.emitter.name(guard.pivot), self.emitter.name(guard.start)
            add(4, f"if not {pivot} > {_WEAK_PIVOT!r} * {start}:", "    weak += 1")
        if self._responses:
            self._respond(states)
        names = [self.emitter.name(state.new) for state in self.system.states]
        if names:
            add(4, f"{', '.join(f'y{i}' for i in range(states))} = {', '.join(names)}")
        self._keep_inside()
        add(4, "part += 1")
        add(3, "if failed:", "    break")
        for division in (1, 2, 3):
            add(3, f"{'el' if division > 1 else ''}if division == {division}:")
            self._each(4, states, f"e{division}_# = y#")
            add(4, *(f"c{division}_{i} = {self.emitter.name(c.value)}" for i, c in enumerate(self.system.columns)))
            add(4, *(f"t{division}_{i} = {self.emitter.name(v)}" for i, v in enumerate(self.system.thresholds)))
            if division == 1:
                self._each(4, junctions, "a# = n# - u# if u# > g# and n# > g# else 0.0")
            add(4, "pass")
        add(3, "division += 1")

    def _respond(self, states: int) -> None:
        """Carry each direction's change of the states over the solve just made, with its factors."""
        add = self._add
        add(4, f"for k in range(base, base + square, {states}):")
        self._each(5, states, "e# = m[k + #]")
        add(5, *self.emitter.lines["response"])
        add(5, *(f"m[k + {i}] = {self.emitter.name(value)}" for i, value in enumerate(self.system.responses)))

    def _newton(self, junctions: int) -> None:
        add = self._add
        add(4, "solves += 1")
        if not junctions:
            add(4, *self.emitter.lines["iteration"])
            return
        add(4, "if division > 1:")
        self._each(5, junctions, "n# += a# / division")
        start = len(self._lines)
        add(4, "count = 0", f"slack = {BLOCKED!r}", "noise = 0.0", "while True:", "    count += 1")
        add(5, f"if count == {PATIENCE + 1}:", "    slack = 1e9", "    noise = tolerance * floor_current")
        self._each(5, junctions, "v# = n#")
        add(5, *self.emitter.lines["iteration"], "good = True")
        for index, junction in enumerate(self.system.junctions):
            if self.emitter.name(junction.new) != f"n{index}":
                add(5, f"n{index} = {self.emitter.name(junction.new)}")
        for index, junction in enumerate(self.system.junctions):
            names = (self.emitter.name(junction.slope), self.emitter.name(junction.straight))
            add(5, *(line.replace("#", str(index)) for line in limited(junction, index, *names)))
        add(5, "if good or count >= limit:", "    break")
        self._often = self._lines[start:]
        add(4, "iterations += count", "if not good:", "    failed = True", "    break")

    def _keep_inside(self) -> None:
        """Values inside the step: their sums over the halves and thirds, and the watched currents' third difference."""
        add = self._add
        names = [self.emitter.name(column.value) for column in self.system.columns]
        watched = [names[column] for column in self.watched]
        add(4, "if part < division:", "    if division == 2:")
        add(6, *(f"m2_{i} = {name}" for i, name in enumerate(names)), "pass")
        add(5, "elif part == 1:")
        add(6, *(f"m3_{i} = {name}" for i, name in enumerate(names)))
        add(6, *(f"d_{i} = -27.0 * {name}" for i, name in enumerate(watched)), "pass")
        add(5, "else:")
        add(6, *(f"m3_{i} += {name}" for i, name in enumerate(names)))
        add(6, *(f"d_{i} -= 54.0 * {name}" for i, name in enumerate(watched)), "pass")

    def _on_failure(self, junctions: int) -> None:
        add = self._add
        add(2, "if failed:", "    rejected += 1", "    failures += 1", "    wish = size * 0.25")
        self._each(3, junctions, "u# = min(u#, k#)")
        add(3, "if failures > 20 or order == 1:", f"    status = {NO_CONVERGENCE}", "    break", "continue")

    def _control(self, states: int) -> None:
        add = self._add
        add(2, "kink = 0.0")
        for index, column in enumerate(self.watched):
            add(2, f"q{index} = {extrapolated(column)}")
        for index in range(len(self.system.junctions)):
            add(2, f"if (u{index} > g{index}) != (n{index} > g{index}):", "    kink = 1.0")
        add(2, "if kink > 0.0 and order > 1 and size > 1.01 * kink_size and size > smallest:")
        add(3, "rejected += 1", "wish = kink_size", "continue")
        add(2, "error = 0.0", "largest_error = 0")
        for index, state in enumerate(self.system.states):
            floor = self.emitter.name(state.small)
            add(2, f"r = abs(miss1 * e1_{index} + miss2 * e2_{index} + miss3 * e3_{index}) / max(i{index}, {floor})")
            add(2, "if not r <= error:", "    error = r if r < 1e300 else 1e300", f"    largest_error = {-index - 1}")
        add(2, "error /= tolerance")
        if self.watched:
            add(2, "if order == 3:")
        for index, column in enumerate(self.watched):
            add(3, self._bend(index, column), "if not r <= error:", "    error = r if r < 1e300 else 1e300")
        add(2, "if order > 1:", "    if error < 1e-3:", "        factor = 2.0", "    else:")
        add(4, "factor = 0.9 * error ** (-1.0 / order)")
        add(3, "if not error <= 1.0 and size > smallest:", "    rejected += 1")
        add(4, "wish = size * max(0.2, factor) if factor > 0.0 else size * 0.2", "continue")
        add(3, "if not error < 1e30:", f"    status = {NO_CONVERGENCE}", "    stuck = largest_error", "    break")
        self._crossings()
        add(3, "wish = size if 0.9 <= factor <= 1.2 else max(smallest, size * min(2.0, max(0.2, factor)))")

    def _armed(self, index: int) -> str:
        """Whether a threshold's flags stand so that it counts."""
        conditions = self.system.frame.thresholds[index].armed
        return " and ".join(f"p{flag.position} {'>' if up else '<'} 0.5" for flag, up in conditions)

    def _crossings(self) -> None:
        """A step in which a threshold is passed is taken back unless it is as short as events are resolved to."""
        for index in range(len(self.system.thresholds)):
            reached = f"take1 * t1_{index} + take2 * t2_{index} + take3 * t3_{index}"
            self._add(3, f"if size > event_size and {self._armed(index)}:", f"    r = {reached}")
            self._add(4, f"if r > 0.0 and f{index} <= 0.0:", "    rejected += 1")
            self._add(5, f"wish = max(0.6 * event_size, {SHORT!r} * size * f{index} / (f{index} - r))", "continue")

    @staticmethod
    def _bend(index: int, column: int) -> str:
        """What a quadratic misses of a watched current, over its tolerance: 0.0481 of the third difference, which is
        taken over 1/3, 1/2, 2/3 and 1 of the step, each moved to second order by the differences of the divisions."""
        first, second, third = (f"c{division}_{column}" for division in (1, 2, 3))
        end = f"9.0 * q{index}"
        inside = f"d_{index} + 72.0 * m2_{column} - 22.5 * ({third} - {first}) + 36.0 * ({second} - {first})"
        return f"r = 0.0481 * abs({end} + {inside}) / (max(j{index}, floor_current) * watch_tolerance)"

    def _accept(self, states: int, junctions: int) -> None:
        add = self._add
        add(2, "failures = 0", "steps += 1", "now = stop")
        add(2, "weight = 1.0 - min(1.0, fade * size)")
        add(2, "if landing > 0.0 or kink > 0.0:", "    wish = min(wish, kink_size)", "    landing = 0.0")
        self._each(
            2,
            states,
            "z# = take1 * e1_# + take2 * e2_# + take3 * e3_#",
            "i# = max(abs(z#), i# * weight)",
        )
        if self._responses:
            size = states * states
            sums = " + ".join(f"take{division} * m[{division * size} + k]" for division in (1, 2, 3))
            add(2, "for k in range(square):", f"    m[k] = {sums}")
        for index in range(len(self.watched)):
            self._watch(index)
        self._each(
            2,
            junctions,
            "if n# < g# - w# and n# > u#:",
            "    d = (g# - n#) * size / (n# - u#) * 1.02",
            "    if max(0.05 * wish, smallest) < d < wish:",
            "        wish = d",
            "        landing = 1.0",
            "u# = n#",
        )
        self._approach()
        self._add(2, *recording(self.system, self.watched))
        self._add(2, f"uneven = {UNEVEN} if kink > 0.0 else uneven - 1")
        if self.system.thresholds:
            add(2, "if event > 0:", f"    status = {EVENT}", "    break")

    def _approach(self) -> None:
        """Note the threshold that is passed; where one is neared, end the next step short of it."""
        for index in range(len(self.system.thresholds)):
            self._add(2, f"r = take1 * t1_{index} + take2 * t2_{index} + take3 * t3_{index}")
            self._add(2, f"if order > 1 and {self._armed(index)}:", "    if r > 0.0:", f"        event = {index + 1}")
            self._add(3, f"elif r > f{index}:", f"    d = {SHORT!r} * size * r / (f{index} - r)")
            self._add(4, "if d < wish:", "    wish = max(0.6 * event_size, d)")
            self._add(2, f"f{index} = r")

    def _watch(self, index: int) -> None:
        """A watched current's end and peak; where it falls, the next step ends where the chord meets zero: turn-off
        cut."""
        lines = (
            "if 0.0 < q# < h# and u# > g#:",
            "    d = q# * size / (h# - q#)",
            "    if max(0.2 * wish, smallest) < d < wish:",
            "        wish = d",
            "        landing = 1.0",
            "h# = q#",
            "j# = max(abs(q#), j# * weight)",
        )
        self._add(2, *(line.replace("#", str(index)) for line in lines))

    def _epilogue(self, states: int, junctions: int) -> None:
        self._add(1, "s[0] = now", "s[1] = wish")
        position = 2
        for letter, count in saved_groups(self.system):
            self._add(1, *(f"s[{position + index}] = {letter}{index}" for index in range(count)))
            position += count
        event = f"event if status == {EVENT} else " if self.system.thresholds else ""
        which = f"{event}(stuck if status == {NO_CONVERGENCE} else largest_error)"
        self._add(1, f"return status, position, steps, rejected, solves, iterations, weak, {which}")
