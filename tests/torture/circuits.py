"""Circuits at the ends of what the language allows: texts by name, each with one study or more."""

from __future__ import annotations

LAW = "saturation_current = 1 nA, ideality_factor = 1.8, series_resistance = 20 mOhm"
BARE = "saturation_current = 1e-14 A, ideality_factor = 1"
SINE = "a -> g: source e, sine = 10 V peak, frequency = 50 Hz"
TRANSIENT = "study s: transient, duration = 40 ms"
SETTLED = "study s: settled"


def text(*lines: str) -> str:
    """Statements one a line, the node g being 0 V."""
    return "\n".join(("reference g", *lines)) + "\n"


def ladder(stages: int, study: str = "transient, duration = 1 ms") -> str:
    """A voltage multiplier of so many doubling stages, cold."""
    return text(
        "p[0] -> g: source e, sine = 700 V peak, frequency = 20 kHz, series_resistance = 200 Ohm",
        "g -> q[0]: resistor foot, 1 Ohm",
        f"repeat k from 1 to {stages} {{",
        "    p[k-1] -> p[k]: capacitor C_push[k], 10 nF",
        "    q[k-1] -> q[k]: capacitor C_hold[k], 10 nF",
        f"    q[k-1] -> p[k]: diode D_push[k], {BARE}",
        f"    p[k] -> q[k]: diode D_hold[k], {BARE}",
        "}",
        f"q[{stages}] -> g: resistor R_L, 100 MOhm",
        f"study s: {study}",
    )


def _string(count: int, ends: str) -> str:
    chain = f"repeat k from 1 to {count} {{ d[k-1] -> d[k]: diode D[k], {ends} }}"
    return text(
        "d[0] -> g: source e, sine = 300 V peak, frequency = 50 Hz",
        chain,
        f"d[{count}] -> g: resistor R1, 1 kOhm",
        f"d[{count}] -> g: capacitor C1, 10 uF",
        TRANSIENT,
        "study t: settled",
    )


def _rectifier(diode: str = LAW, *more: str, source: str = SINE, study: str = TRANSIENT) -> str:
    parts = [f"a -> p: diode D1, {diode}", "p -> g: capacitor C1, 1000 uF", "p -> g: resistor R1, 100 Ohm"]
    return text(source, *parts, *more, study)


def _transformer(name: str, a: str, b: str, ratio: str, more: str = "") -> str:
    return f"({a} -> g) : ({b} -> g): transformer {name}, turns = {ratio}{more}"


