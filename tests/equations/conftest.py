"""Frames of circuits given as text."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from simcore.components.build import build_frame
from simcore.components.frame import Frame
from simcore.design.elaborate import elaborate
from simcore.design.files import load_text
from simcore.equations.grounding import grounded

LAW = "saturation_current = 1 nA, ideality_factor = 1.8"
HALF_WAVE = f"""
a -> g: source e, sine = 10 V peak, frequency = 50 Hz
a -> p: diode D1, {LAW}
p -> g: capacitor C, 100 uF
p -> g: resistor R, 1 kOhm
reference g
"""
BRIDGE = f"""
a -> b: source e, sine = 17 V peak, frequency = 50 Hz, series_resistance = 0.5 Ohm
a -> p: diode D1, {LAW}
b -> p: diode D2, {LAW}
m -> a: diode D3, {LAW}
m -> b: diode D4, {LAW}
p -> m: capacitor C, 1 mF
p -> m: resistor R, 20 Ohm
reference m
"""
LADDER = f"""
let N = STAGES
a[0] -> d[0]: source e, sine = 1 kV peak, frequency = 10 kHz, series_resistance = 100 Ohm
repeat k from 1 to N {{
    a[k-1] -> a[k]: capacitor A[k], 10 nF
    d[k] -> d[k-1]: capacitor B[k], 10 nF
    d[k-1] -> a[k]: diode D[k], {LAW}
    a[k] -> d[k]: diode E[k], {LAW}
}}
d[N] -> d[0]: resistor R, 10 MOhm
reference d[0]
"""


def frame_from(text: str) -> tuple[Frame, list]:
    """The frame of a text and its grounded nodes; soundness is the design room's matter and not asked here."""
    project, mistakes = load_text(text, "frame")
    assert not mistakes
    circuit, _ = elaborate(project)
    frame = build_frame(circuit)
    return frame, grounded(frame, circuit.references)


@pytest.fixture
def frame_of() -> Callable[[str], tuple[Frame, list]]:
    return frame_from


@pytest.fixture
def named_frame() -> Callable[[str], tuple[Frame, list]]:
    def make(name: str) -> tuple[Frame, list]:
        if name.startswith("ladder-"):
            return frame_from(LADDER.replace("STAGES", name.removeprefix("ladder-")))
        return frame_from({"bridge": BRIDGE, "half-wave": HALF_WAVE}[name])

    return make
