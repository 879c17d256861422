"""The circuits that are measured, each stated once: its numbers, and its description in our language.

Knows text only; the same circuits as hand-written equations are in equations.py.
"""

from __future__ import annotations

from dataclasses import dataclass

SATURATION_CURRENT = 1e-9
IDEALITY_FACTOR = 1.8
LAW = f"saturation_current = {SATURATION_CURRENT!r} A, ideality_factor = {IDEALITY_FACTOR!r}"


@dataclass(frozen=True)
class Bridge:
    """A bridge with a reservoir capacitor: crest in V, source and load resistance in Ohm, capacitance in F, frequency
    in Hz; choke: inductance in H between bridge and reservoir, 0 for none."""

    crest: float = 17.0
    source_resistance: float = 0.5
    capacitance: float = 1e-3
    load: float = 20.0
    frequency: float = 50.0
    choke: float = 0.0
    name: str = "bridge"
    output: tuple[str, str] = ("a", "m")

    @property
    def text(self) -> str:
        """The description without a study; node a against m is the output."""
        raw = "r" if self.choke else "a"
        filtered = f"r -> a: inductor L, {self.choke!r} H, series_resistance = 0.15 Ohm\n" if self.choke else ""
        return f"""
x -> y: source e, sine = {self.crest!r} V peak, frequency = {self.frequency!r} Hz, series_resistance = {self.source_resistance!r} Ohm
x -> {raw}: diode D1, {LAW}
y -> {raw}: diode D2, {LAW}
m -> x: diode D3, {LAW}
m -> y: diode D4, {LAW}
{filtered}a -> m: capacitor C, {self.capacitance!r} F
a -> m: resistor R, {self.load!r} Ohm
reference m
observe u_out = voltage(a)
"""


@dataclass(frozen=True)
class Ladder:
    """A voltage multiplier of so many stages, two diodes and two capacitors each; units as for Bridge."""

    stages: int
    crest: float = 1e3
    source_resistance: float = 100.0
    capacitance: float = 10e-9
    end_resistance: float = 1.0
    load: float = 100e6
    frequency: float = 10e3
    output: tuple[str, str] = ("a", "d[0]")

    @property
    def name(self) -> str:
        return f"ladder {self.stages}"

    @property
    def text(self) -> str:
        """The description without a study; node a against d[0] is the output."""
        return f"""
a0[0] -> d[0]: source e, sine = {self.crest!r} V peak, frequency = {self.frequency!r} Hz, series_resistance = {self.source_resistance!r} Ohm
repeat k from 1 to {self.stages} {{
    a0[k-1] -> a0[k]: capacitor A[k], {self.capacitance!r} F
    d[k] -> d[k-1]: capacitor B[k], {self.capacitance!r} F
    d[k-1] -> a0[k]: diode D[k], {LAW}
    a0[k] -> d[k]: diode E[k], {LAW}
}}
d[{self.stages}] -> a: resistor R0, {self.end_resistance!r} Ohm
a -> d[0]: resistor R, {self.load!r} Ohm
reference d[0]
observe u_out = voltage(a)
"""


@dataclass(frozen=True)
class SixPulse:
    """A three-phase bridge that feeds a choke and a resistance; crest in V of a phase, inductance in H."""

    crest: float = 325.0
    inductance: float = 10e-3
    load: float = 20.0
    frequency: float = 50.0
    name: str = "six-pulse"
    output: tuple[str, str] = ("b", "m")

    @property
    def text(self) -> str:
        """The description without a study; node b against m, the load, is the output."""
        return f"""
(x, y, z): three_phase e, sine = {self.crest!r} V phase peak, frequency = {self.frequency!r} Hz, series_resistance = 20 mOhm, series_inductance = 1 mH
x -> a: diode D1, {LAW}
y -> a: diode D3, {LAW}
z -> a: diode D5, {LAW}
m -> x: diode D4, {LAW}
m -> y: diode D6, {LAW}
m -> z: diode D2, {LAW}
a -> b: inductor L, {self.inductance!r} H, series_resistance = 50 mOhm
b -> m: resistor R, {self.load!r} Ohm
reference m
observe u_out = voltage(a)
"""


HALF_WAVE = f"""
e -> g: source V, sine = 10 V peak, frequency = 50 Hz
e -> a: diode D, {LAW}
a -> g: capacitor C, 100 uF
a -> g: resistor R, 1 kOhm
reference g
"""
