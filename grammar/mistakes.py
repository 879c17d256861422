"""A mistake is a value: where it stands, what is wrong and the likely cure. Functions return lists of them; `render`
prints."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from grammar.spans import Span


@dataclass(frozen=True)
class Mistake:
    """One thing wrong in a text.

    span: where (None only for a mistake of a whole file, such as one that cannot be read; file then names it)
    what: the fault in the trade's words, no final full stop
    cure: what the user would most likely do about it, one or two sentences
    file: the file's name where there is no span
    """

    what: str
    cure: str
    span: Span | None = None
    file: str = ""


MOST_MISTAKES = 100
ENOUGH = 1000
"""Mistakes after which a reader of a text gives up."""
_UNPRINTABLE = "\N{REPLACEMENT CHARACTER}"


def first_of(mistakes: Iterable[Mistake], file: str) -> list[Mistake]:
    """As many mistakes as a reader can mend in one go, those that stand first, and a last one that says so."""
    found = list(mistakes)
    if len(found) <= MOST_MISTAKES:
        return found
    more = Mistake(f"only the first {MOST_MISTAKES} mistakes are shown", "Mend these first.", None, file)
    return [*sorted(found, key=_order)[:MOST_MISTAKES], more]


class DescriptionError(Exception):
    """Raised by the Python face where a caller asked for a result that mistakes prevent; carries all of them."""

    def __init__(self, mistakes: Iterable[Mistake]):
        self.mistakes = list(mistakes)
        super().__init__(render(self.mistakes))


def place(span: Span) -> tuple[str, int, int]:
    """File name, line and column of a span's start, both counted from 1."""
    text = span.source.text
    line = text.count("\n", 0, span.start) + 1
    column = span.start - text.rfind("\n", 0, span.start)
    return span.source.name, line, column


def render(mistakes: Iterable[Mistake]) -> str:
    """The messages as a user reads them, sorted by place, each with its line, a caret and the cure."""
    ordered = sorted(set(mistakes), key=_order)
    return "\n".join(_render_one(mistake) for mistake in ordered)


def _order(mistake: Mistake) -> tuple[str, int, str]:
    if mistake.span is None:
        return (mistake.file, -1, mistake.what)
    return (mistake.span.source.name, mistake.span.start, mistake.what)


def _render_one(mistake: Mistake) -> str:
    what, cure = _visible(mistake.what), _visible(mistake.cure)
    if mistake.span is None:
        return f"{_visible(mistake.file)}: {what}\n    cure: {cure}\n"
    name, line, column = place(mistake.span)
    text = _line_around(mistake.span.source.text, mistake.span.start)
    indent = "".join("\t" if letter == "\t" else " " for letter in text[: column - 1])
    return f"{_visible(name)}:{line}:{column}: {what}\n    {_visible(text)}\n    {indent}^\n    cure: {cure}\n"


def _line_around(text: str, position: int) -> str:
    end = text.find("\n", position)
    return text[text.rfind("\n", 0, position) + 1 : len(text) if end < 0 else end].rstrip("\r")


def _visible(text: str) -> str:
    """A text with a sign in the place of what would steer the terminal that it is shown on."""
    return "".join(letter if letter.isprintable() or letter == "\t" else _UNPRINTABLE for letter in text)
