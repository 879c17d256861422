"""The emitted run is made of our own words and numbers: whatever things are called in a description, it is the same text."""

from __future__ import annotations

import io
import keyword
import math
import re
import tokenize

import pytest

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
        ),
        strict=True,
    )
)
HOSTILE["purpose"] = "'); import os; os.system('true') #"


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
