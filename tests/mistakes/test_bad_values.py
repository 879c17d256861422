"""A bad value of every key of every kind gets a message at its place, with a cure: values follow from the declarations."""

from __future__ import annotations

import math
from collections.abc import Iterator

import pytest

from grammar.quantities import ANGLE, HERTZ, Dimension, unit_of
from simcore.components import KINDS
from simcore.components.kind import Key
from tests.mistakes.test_mistakes import messages

LAW = "saturation_current = 1 nA, ideality_factor = 1"
ELEMENTS = {
    "source": ("a -> b", "constant = 1 V"),
    "three_phase": ("(a, c, d) -> b", "sine = 4 V line rms, frequency = 50 Hz"),
    "resistor": ("a -> b", "resistance = 1 Ohm"),
    "capacitor": ("a -> b", "capacitance = 1 F"),
    "inductor": ("a -> b", "inductance = 1 H"),
    "transformer": ("(a -> b) : (c -> b)", "turns = 1 : 1"),
    "diode": ("a -> b", LAW),
    "thyristor": ("a -> b", f"{LAW}, firing_angle = 0 deg, firing_reference = voltage(a -> b)"),
    "switch": ("a -> b", "initially = closed"),
    "load": ("a -> b", "current = 1 A"),
    "fuse": ("a -> b", "resistance = 1 Ohm"),
    "inrush_limiter": ("a -> b", "cold_resistance = 1 Ohm, sensitivity = 1 K, dissipation = 1 W/K, heat_capacity = 1 J/K"),
    "clamp": ("a -> b", "clamping = [1 V @ 1 mA; 2 V @ 1 A]"),
}
"""Terminals, and what the kind needs at least."""
REST = "a -> b: resistor R1, 1 Ohm\nc -> b: resistor R2, 1 Ohm\nd -> b: resistor R3, 1 Ohm\nreference b\n"


def number(value: float, dimension: Dimension) -> str:
    return f"{math.degrees(value) if dimension == ANGLE else value!r} {unit_of(dimension)}".strip()


def bad_values(key: Key) -> Iterator[str]:
    """In another unit, below and above its range, at an end that is not part of it, no whole number, no word that it can be, without
    the place that a point holds at, or with one in another unit."""
    if key.form == "expression":
        yield from ("1 V", "power(R1)", "voltage(R1) * voltage(R1)")
        return
    if key.form in ("word", "text"):
        yield "1 V"
        return
    at = f"1 {unit_of(key.at)}" if key.at is not None else ""
    forms = {
        "point": f"{{}} @ {at}", "ratio": "{} : {}", "amplitude": "{} rms", "curve": f"[{{}} @ {at}]",
        "series": f"[0 {at[2:]}: {{}}]", "harmonics": "[3: {}]",
    }  # fmt: skip
    form, other = forms.get(key.form, "{}"), "1 V" if key.dimension == HERTZ else "1 Hz"
    yield form.replace("{}", other)
    if key.low is not None:
        yield form.replace("{}", number(key.low - 1.0, key.dimension))
    if key.low is not None and key.open_low:
        yield form.replace("{}", number(key.low, key.dimension))
    if key.high is not None:
        yield form.replace("{}", number(1.1 * key.high, key.dimension))
    if key.whole:
        yield "1.5"
    if key.form == "point":
        yield f"1 {unit_of(key.dimension)} @ {'1 V' if key.at == HERTZ else '1 Hz'}"
    if key.form == "point" and not key.bare:
        yield f"1 {unit_of(key.dimension)}"


@pytest.mark.parametrize("kind", KINDS)
def test_bad_values_of_every_key(kind: str) -> None:
    terminals, needed = ELEMENTS[kind]
    tried = 0
    for key in KINDS[kind].keys:
        others = [each.replace(";", ",") for each in needed.split(", ") if not each.startswith(f"{key.name} =")]
        for value in bad_values(key):
            line = f"{terminals}: {kind} X, {', '.join([*others, f'{key.name} = {value}'])}"
            place = line.index(f"{key.name} =")
            said = [block for block in messages(f"{line}\n{REST}").strip("\n").split("\n\n") if block.startswith("design.rect:1:")]
            here = [block for block in said if int(block.split(":")[2]) > place and key.name in block]
            assert any("cure: " in block for block in here), f"{line}\n{said}"
            tried += 1
    assert tried >= len(KINDS[kind].keys)
