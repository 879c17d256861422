"""Where a piece of a text stands: a source and a range of its characters. Knows nothing of what texts say."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Source:
    """A text and the name it is shown under in messages."""

    name: str
    text: str = field(repr=False)


@dataclass(frozen=True)
class Span:
    """The half-open range of characters [start, end) of a source."""

    source: Source
    start: int
    end: int
