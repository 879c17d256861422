"""What a person does with the lines that a report offers: each takes the place of the one of the same name."""

from __future__ import annotations

from collections.abc import Iterable

from grammar.description import Description
from grammar.layout import write
from grammar.reader import read_text


def pasted(text: str, lines: Iterable[str]) -> str:
    """A text in which statements took the place of those of the same kind and name."""
    new = {(type(each), each.name): each for each in read_text("\n".join(lines), "lines")[0].statements}
    statements = read_text(text, "text")[0].statements
    left = [new.pop((type(each), getattr(each, "name", None)), each) for each in statements]
    assert not new, "every line has one that it takes the place of"
    return write(Description(tuple(left)))
