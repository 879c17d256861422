"""The README's reference, written from the declarations: what each kind, study and figure takes and means.

`python -m simcore.report.reference` brings the README of a checkout up to date. It knows declarations and Markdown, and
nothing of circuits or solutions.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Sequence
from pathlib import Path

from grammar.quantities import AMPERE, NONE, VOLT, Dimension, show, unit_of
from simcore.components import KINDS
from simcore.components.kind import Key, Kind
from simcore.design.overview import value_text
from simcore.design.studies import STUDY_KEYS
from simcore.design.study_kinds import STUDY_KINDS
from simcore.figures.catalogue import FIGURES, SIGNALS, Measure
from simcore.report.writing import whole_file

BEGIN = "<!-- what follows is written by python -m simcore.report.reference -->"
END = "<!-- end of what it writes -->"
README = Path(__file__).resolve().parents[2] / "README.md"

_TERMINALS = {
    "branch": "`a -> b: {}`",
    "set": "`(a, b, c): {0}` or `(a, b, c) -> star: {0}`",
    "windings": "`(a -> b) : (c -> d): {}`, any number of windings",
}


def reference() -> str:
    """The whole section as Markdown. ValueError where a declaration has no meaning."""
    lines = ["## Reference: element kinds and their keys", ""]
    lines.append("A key that is left out has its default.")
    told: list[Kind] = []
    for kind in KINDS.values():
        lines += ["", *_kind(kind, told)]
        told.append(kind)
    lines += ["", "## Reference: studies", "", *_studies()]
    lines += ["", "## Reference: signals and figures", "", *_measures()]
    return "\n".join(lines)


def with_reference(text: str) -> str:
    """A README's text with the part between the two markers written anew. ValueError where they are missing."""
    before, begin, rest = text.partition(BEGIN + "\n")
    _, end, after = rest.partition(END)
    if not (begin and end):
        raise ValueError("the markers of the reference are missing")
    return f"{before}{BEGIN}\n\n{reference()}\n\n{END}{after}"


# --- kinds -----------------------------------------------------------------------------------------------------------


def _kind(kind: Kind, told: Sequence[Kind]) -> list[str]:
    """A kind's heading and table; keys that an earlier kind declares alike are named by that kind."""
    shared = next((other for other in told if _holds_all_of(kind, other)), None)
    own = [key for key in kind.keys if shared is None or shared.key.get(key.name) != key]
    words = [f"{_TERMINALS[kind.form].format(kind.name + ' NAME')}: {_said(kind.meaning, kind.name)}."]
    if kind.value_key is not None:
        words.append(f"Its value is `{kind.value_key}`.")
    if shared is not None:
        words.append(f"It has the keys of {shared.name}, and:")
    rows = [[f"`{key.name}`", _takes(key, kind), _default(key), _range(key), _meaning(key, kind)] for key in own]
    return [f"### {kind.name}", "", " ".join(words), "", *_table(["key", "takes", "default", "range", "meaning"], rows)]


def _holds_all_of(kind: Kind, other: Kind) -> bool:
    return all(key.name in kind.key and kind.key[key.name].meaning == key.meaning for key in other.keys)


def _said(meaning: str, name: str) -> str:
    if not meaning.strip():
        raise ValueError(f"{name} is declared without a meaning")
    return meaning


def _meaning(key: Key, kind: Kind) -> str:
    rating = "rating: " if key.rating else ""
    return rating + _said(key.meaning, f"{kind.name}.{key.name}")


def _takes(key: Key, kind: Kind) -> str:
    """How the value is written, by its units."""
    unit = " or ".join(_unit(dimension) for dimension in (key.dimension, *key.alternatives))
    at = "" if key.at is None else _unit(key.at)
    measures = "line rms, line peak, phase rms or phase peak" if kind.form == "set" else "rms or peak"
    forms = {
        "scalar": "a whole number" if key.whole else unit,
        "timed": f"{unit}, or `[{at}: {unit}, ...]`",
        "point": f"`{unit} @ {at}`" + (f", or {unit} alone" if key.bare else ""),
        "ratio": f"`{unit} : {unit} : ...`",
        "amplitude": f"{unit}, then {measures}",
        "list": f"`[{unit}, ...]`",
        "series": f"`[{at}: {unit}, ...]`",
        "curve": f"`[{unit} @ {at}, ...]`",
        "harmonics": f"`[order: share @ {at}, ...]`",
        "text": '`"text"`',
        "word": " or ".join(f"`{word}`" for word in key.words),
        "expression": f"a signal in {unit}",
    }
    return forms[key.form]


def _unit(dimension: Dimension) -> str:
    return unit_of(dimension) or "number"


def _default(key: Key) -> str:
    if key.required:
        return "must be given"
    if key.default is None:
        return ""
    return "0" if key.default == 0.0 else value_text(key, key.default)


def _range(key: Key) -> str:
    low = "" if key.low is None else _amount(key.low, key)
    high = "" if key.high is None else _amount(key.high, key)
    if low and high:
        return f"{'above ' if key.open_low else ''}{low} to {high}"
    if low:
        return f"{'>' if key.open_low else '>='} {low}"
    return f"<= {high}" if high else ""


def _amount(value: float, key: Key) -> str:
    return f"{value:.0f}" if value == 0.0 or key.whole else show(value, key.dimension)


# --- studies, signals and figures ------------------------------------------------------------------------------------


def _studies() -> list[str]:
    kinds = [[f"`{kind.name}`", _said(kind.meaning, kind.name)] for kind in STUDY_KINDS.values()]
    keys = [
        [
            f"`{key.name}`",
            key.takes or _unit(key.dimension or NONE),
            key.default,
            ", ".join(kind.name for kind in STUDY_KINDS.values() if key.name in kind.keys),
            _said(key.meaning, key.name),
        ]
        for key in STUDY_KEYS.values()
    ]
    headings = ["key", "takes", "default", "of", "meaning"]
    return [*_table(["kind", "finds"], kinds), "", *_table(headings, keys)]


def _measures() -> list[str]:
    return [
        "A signal is one of these, an observed name, or arithmetic of both:",
        "",
        *_table(["signal", "unit", "meaning"], map(_measure, SIGNALS.values())),
        "",
        "A figure is one of these or arithmetic of them, `at` another study where that is named:",
        "",
        *_table(["figure", "unit", "meaning"], map(_measure, FIGURES.values())),
    ]


def _measure(measure: Measure) -> list[str]:
    same = measure.result(VOLT) == VOLT and measure.result(AMPERE) == AMPERE
    unit = "the signal's" if same else unit_of(measure.result(NONE))
    whole = "; with no argument, of the whole circuit" if measure.optional else ""
    written = f"`{measure.name}({', '.join(measure.arguments)})`"
    return [written, unit, _said(measure.meaning, measure.name) + whole]


def _table(headings: Sequence[str], rows: Iterable[Sequence[str]]) -> list[str]:
    lines = [list(headings), ["---"] * len(headings), *map(list, rows)]
    return ["| " + " | ".join(cell.replace("|", r"\|") for cell in line) + " |" for line in lines]


def main() -> int:
    """Bring the checkout's README up to date; returns the exit status."""
    try:
        text = README.read_text("utf-8")
    except OSError as error:
        print(f"{README}: {error.strerror}; cure: run this in a checkout, where the README is", file=sys.stderr)
        return 2
    with whole_file(README) as file:
        file.write(with_reference(text))
    return 0


if __name__ == "__main__":
    sys.exit(main())
