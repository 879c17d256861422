"""Texts drawn from the grammar itself: every rule is walked, with the words of the trade where it has names."""

from __future__ import annotations

import math
from functools import cache

from hypothesis import strategies as st
from lark import Lark
from lark.grammar import NonTerminal, Symbol

from grammar.quantities import AMPERE, NONE, UNITS, VOLT, Dimension, unit_of
from grammar.scanner import tokens_of
from grammar.tables import parser
from grammar.wording import FORMS
from simcore.components import KINDS
from simcore.components.kind import Key
from simcore.design.files import library_folder
from simcore.figures.catalogue import FIGURES

NODES = ["a", "b", "p", "g"]
NAMES = [*NODES, "R1", "D1", "e", "V", "C", "k", "sheet", "part", "s", "t"]
WORDS = [*KINDS, *sorted({key.name for kind in KINDS.values() for key in kind.keys}), *FIGURES]
WORDS += ["operating_point", "settled", "transient", "duration", "angle", "after", "last", "period", "accuracy", "seed"]
NUMBERS = ["0", "1", "2", "10", "50", "1e-3", "4700", "1e9", "1e-15", "1e300", "0.5", "99999999999", "1e999"]
STRINGS = ['"x"', '"parts/diodes.rect"', '"../x.rect"', '"x.csv"', '""', '"IEC 61000-3-2 class A"']
STATEMENTS = tuple(form for form in FORMS if form not in ("setting", "event", "expression"))
WITH_BODY = {"datasheet": ("setting",), "block": STATEMENTS, "repeat": STATEMENTS, "study": ("event",)}
BASE = """reference g
let V = 10 V tolerance 10 %
let C = 100 uF
a -> g: source e, sine = V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> g: capacitor C1, C
p -> g: resistor R1, 100 Ohm
study s: transient, duration = 20 ms
"""
DEEPEST = 7


class Walk:
    """The rules of the grammar, and how deep the shallowest text of each is."""

    def __init__(self, lark: Lark):
        self.rules: dict[str, list[list[Symbol]]] = {}
        for rule in lark.rules:
            self.rules.setdefault(rule.origin.name, []).append(rule.expansion)
        self.keywords = {each.name: each.pattern.value for each in lark.terminals if each.pattern.type == "str"}
        self.height = dict.fromkeys(self.rules, 99)
        for _ in self.rules:
            for name, ways in self.rules.items():
                self.height[name] = 1 + min(self.tall(way) for way in ways)

    def tall(self, way: list[Symbol]) -> int:
        """Levels below an expansion."""
        return max((self.height[each.name] for each in way if isinstance(each, NonTerminal)), default=0)


@cache
def walk() -> Walk:
    return Walk(parser())


TERMINALS = {
    "NAME": st.sampled_from(NAMES) | st.sampled_from(NAMES) | st.sampled_from(WORDS),
    "NUMBER": st.sampled_from(NUMBERS),
    "UNIT": st.sampled_from([*UNITS, "uF", "mOhm", "kV", "ms", "V/us", "A^2 s"]),
    "STRING": st.sampled_from(STRINGS),
}


@st.composite
def of_rule(draw: st.DrawFn, name: str, room: int = DEEPEST) -> str:
    """A text of a rule: any expansion while there is room, then the shallowest."""
    rules = walk()
    ways = rules.rules[name]
    inside = [way for way in ways if rules.tall(way) <= room]
    way = draw(st.sampled_from(inside or sorted(ways, key=rules.tall)[:1]))
    words = []
    for symbol in way:
        if isinstance(symbol, NonTerminal):
            words.append(draw(of_rule(symbol.name, room - 1)))
        else:
            words.append(draw(TERMINALS[symbol.name]) if symbol.name in TERMINALS else rules.keywords[symbol.name])
    return " ".join(word for word in words if word)


@st.composite
def statement(draw: st.DrawFn, forms: tuple[str, ...] = STATEMENTS, room: int = 2) -> str:
    form = draw(st.sampled_from(forms))
    text = draw(of_rule(form))
    if form in WITH_BODY and room and draw(st.integers(0, 3)):
        inner = draw(st.lists(statement(WITH_BODY[form], room - 1), max_size=3))
        return f"{text} {{\n" + "\n".join(inner) + "\n}"
    return text


@st.composite
def texts(draw: st.DrawFn) -> str:
    """Statements of every form, mostly beside a sound circuit, so that what is read gets as far as being solved."""
    lines = draw(st.lists(statement(), max_size=6))
    return "\n".join([BASE if draw(st.integers(0, 3)) else "", *lines]) + "\n"


# --- elements as their kinds declare them ----------------------------------------------------------------------------


def plain(key: Key) -> st.SearchStrategy[str]:
    """A value of a key's dimension, of any magnitude, now and then an end of what the key allows."""
    if key.whole:
        return st.sampled_from(["1", "2", "7", "0", "1000000", "1.5"])
    ends = [end for end in (key.low, key.high) if end is not None and abs(end) < 1e300]
    usual = st.sampled_from([0.1, 1.0, 10.0, 100.0, 1e-3, 1e-6, 1e-9, 1e6])
    magnitude = st.floats(-15.0, 12.0).map(lambda power: 10.0**power)
    value = st.one_of(*[usual] * 6, *[magnitude] * 3, st.sampled_from([1.0, *ends]))
    return value.map(lambda number: written(number, key.dimension))


def written(value: float, dimension: Dimension) -> str:
    unit = unit_of(dimension)
    return f"{math.degrees(value)!r} deg" if unit == "deg" else f"{value!r} {unit}".strip()


