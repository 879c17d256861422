"""Cuts a text into tokens, and the tokens into statements with their bodies.

It knows where a statement ends and what a unit looks like, and nothing of what statements say.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from grammar.mistakes import ENOUGH, Mistake
from grammar.quantities import quantity
from grammar.spans import Source, Span

DEEPEST_BRACKETS = 30
DEEPEST_BODIES = 16
LONGEST_NAME = 100

_TOKEN = re.compile(
    r"""(?P<line>\r?\n)
    | (?P<blank>[ \t]+)
    | (?P<comment>\#[^\r\n]*)
    | (?P<string>"[^"\r\n]*")
    | (?P<unclosed>"[^"\r\n]*)
    | (?P<number>[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?)
    | (?P<word>[A-Za-z][A-Za-z0-9_]*)
    | (?P<mark>->|\.\.|<=|>=|[][(){}<>=,:@+*/^.-])
    | (?P<strange>[^\x00-\x7f]+|.|\r)""",
    re.VERBOSE,
)
_FACTOR = re.compile(r"(?:%|[A-Za-z\u00b5\u03bc\u03a9\u2126]+(?![A-Za-z0-9_]))(?:\^-?[0-9](?![0-9A-Za-z_]|\.[0-9]))?")
_GAP = re.compile(r"[ \t]*")
_UNSEEN = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f\u2028\u2029\u202a-\u202e\u2066-\u2069]")
"""Characters that steer a terminal, or the order in which a line is shown, and stand for nothing in a text."""
_CLOSER = {"(": ")", "[": "]"}


@dataclass(frozen=True, slots=True)
class Token:
    """A range of the text; kind is line, blank, comment, string, unclosed, number, unit, word, mark or strange."""

    kind: str
    text: str
    start: int

    @property
    def end(self) -> int:
        return self.start + len(self.text)

    def is_mark(self, *marks: str) -> bool:
        return self.kind == "mark" and self.text in marks


@dataclass(frozen=True)
class Piece:
    """A statement, event or line of keys as it stands in the text.

    tokens: those of its head, without blanks, comments and line ends; body: what its braces hold, None where it has
    none; brace: the opening one; start, end: where it stands in the text; whole: False where a mistake in it is
    reported already
    """

    tokens: tuple[Token, ...]
    start: int
    end: int
    brace: Token | None = None
    body: tuple[Piece, ...] | None = None
    whole: bool = True


def tokens_of(text: str) -> list[Token]:
    """The whole text as tokens, each character in one of them. A unit is a token right after a number only."""
    found: list[Token] = []
    position = 0
    while position < len(text):
        match = _TOKEN.match(text, position)
        assert match is not None and match.lastgroup is not None
        found.append(Token(match.lastgroup, match.group(), position))
        position = match.end()
        if match.lastgroup == "number":
            position = _add_unit(text, position, found)
    return found


def _add_unit(text: str, position: int, found: list[Token]) -> int:
    gap = _GAP.match(text, position)
    start = gap.end() if gap else position
    end = _unit_end(text, start)
    if end == start:
        return position
    if start > position:
        found.append(Token("blank", text[position:start], position))
    found.append(Token("unit", text[start:end], start))
    return end


def _unit_end(text: str, start: int) -> int:
    """Where the longest unit at a position ends: factors joined by `/` or one space, each a unit."""
    end = next_start = start
    while True:
        factor = _FACTOR.match(text, next_start)
        if factor is None or not _is_unit(factor.group()):
            return end
        end = factor.end()
        if text[end : end + 1] not in ("/", " "):
            return end
        next_start = end + 1


@lru_cache(maxsize=1000)
def _is_unit(text: str) -> bool:
    try:
        quantity(1.0, text)
    except ValueError:
        return False
    return True


@dataclass(frozen=True)
class Cut:
    """A text cut into statements; lost: whether its braces don't match, so that nobody knows what belongs where."""

    pieces: tuple[Piece, ...]
    mistakes: list[Mistake]
    lost: bool


def pieces_of(source: Source) -> Cut:
    """The statements of a text with their bodies, and what is wrong with its signs, brackets and braces."""
    tokens = tokens_of(source.text)
    kept = [token for token in tokens if token.kind not in ("blank", "comment")]
    splitter = _Splitter(source, kept)
    pieces = splitter.pieces(None)
    return Cut(pieces, splitter.mistakes + _signs(source, tokens), splitter.lost)


def _signs(source: Source, tokens: Sequence[Token]) -> list[Mistake]:
    """Names that are too long, and what can't be seen in a quoted text or a comment."""
    found = []
    for token in tokens:
        if token.kind == "word" and len(token.text) > LONGEST_NAME:
            cure = f"Names have up to {LONGEST_NAME} characters."
            found.append(Mistake("this name is too long", cure, Span(source, token.start, token.end)))
        unseen = _UNSEEN.search(token.text) if token.kind in ("string", "comment") else None
        if unseen is not None:
            start = token.start + unseen.start()
            what = f"the character U+{ord(unseen.group()):04X} can't be seen and has no meaning here"
            found.append(Mistake(what, "Leave it out.", Span(source, start, start + 1)))
    return found


class _Splitter:
    """Walks the tokens once; after an unclosed bracket it goes on with the line after the bracket's."""

    def __init__(self, source: Source, tokens: Sequence[Token]):
        self.source = source
        self.mistakes: list[Mistake] = []
        self.lost = False
        self._tokens = tokens
        self._next = 0
        self._bodies = 0

    def _wrong(self, token: Token, what: str, cure: str) -> None:
        self.mistakes.append(Mistake(what, cure, Span(self.source, token.start, token.end)))
        self.lost = self.lost or len(self.mistakes) > ENOUGH

    def _peek(self) -> Token | None:
        ended = self._next >= len(self._tokens) or len(self.mistakes) > ENOUGH
        return None if ended else self._tokens[self._next]

    def pieces(self, brace: Token | None) -> tuple[Piece, ...]:
        """Pieces up to the brace that closes the body, which is passed, or to the end of the text."""
        found: list[Piece] = []
        while (token := self._peek()) is not None:
            if token.kind == "line":
                self._next += 1
            elif token.is_mark("}"):
                self._next += 1
                if brace is not None:
                    return tuple(found)
                self.lost = True
                self._wrong(token, "this } closes nothing", "Leave it out, or add the { that it should close.")
            else:
                found.append(self._piece())
        if brace is not None:
            self.lost = True
            self._wrong(brace, "this { is never closed", "Add a } after the last line that belongs to it.")
        return tuple(found)

    def _piece(self) -> Piece:
        start = self._tokens[self._next].start
        head, whole = self._head()
        brace = self._peek()
        if brace is None or not brace.is_mark("{"):
            return Piece(tuple(head), start, self._tokens[self._next - 1].end, whole=whole)
        self._next += 1
        if self._bodies == DEEPEST_BODIES:
            self._wrong(brace, f"braces stand more than {DEEPEST_BODIES} deep", "Name the inner part as a block.")
            self._skip_body()
            end = self._tokens[self._next - 1].end
            return Piece(tuple(head), start, end, brace, (), False)
        self._bodies += 1
        body = self.pieces(brace)
        self._bodies -= 1
        after = self._peek()
        end = self._tokens[self._next - 1].end
        if whole and after is not None and after.kind != "line" and not after.is_mark("}"):
            self._wrong(after, "after } a new line begins", "Put what follows on a line of its own.")
        return Piece(tuple(head), start, end, brace, body, whole)

    def _skip_body(self) -> None:
        depth = 1
        while depth and (token := self._peek()) is not None:
            depth += token.is_mark("{") - token.is_mark("}")
            self._next += 1

    def _head(self) -> tuple[list[Token], bool]:
        """The tokens up to the line end, brace or end of text that ends a statement's head."""
        head: list[Token] = []
        opened: list[int] = []
        whole = True
        while (token := self._peek()) is not None:
            if token.kind == "line":
                if not opened and not (head and head[-1].is_mark(",")):
                    break
            elif token.is_mark("{", "}"):
                break
            else:
                head.append(token)
                if token.is_mark("(", "["):
                    opened.append(self._next)
                    if len(opened) > DEEPEST_BRACKETS:
                        what = f"brackets stand more than {DEEPEST_BRACKETS} deep"
                        self._wrong(token, what, "Give the inner part a name by a `let`.")
                        return self._give_up(opened[0])
                elif token.is_mark(")", "]"):
                    if not opened:
                        cure = f"Leave it out, or add the {'(' if token.text == ')' else '['} that it should close."
                        self._wrong(token, f"this {token.text} closes nothing", cure)
                        whole = False
                    elif _CLOSER[self._tokens[last := opened.pop()].text] != token.text:
                        return self._unclosed(last)
            self._next += 1
        return self._unclosed(opened[0]) if opened else (head, whole)

    def _unclosed(self, position: int) -> tuple[list[Token], bool]:
        bracket = self._tokens[position]
        closer = _CLOSER[bracket.text]
        self._wrong(bracket, f"this {bracket.text} is never closed", f"Add a {closer} after what belongs in it.")
        return self._give_up(position)

    def _give_up(self, position: int) -> tuple[list[Token], bool]:
        """Go on at the end of the bracket's line."""
        self._next = position
        while (token := self._peek()) is not None and token.kind != "line":
            self._next += 1
        return [], False
