"""The flags of a run: numbers that thresholds change, at once or after a delay.

Knows thresholds and the run's parameters, and nothing of kernels, kinds or studies.
"""

from __future__ import annotations

from collections.abc import Hashable, MutableMapping, Sequence

from simcore.components.frame import Flag, Frame, Threshold


class Flags:
    """frame: whose flags and thresholds these are; numbers: the run's parameters, which hold the flags; period: of the
    first sine in s, 0 where there is none; pending: changes to come (time, flag, up); told: what thresholds had to
    tell, with its time; times in s on the sources' clock.
    """

    def __init__(self, frame: Frame, numbers: list[float], period: float):
        self._frame, self._numbers, self._period = frame, numbers, period
        self.pending: list[tuple[float, Flag, bool]] = []
        self.told: list[tuple[float, str]] = []

    def remember(self, memory: MutableMapping[tuple[Hashable, ...], float], now: float) -> None:
        """Write flags and what is pending to a memory by element."""
        for flag in self._frame.flags:
            memory[(flag.element, flag.name, "flag")] = self._numbers[flag.position]
            for up in (False, True):
                key = (flag.element, flag.name, "pending", up)
                memory.pop(key, None)
                times = [time for time, other, value in self.pending if other == flag and value == up]
                if times:
                    memory[key] = min(times) - now

    def recall(self, memory: MutableMapping[tuple[Hashable, ...], float], now: float) -> None:
        """Take flags and what is pending from a memory; what it lacks stays as it is."""
        for flag in self._frame.flags:
            self._numbers[flag.position] = memory.get(
                (flag.element, flag.name, "flag"), self._numbers[flag.position]
            )
            for up in (False, True):
                key = (flag.element, flag.name, "pending", up)
                if key in memory:
                    self.pending.append((now + memory[key], flag, up))

    def move(self, by: float) -> None:
        """Shift what is pending, as the sources' clock is shifted."""
        self.pending = [(time + by, flag, up) for time, flag, up in self.pending]

    def fall_due(self, now: float) -> bool:
        """Change the flags whose time has come; whether there were any."""
        slack = 1e-12 * abs(now)
        due = [each for each in self.pending if each[0] <= now + slack]
        for _, flag, up in due:
            self._numbers[flag.position] = float(up)
        self.pending = [each for each in self.pending if each[0] > now + slack]
        return bool(due)

    def passed(self, reached: Sequence[float]) -> int | None:
        """The first threshold that counts and is passed; reached: how far each is passed."""
        for index, threshold in enumerate(self._frame.thresholds):
            if reached[index] > 0.0 and self._counts(threshold):
                return index
        return None

    def _counts(self, threshold: Threshold) -> bool:
        return all((self._numbers[flag.position] > 0.5) == up for flag, up in threshold.armed)

    def change(self, index: int, now: float) -> None:
        """Change a passed threshold's flags, the first at once and the others after its delay; a change at once
        withdraws what is pending for its flag."""
        threshold = self._frame.thresholds[index]
        delay = threshold.delay + threshold.turns * self._period
        for position, (flag, up) in enumerate(threshold.sets):
            if position == 0 or delay == 0.0:
                self._numbers[flag.position] = float(up)
                self.pending = [each for each in self.pending if each[1] != flag]
            else:
                self.pending.append((now + delay, flag, up))
        if threshold.tells:
            self.told.append((now, f"{threshold.element} {threshold.tells}"))