@st.composite
def value_of(draw: st.DrawFn, key: Key) -> str:
    """What a key takes, in the form that it declares."""
    value = plain(key)
    if key.form in ("timed", "series", "curve", "list", "harmonics"):
        at = written(draw(st.sampled_from([0.0, 1e-3, 0.5, 2.0])), key.at or NONE)
        joint = {"curve": "@", "list": None}.get(key.form, ":")
        pairs = [f"{at} : {draw(value)}" if joint == ":" else draw(value) + (f" @ {at}" if joint else "")]
        if key.form == "timed" and draw(st.booleans()):
            return draw(value)
        return f"[{', '.join([*pairs, *(draw(st.lists(value.map(lambda text: f'{text} @ 1 A'), max_size=1)) if joint == '@' else [])])}]"
    if key.form == "point":
        return f"{draw(value)} @ {written(draw(st.sampled_from([1e-9, 1e-3, 1.0, 100.0])), key.at or NONE)}"
    if key.form == "ratio":
        return " : ".join(draw(st.lists(value, min_size=2, max_size=3)))
    if key.form == "amplitude":
        return f"{draw(value)} {draw(st.sampled_from(['rms', 'peak', 'line rms', 'phase peak', '']))}"
    if key.form == "word":
        return draw(st.sampled_from(list(key.words)))
    if key.form == "text":
        return draw(TERMINALS["STRING"])
    return draw(st.sampled_from(["voltage(a)", "voltage(a -> p)", "current(R1)"])) if key.form == "expression" else draw(value)


NEEDED = {
    "source": "sine = 5 V peak, frequency = 100 Hz, series_resistance = 1 Ohm",
    "three_phase": "sine = 10 V line rms, frequency = 50 Hz",
    "transformer": "turns = 1 : 1",
    "diode": "saturation_current = 1 nA, ideality_factor = 1.8",
    "thyristor": "saturation_current = 1 nA, ideality_factor = 1.8",
    "load": "current = 10 mA",
}
"""What makes an element of a kind sound where no key or one alone does."""


@st.composite
def element(draw: st.DrawFn, number: int) -> str:
    """An element of any kind with some of its keys, those that it needs among them."""
    kind = draw(st.sampled_from(sorted(KINDS.values(), key=lambda kind: kind.name)))
    a, b = draw(st.permutations(NODES))[:2]
    others = f"{a} -> {b}: {kind.name}"
    if kind.form != "branch":
        others = f"(x{number} -> y{number}) : ({a} -> {b}): {kind.name}"
        if kind.form == "set":
            others = f"(x{number}, y{number}, {a}) -> {b}: {kind.name}"
    keys = [key for key in kind.keys if key.required or key.name == kind.value_key and kind.name not in NEEDED]
    rest = [key for key in kind.keys if key not in keys]
    given = NEEDED.get(kind.name, "")
    if not given or draw(st.booleans()):
        keys += draw(st.lists(st.sampled_from(rest), max_size=2, unique_by=lambda key: key.name)) if rest else []
    keys = [key for key in keys if f"{key.name} =" not in given]
    return ", ".join(filter(None, [f"{others} X{number}", given, *(f"{key.name} = {draw(value_of(key))}" for key in keys)]))


@st.composite
def requirement(draw: st.DrawFn) -> str:
    """A bound on any figure of the circuit beside which it stands."""
    figure = draw(st.sampled_from(sorted(FIGURES.values(), key=lambda figure: figure.name)))
    fitting = {"signal": ["voltage(p)", "current(D1)", "power(R1)"], "junction": ["D1"], "source": ["e"], "level": ["1 V", "5 V"], "count": ["1", "7"]}
    arguments = ", ".join(draw(st.sampled_from(fitting.get(each, ["R1", "C1", "D1", "e"]))) for each in figure.arguments)
    bound = written(draw(st.sampled_from([0.0, 1e-3, 1.0, 100.0])), figure.result(draw(st.sampled_from([VOLT, AMPERE]))))
    return f"require each study: {figure.name}({arguments}) {draw(st.sampled_from(['<=', '>=', '<', '>']))} {bound}"


STUDIES = [
    "study o: operating_point",
    "study q: settled, accuracy = 1 %",
    "study r: transient, duration = 5 ms, angle = 90 deg",
    "study q: settled\nstudy r: transient, after = q, duration = 5 ms {\n at 1 ms: short R1\n}",
]


@st.composite
def circuits(draw: st.DrawFn) -> str:
    """A sound circuit with more elements, each of which may be at odds with the rest or with itself."""
    lines = [draw(element(number)) for number in range(draw(st.integers(1, 4)))]
    lines += draw(st.lists(requirement(), max_size=2)) + draw(st.lists(st.sampled_from(STUDIES), max_size=1))
    return "\n".join([BASE, *lines]) + "\n"


WORKED = [path.read_text("utf-8") for path in sorted(library_folder().glob("*.rect"))]
EXTREMES = ["0", "1", "1e-3", "1e3", "1e-12", "1e12", "1e300", "1e-300", "5e-324", "-1"]


@st.composite
def revalued(draw: st.DrawFn) -> str:
    """A worked circuit with a number or two put far off."""
    tokens = [token for token in tokens_of(draw(st.sampled_from(WORKED)))]
    numbers = [index for index, token in enumerate(tokens) if token.kind == "number"]
    words = [token.text for token in tokens]
    for index in draw(st.lists(st.sampled_from(numbers), min_size=1, max_size=2)):
        words[index] = draw(st.sampled_from(EXTREMES))
    return "".join(words)
