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


class DescriptionError(Exception):
    """Raised by the Python face where a caller asked for a result that mistakes prevent; carries all of them."""

    def __init__(self, mistakes: Iterable[Mistake]):
        self.mistakes = list(mistakes)
        super().__init__(render(self.mistakes))


def place(span: Span) -> tuple[str, int, int]:
    """File name, line and column of a span's start, both counted from 1."""
    before = span.source.text[: span.start]
    line = before.count("\n") + 1
    column = span.start - (before.rfind("\n") + 1) + 1
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
    if mistake.span is None:
        return f"{mistake.file}: {mistake.what}\n    cure: {mistake.cure}\n"
    name, line, column = place(mistake.span)
    text = mistake.span.source.text.split("\n")[line - 1].rstrip("\r")
    indent = "".join("\t" if letter == "\t" else " " for letter in text[: column - 1])
    return f"{name}:{line}:{column}: {mistake.what}\n    {text}\n    {indent}^\n    cure: {mistake.cure}\n"
