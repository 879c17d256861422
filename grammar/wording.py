"""What a reader of a text expected, in the trade's words: the form of each statement, and the names of tokens.

It words mistakes of form. It knows no meaning.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from grammar.expressions import nearest
from grammar.quantities import PREFIXES, UNITS
from grammar.scanner import Token

FORMS = {
    "purpose": 'A purpose is written `purpose "12 V bench supply"`.',
    "use": 'Data sheets and blocks of a file are brought in by `use "parts/diodes.rect"`.',
    "reference": "The node that counts as 0 V is written `reference minus`.",
    "ambient": "The temperature around is written `ambient 40 degC`.",
    "let": "A let is written `let R_load = 15 Ohm`, `let C = 4700 uF tolerance 20 %`.",
    "datasheet": "A data sheet is written `datasheet NAME: diode {`, a key a line as `resistance = 40 mOhm`, `}`.",
    "block": "A block is written `block NAME(a, b) with R = 1 Ohm {`, a statement a line, `}`.",
    "repeat": "A repeat is written `repeat k from 1 to 4 {`, a statement a line, `}`.",
    "element": "An element is written `a -> b: resistor R1, 10 Ohm`.",
    "observe": "A signal is named by `observe u_out = voltage(plus -> minus)`.",
    "study": "A study is written `study start: transient, duration = 100 ms, set R_load = 10 Ohm`.",
    "require": "A requirement is written `require full_load: ripple(u_out) <= 2 V`, `... between 1 V and 2 V`, "
    "or `require full_load: ratings, margin = 20 %`.",
    "sweep": "A sweep is written `sweep load: R_load from 1 Ohm to 9 Ohm in 5 steps`, `... over [1 Ohm, 2 Ohm]`, "
    "`extremes of A, B`, `100 samples of each let, seed = 1` or `open or short each diode`.",
    "setting": "A key is written `key = value`.",
    "event": "An event is written `at 5 ms: open winding`; it may also close, short or `set LET = value`.",
    "expression": "A value is written like `10 Ohm` or `2 * R_load`.",
}
NEVER_NAMES = ("each", "of", "open", "short", "extremes", "ratings", "worst")

_KINDS_OF_TOKEN = {"NAME": "a name", "NUMBER": "a number", "STRING": 'text in quotes (")'}
_VALUE = frozenset(("NAME", "NUMBER", "LPAR"))
_IN_VALUE = ("NAME", "NUMBER", "LPAR", "MINUS", "PLUS", "EACH")
_GOES_ON = ("PLUS", "MINUS", "STAR", "SLASH", "CIRCUMFLEX", "UNIT", "DOT", "LSQB", "LPAR")
_MOST_NAMED = 8
_UNITS = f"Units are {' '.join(UNITS)}, with a prefix {' '.join(filter(None, PREFIXES))}, and min h degC deg %."
_SPELLED = {"volt": "V", "amp": "A", "ampere": "A", "watt": "W", "farad": "F", "henry": "H", "coulomb": "C"}
_SPELLED |= {"joule": "J", "hertz": "Hz", "second": "s", "sec": "s", "hour": "h", "kelvin": "K", "minute": "min"}
_SPELLED |= {"degree": "deg", "celsiu": "degC", "percent": "%"}
_SYMBOLS = {"≤": "<=", "≥": ">=", "×": "*", "·": "*", "−": "-", "–": "-", "→": "->", "…": "..", "“": '"', "”": '"'}
_SYMBOLS |= {"²": "^2", "°": "deg, or degC for a temperature", "±": "tolerance, followed by the value"}


def expected(accepted: Iterable[str], literals: dict[str, str]) -> str:
    """What could have stood there, as a list in words; literals: token name -> how it is written."""
    names = sorted(accepted)
    words: list[str] = []
    if _VALUE.issubset(names):
        words.append("a value")
        names = [name for name in names if name not in _IN_VALUE]
    rest = [name for name in names if name not in _GOES_ON]
    words += [_KINDS_OF_TOKEN.get(name, f"`{literals.get(name, name)}`") for name in rest if name != "$END"]
    if "$END" in rest:
        words.append("the end of the line")
    return _listed(words[:_MOST_NAMED]) if words else "the rest of the statement"


def _listed(words: Sequence[str]) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} or {words[-1]}"


def strange(token: Token) -> tuple[str, str]:
    """What is wrong with a token that no statement has, and the cure."""
    if token.kind == "unclosed":
        return "this text is never closed", 'Close it with " on the same line.'
    letter = token.text[0]
    if letter in _SYMBOLS:
        return f"{letter} has no meaning here", f"Write {_SYMBOLS[letter]} in its place."
    if letter == "\r":
        return "a carriage return stands within the line", "End lines with LF or CR LF."
    if letter.isprintable() and not letter.isspace():
        cure = "Names are made of the letters A to Z, digits and _; put other wording in quotes."
        return f"{letter} has no meaning here", cure
    return f"the character U+{ord(letter):04X} has no meaning here", "Leave it out; blanks are spaces and tabs."


def no_unit(word: str) -> tuple[str, str]:
    """A word after a number that is no unit."""
    near = near_unit(word)
    cure = f"Did you mean {near}? " if near else ""
    return f"{word} is no unit", f"{cure}{_UNITS}"


def near_unit(word: str) -> str | None:
    """The unit that a word most likely stands for."""
    spelled = word.lower().removesuffix("s")
    if spelled in _SPELLED:
        return _SPELLED[spelled]
    known = ["min", "deg", "degC", *(prefix + unit for prefix in ("", *PREFIXES) for unit in UNITS)]
    folded = [unit for unit in known if unit.lower() == word.lower()]
    likely = [unit for unit in folded if unit[0] == word[0]] or folded
    return likely[0] if likely else None


def near_keyword(word: str, accepted: Iterable[str], literals: dict[str, str]) -> str | None:
    """The keyword that could stand there and that a word is a misspelling of."""
    words = [literals[name] for name in sorted(accepted) if literals.get(name, "").isalpha()]
    return nearest(word, words) if len(word) > 1 else None