CIRCUITS = {
    "zero source resistance, large capacitor, crest": _rectifier(
        f"{BARE}", "p -> g: capacitor C2, 1 F", study=TRANSIENT + ", angle = 90 deg"
    ),
    "zero source resistance, capacitor across the source, crest": text(
        SINE, "a -> g: capacitor C1, 10 mF", "a -> g: resistor R1, 1 Ohm", TRANSIENT + ", angle = 90 deg"
    ),
    "twenty diodes in series": _string(20, LAW),
    "twenty diodes in series without resistance": _string(20, BARE),
    "twenty unlike diodes in series": _string(20, "saturation_current = 1e-6 A * 10 ^ (-k / 2), ideality_factor = 1"),
    "antiparallel pair": _rectifier(LAW, f"p -> a: diode D2, {LAW}"),
    "antiparallel pair without resistance": _rectifier(BARE, f"p -> a: diode D2, {BARE}"),
    "twenty antiparallel pairs in series": text(
        "d[0] -> g: source e, sine = 30 V peak, frequency = 50 Hz",
        f"repeat k from 1 to 20 {{\n d[k-1] -> d[k]: diode D[k], {BARE}\n d[k] -> d[k-1]: diode E[k], {BARE}\n}}",
        "d[20] -> g: resistor R1, 10 Ohm",
        TRANSIENT,
    ),
    "load between two blocked diodes": text(
        SINE,
        f"x -> a: diode D1, {BARE}",
        f"g -> y: diode D2, {BARE}",
        "y -> x: capacitor C1, 1 uF",
        "y -> x: resistor R1, 1 MOhm",
        TRANSIENT,
        "study t: settled",
    ),
    "node between two reversed diodes": text(
        SINE, f"x -> a: diode D1, {BARE}", f"x -> g: diode D2, {BARE}", TRANSIENT, "study t: operating_point"
    ),
    "node tied by a capacitor alone": text(
        SINE, f"a -> x: diode D1, {BARE}", "x -> g: capacitor C1, 1 pF", TRANSIENT, "study t: settled"
    ),
    "load behind two capacitors": text(
        SINE,
        "a -> x: capacitor C1, 1 uF",
        "g -> y: capacitor C2, 1 uF",
        "x -> y: resistor R1, 1 kOhm",
        f"x -> y: diode D1, {LAW}",
        TRANSIENT,
        "study t: settled",
    ),
    "ideal transformers back to back": text(
        SINE,
        _transformer("T1", "a", "b", "1 : 10"),
        _transformer("T2", "b", "c", "10 : 1"),
        _transformer("T3", "c", "d", "1 : 1"),
        f"d -> p: diode D1, {LAW}",
        "p -> g: resistor R1, 100 Ohm",
        "p -> g: capacitor C1, 100 uF",
        TRANSIENT,
        "study t: settled",
    ),
    "ideal transformers back to back without load": text(
        SINE, _transformer("T1", "a", "b", "1 : 1000"), _transformer("T2", "b", "c", "1000 : 1"), "c -> g: resistor R1, 1 GOhm", TRANSIENT
    ),
    "two ideal transformers in parallel": text(
        SINE,
        _transformer("T1", "a", "b", "1 : 2"),
        _transformer("T2", "a", "b", "1 : 2"),
        "b -> g: resistor R1, 1 Ohm",
        TRANSIENT,
    ),
    "magnetising behind ideal windings": text(
        SINE,
        _transformer("T1", "a", "b", "1 : 1", ", magnetising = 1 uH"),
        _transformer("T2", "b", "c", "1 : 1", ", magnetising = 1 MH"),
        "c -> g: resistor R1, 1 Ohm",
        TRANSIENT,
        "study t: settled",
    ),
    "resonance of quality 1000 at its frequency": text(
        SINE,
        "a -> b: inductor L1, 0.1 H, series_resistance = 31.4159265 mOhm",
        "b -> g: capacitor C1, 101.3211836 uF",
        "study s: transient, duration = 1 s",
        "study t: settled",
    ),
    "resonance of quality 1000 behind a diode": text(
        SINE,
        f"a -> x: diode D1, {LAW}",
        "x -> b: inductor L1, 0.1 H, series_resistance = 31.4 mOhm",
        "b -> g: capacitor C1, 101.32 uF",
        "b -> g: resistor R1, 31.4 kOhm",
        TRANSIENT,
        "study t: settled",
    ),
    "trap of quality 1000 between sources": text(
        SINE,
        "a -> b: inductor L1, 1 mH, series_resistance = 1 mOhm",
        "a -> b: capacitor C1, 1.1258 mF",
        f"b -> p: diode D1, {LAW}",
        "p -> g: resistor R1, 100 Ohm",
        "p -> g: capacitor C2, 470 uF",
        TRANSIENT,
        "study t: settled",
    ),
    "nanohenry with millifarad": _rectifier(
        LAW, "a -> w: inductor L1, 1 nH", "w -> g: capacitor C2, 10 mF", "w -> g: resistor R2, 1 Ohm", study="study s: transient, duration = 1 ms"
    ),
    "nanohenry with millifarad behind a diode": text(
        SINE, "a -> w: inductor L1, 1 nH", f"w -> p: diode D1, {BARE}", "p -> g: capacitor C1, 10 mF", "p -> g: resistor R1, 1 Ohm", TRANSIENT + ", angle = 90 deg"
    ),
    "femtofarad junction": _rectifier(LAW + ", junction_capacitance = 1 fF @ 4 V"),
    "femtofarad junction behind a henry": text(
        SINE,
        "a -> w: inductor L1, 1 H",
        f"w -> p: diode D1, {LAW}, junction_capacitance = 1 fF @ 4 V",
        "p -> g: resistor R1, 100 Ohm",
        TRANSIENT,
        "study t: settled",
    ),
    "junction of a farad": _rectifier(LAW + ", junction_capacitance = 1 mF @ 4 V"),
    "stiff by 1e15": text(
        SINE,
        "a -> b: resistor R1, 1 uOhm",
        "b -> c: resistor R2, 1 GOhm",
        "b -> g: capacitor C1, 1 uF",
        "c -> g: capacitor C2, 1 uF",
        f"b -> d: diode D1, {LAW}",
        "d -> g: resistor R3, 1 kOhm",
        TRANSIENT,
        "study t: operating_point",
    ),
    "time constants 1e15 apart": text(
        SINE,
        "a -> b: resistor R1, 1 mOhm",
        "b -> g: capacitor C1, 1 pF",
        "a -> c: resistor R2, 1 MOhm",
        "c -> g: capacitor C2, 1 F",
        TRANSIENT,
        "study t: settled",
    ),
    "milliohm chain of megohms": text(
        SINE,
        "n[0] -> a: resistor R0, 1 uOhm",
        "repeat k from 1 to 15 { n[k-1] -> n[k]: resistor R[k], 1 uOhm * 10 ^ k }",
        "n[15] -> g: resistor R_L, 1 Ohm",
        TRANSIENT,
        "study t: operating_point",
    ),
    "load of constant power at start-up": _rectifier(
        LAW, "p -> g: load L1, power = 10 W, cut_in = 8 V, cut_out = 4 V", study=TRANSIENT + "\nstudy t: settled"
    ),
    "load of constant power that the supply cannot carry": _rectifier(
        LAW,
        "p -> g: load L1, power = 10 kW, cut_in = 8 V, cut_out = 7.9 V",
        source=SINE + ", series_resistance = 1 Ohm",
    ),
    "load of constant power without a capacitor": text(
        SINE + ", series_resistance = 1 Ohm",
        f"a -> p: diode D1, {LAW}",
        "p -> g: load L1, power = 20 W, cut_in = 6 V, cut_out = 3 V",
        TRANSIENT,
        "study t: settled",
    ),
    "load of constant current without a capacitor": text(
        SINE, f"a -> p: diode D1, {LAW}", "p -> g: load L1, current = 2 A", TRANSIENT, "study t: settled"
    ),
    "thyristor fired at zero volts": text(
        SINE,
        f"a -> p: thyristor Q1, {LAW}, firing_angle = 0 deg, firing_reference = voltage(a), holding_current = 10 mA",
        "p -> g: resistor R1, 10 Ohm",
        TRANSIENT,
        "study t: settled",
    ),
    "thyristor fired at the end of its half cycle": text(
        SINE,
        f"a -> p: thyristor Q1, {LAW}, firing_angle = 180 deg, firing_reference = voltage(a), holding_current = 10 mA",
        "p -> g: resistor R1, 10 Ohm",
        TRANSIENT,
        "study t: settled",
    ),
    "thyristor with a choke and a holding current never reached": text(
        SINE,
        f"a -> b: thyristor Q1, {LAW}, firing_angle = 30 deg, firing_reference = voltage(a), holding_current = 100 A",
        "b -> p: inductor L1, 10 mH",
        "p -> g: resistor R1, 10 Ohm",
        TRANSIENT,
        "study t: settled",
    ),
    "switch that controls itself": text(
        SINE,
        "a -> p: switch S1, closed_resistance = 1 mOhm, open_resistance = 1 GOhm, control = voltage(p), closes_above = 1 V, opens_below = 0.5 V",
        "a -> p: resistor R2, 1 kOhm",
        "p -> g: resistor R1, 1 kOhm",
        TRANSIENT,
    ),
    "switch that a choke feeds": text(
        SINE,
        "a -> b: inductor L1, 1 H",
        "b -> g: switch S1, initially = closed, opens_at = 5 ms",
        "b -> g: capacitor C1, 1 pF",
        "study s: transient, duration = 6 ms",
    ),
    "clamp across the mains": text(
        "a -> g: source e, sine = 1000 V peak, frequency = 50 Hz, series_resistance = 0.1 Ohm",
        "a -> g: clamp V1, clamping = [430 V @ 1 mA, 710 V @ 50 A]",
        TRANSIENT,
        "study t: settled",
    ),
    "inrush limiter that runs hot": _rectifier(
        LAW,
        source="e -> g: source feed, sine = 325 V peak, frequency = 50 Hz\n"
        "e -> a: inrush_limiter N1, cold_resistance = 10 Ohm, sensitivity = 3000 K, dissipation = 15 mW/K, heat_capacity = 30 mJ/K",
    ),
    "fuse that melts": _rectifier(
        BARE, source="e -> g: source feed, sine = 325 V peak, frequency = 50 Hz\ne -> a: fuse F1, resistance = 10 mOhm, melting_i2t = 1 A^2 s", study=TRANSIENT + ", angle = 90 deg"
    ),
    "breakdown at two volts": _rectifier(LAW + ", breakdown_voltage = 2 V @ 1 mA"),
    "recovery of a slow diode at a kilohertz": text(
        "a -> g: source e, sine = 10 V peak, frequency = 1 kHz, series_resistance = 1 Ohm",
        f"a -> p: diode D1, {LAW}, carrier_lifetime = 1 ms",
        "p -> g: resistor R1, 100 Ohm",
        "study s: transient, duration = 5 ms",
        "study t: settled",
    ),
    "saturation current of 1e-30 A": _rectifier("saturation_current = 1e-30 A, ideality_factor = 1"),
    "saturation current of 1 A": _rectifier("saturation_current = 1 A, ideality_factor = 1"),
    "a megavolt": _rectifier(BARE, source="a -> g: source e, sine = 1 MV peak, frequency = 50 Hz"),
    "a nanovolt": _rectifier(BARE, source="a -> g: source e, sine = 1 nV peak, frequency = 50 Hz"),
    "a gigahertz": _rectifier(
        BARE, source="a -> g: source e, sine = 10 V peak, frequency = 1 GHz", study="study s: transient, duration = 5 ns"
    ),
    "a microhertz": _rectifier(BARE, source="a -> g: source e, sine = 10 V peak, frequency = 1 uHz", study=SETTLED),
    "steps of a megavolt": _rectifier(
        LAW, source="a -> g: source e, points = [0 s: 0 V, 1 ms: 0 V, 1 ms: 1 MV, 2 ms: -1 MV, 2 ms: 1 V], series_resistance = 1 Ohm"
    ),
} | {
    f"ideality factor {factor:g}": _rectifier(
        f"saturation_current = 1 nA, ideality_factor = {factor!r}", study=TRANSIENT + "\nstudy t: settled"
    )
    for factor in (0.01, 0.1, 0.5, 1.0, 3.0)
} | {
    f"{degrees:g} degC": _rectifier(
        LAW + ", data_temperature = 25 degC, temperature = T", f"let T = {degrees!r} degC", study=TRANSIENT + "\nstudy t: settled"
    )
    for degrees in (-40.0, 25.0, 175.0)
}  # fmt: skip
