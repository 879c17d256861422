"""The emitted run is made of our own words and numbers: whatever things are called in a description, it is the same text."""

from __future__ import annotations

import io
import keyword
import math
import re
import tokenize

import pytest

from simcore.components import KINDS
from simcore.equations.kernel import Kernel, compile_function
from simcore.equations.run_source import RunSource

TEXT = """purpose "{purpose}"
let {let} = 100 Ohm
{a} -> {g}: source {source}, sine = 10 V peak, frequency = 50 Hz, series_resistance = 0.1 Ohm as "{purpose}"
({a} -> {g}) : ({b} -> {c}): transformer {transformer}, turns = 2 : 1, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm
{b} -> {p}: diode {diode}, {sheet}
{p} -> {c}: capacitor {capacitor}, 1 mF
{p} -> {c}: resistor {resistor}, {let}
{p} -> {c}: switch {switch}, closes_at = 1 ms
{p} -> {c}: thyristor {thyristor}, saturation_current = 1 nA, ideality_factor = 1.8, firing_angle = 30 deg, firing_reference = voltage({p} -> {c}), holding_current = 1 mA
{p} -> {c}: load {load}, power = 1 W, cut_in = 5 V, cut_out = 2 V
{p} -> {c}: load {other}, current = [0 s: 1 mA, 1 s: 2 mA], period = 1 s
{p} -> {c}: clamp {clamp}, clamping = [15 V @ 1 mA, 25 V @ 10 A]
{p} -> {m}: fuse {fuse}, resistance = 20 mOhm, melting_i2t = 1 A^2 s
{m} -> {k}: inrush_limiter {limiter}, cold_resistance = 5 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K, heat_capacity = 300 mJ/K
{k} -> {c}: inductor {choke}, 1 mH, saturation_current = 1 A, series_resistance = 1 Ohm
({x}, {y}, {z}) -> {c}: three_phase {grid}, sine = 10 V line rms, frequency = 50 Hz, series_resistance = 1 Ohm
{x} -> {c}: resistor {rx}, {let}
{y} -> {c}: resistor {ry}, {let}
{z} -> {c}: resistor {rz}, {let}
reference {g}, {c}
observe {observe} = voltage({p})
datasheet {sheet}: diode {{ saturation_current = 1 nA, ideality_factor = 1.8 }}
"""
PARTS = (
    "let",
    "a",
    "g",
    "b",
    "c",
    "p",
    "source",
    "transformer",
    "diode",
    "capacitor",
    "resistor",
    "switch",
    "observe",
    "sheet",
    *("thyristor", "load", "other", "clamp", "fuse", "limiter", "choke", "grid"),
    *("m", "k", "x", "y", "z", "rx", "ry", "rz"),
)
PLAIN = {part: f"zq_{part}" for part in PARTS} | {"purpose": "zq"}
HOSTILE = dict(
    zip(
        PARTS,
        (
            "exec",
            "eval",
            "os_system",
            "import_os",
            "lambda",
            "print",
            "builtins",
            "globals",
            "while",
            "return",
            "del",
            "raise",
            "x1",
            "run",
            *("yield", "assert", "with", "pass", "async", "await", "nonlocal", "try"),
            *("s", "out", "now", "wish", "h", "c1_0", "exp", "getattr"),
        ),
        strict=True,
    )
)
HOSTILE["purpose"] = "'); import os; os.system('true') #"


def test_every_kind_is_among_them() -> None:
    assert all(re.search(rf": {kind} ", TEXT) for kind in KINDS)


@pytest.mark.parametrize("responses", [False, True])
def test_names_change_nothing_in_the_source(frame_of, responses: bool) -> None:
    sources = []
    for names in (PLAIN, HOSTILE):
        kernel = Kernel(*frame_of(TEXT.format(**names)))
        sources.append(RunSource(kernel.system, responses=responses).source)
    assert sources[0] == sources[1] and "zq" not in sources[0]


def test_the_source_has_no_texts_and_few_words(frame_of) -> None:
    source = Kernel(*frame_of(TEXT.format(**PLAIN))).source
    tokens = list(tokenize.generate_tokens(io.StringIO(source).readline))
    assert not [token for token in tokens if token.type == tokenize.STRING]
    words = {token.string for token in tokens if token.type == tokenize.NAME and not keyword.iskeyword(token.string)}
    ours = {re.sub(r"\d+", "", word) for word in words}
    assert not ours & {"exec", "eval", "open", "getattr", "globals", "compile", "import"} and len(ours) < 120
    assert not [token for token in tokens if token.string in ("import", "lambda", "global")]
    assert "." not in {token.string for token in tokens if token.type == tokenize.OP}


def test_the_names_used_most_come_first(named_frame) -> None:
    """CPython needs a further instruction for each use of a local name beyond the first 256."""
    run = compile_function(Kernel(*named_frame("ladder-5")).source, "run")
    places = {name: index for index, name in enumerate(run.__code__.co_varnames)}
    junctions = [name for name in places if re.fullmatch(r"[vnbow]\d+", name)]
    assert len(places) > 256 and len(junctions) == 50
    assert max(places[name] for name in junctions) < 256


def test_a_diode_that_sees_a_known_voltage_keeps_it_through_the_extrapolation(frame_of) -> None:
    """Its voltage changes at no iteration, so it must not be found where the guess of the next one is kept."""
    text = "a -> g: source e, sine = 0.9 V peak, frequency = 50 Hz\na -> g: diode D, saturation_current = 1 nA, ideality_factor = 1.8\n"
    kernel = Kernel(*frame_of(text + "a -> b: resistor R, 1 kOhm\nb -> g: capacitor C, 1 uF\nreference g\n"))
    saved = [0.0, 1e-5, *[0.0] * (kernel.saved_count - 2)]
    controls = (4e-3, 1e-4, 1e-11, 1e-4, 3, 25, 25.0, 0.0, 0, 10_000, 0.006, 1e-9, 0.03, 0.005, 2e-4, 2e-7)
    assert kernel.run(list(kernel.system.frame.numbers), saved, [], controls)[0] == 0
    assert saved[2 + len(kernel.system.states)] == pytest.approx(0.9 * math.sin(0.4 * math.pi), rel=1e-12)
