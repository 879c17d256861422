"""Reads a text into a description, statement by statement, so that all its mistakes come at once.

A text that can't be read is a list of mistakes and never an exception. Nothing here knows kinds, keys or circuits.
"""

from __future__ import annotations

from collections.abc import Callable, Container, Iterable, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

from grammar.build import Builder, Unbuildable
from grammar.description import Datasheet, Description, Event, Expression, Setting, Statement
from grammar.expressions import nearest
from grammar.mistakes import ENOUGH, Mistake, first_of
from grammar.scanner import Piece, Token, pieces_of, tokens_of
from grammar.spans import Source, Span
from grammar.tables import parser
from grammar.wording import FORMS, NEVER_NAMES, expected, near_keyword, no_unit, strange

if TYPE_CHECKING:
    from lark import Lark, Tree

LARGEST_FILE = 250_000
LONGEST_LINE = 10_000

_WITH_BODY = {"datasheet": True, "block": True, "repeat": True, "study": False}
_STATEMENTS = tuple(form for form in FORMS if form not in ("element", "setting", "event", "expression"))
_NAMING = ("let", "observe", "study", "datasheet", "block")
_SPOKEN = {"datasheet": "data sheet", "use": "use", "setting": "key", "require": "requirement", "expression": "value"}
_STARTS = "A statement starts with its word, as let or study, or with the nodes that an element joins."
_SMALLER = "Descriptions have up to 250 kB: write copies by `repeat`, and sheets and blocks in files of their own."
_KINDS = {"number": "NUMBER", "unit": "UNIT", "string": "STRING", "word": "NAME"}

Built = TypeVar("Built")


def read_file(path: str | Path) -> tuple[str | None, list[Mistake]]:
    """The text of a description file, None with its mistakes where it can't be had."""
    name = str(path)
    try:
        with Path(path).open("rb") as file:
            content = file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        return None, [Mistake("there is no such file", "Check the path; descriptions end in .rect.", None, name)]
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "its name can't be one"
        return None, [Mistake(f"the file can't be read: {reason}", "Check its path and rights.", None, name)]
    if len(content) > LARGEST_FILE:
        return None, [Mistake("the file is too large", _SMALLER, None, name)]
    try:
        return content.decode("utf-8-sig"), []
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        cure = f"Save it as UTF-8; line {line} holds the first byte that is not."
        return None, [Mistake("the file is not UTF-8 text", cure, None, name)]


def read_text(text: str, name: str) -> tuple[Description, list[Mistake]]:
    """The description that a text holds, without the statements that have mistakes, and all those mistakes.

    name: what messages call the text
    """
    source = Source(name, text)
    mistakes = _out_of_bounds(source)
    if mistakes:
        return Description((), source, lost=True), mistakes
    cut = pieces_of(source)
    reading = _Reading(source, cut.mistakes)
    statements = reading.statements(cut.pieces)
    lost = cut.lost or len(reading.mistakes) > ENOUGH
    description = Description(statements, source, frozenset() if lost else reading.unread(), lost)
    return description, first_of(reading.mistakes, name)


def read_expression(text: str, name: str) -> tuple[Expression | None, list[Mistake]]:
    """An expression that stands alone, as in a command's option; None with its mistakes."""
    source = Source(name, text)
    mistakes = _out_of_bounds(source)
    if mistakes:
        return None, mistakes
    cut = pieces_of(source)
    pieces, reading = cut.pieces, _Reading(source, cut.mistakes)
    if cut.mistakes:
        return None, cut.mistakes
    if len(pieces) != 1 or pieces[0].body is not None:
        where = Span(source, pieces[1].tokens[0].start if len(pieces) > 1 else 0, len(text))
        reading.mistakes.append(Mistake("one value is expected here", FORMS["expression"], where))
        return None, reading.mistakes
    return reading.expression(pieces[0]), reading.mistakes


def _out_of_bounds(source: Source) -> list[Mistake]:
    if len(source.text) > LARGEST_FILE:
        return [Mistake("the text is too large", _SMALLER, None, source.name)]
    position = 0
    for number, line in enumerate(source.text.split("\n"), 1):
        if len(line) > LONGEST_LINE:
            cure = f"Lines have up to {LONGEST_LINE} characters: break line {number} after a comma."
            return [Mistake("a line is too long", cure, None, source.name)]
        if "\0" in line:
            start = position + line.index("\0")
            cure = "The file is no text, or not UTF-8: save it as UTF-8."
            return [Mistake("a NUL character stands here", cure, Span(source, start, start + 1))]
        position += len(line) + 1
    return []


@dataclass(frozen=True)
class _Grammar:
    """The parser with the spelling of its tokens: literals, name -> text, and names, text -> name."""

    parser: Lark
    literals: dict[str, str]
    names: dict[str, str]


@lru_cache(maxsize=1)
def _grammar() -> _Grammar:
    made = parser()
    literals = {terminal.name: str(terminal.pattern.value) for terminal in made.terminals if terminal.pattern}
    return _Grammar(made, literals, {text: name for name, text in literals.items()})


class _Reading:
    """Reads the pieces of one source; what is wrong with one ends that piece only."""

    def __init__(self, source: Source, mistakes: list[Mistake]):
        self.source = source
        self.mistakes = mistakes
        self._unread: list[Piece] = []
        self._builder = Builder(source)

    def statements(self, pieces: Sequence[Piece]) -> tuple[Statement, ...]:
        found = [self._statement(piece) for piece in pieces if len(self.mistakes) <= ENOUGH]
        return tuple(statement for statement in found if statement is not None)

    def expression(self, piece: Piece) -> Expression | None:
        tree = self._parse("expression", piece.tokens)
        return None if tree is None else self._built(lambda: self._builder.expression(tree))

    def _wrong(self, what: str, cure: str, start: int, end: int) -> None:
        self.mistakes.append(Mistake(what, cure, Span(self.source, start, end)))

    def _statement(self, piece: Piece) -> Statement | None:
        statement = self._read(piece)
        if statement is None:
            self._unread.append(piece)
        return statement

    def unread(self) -> frozenset[str]:
        """The words of the pieces that could not be read, "" where one does not say what it names."""
        found: set[str] = set()
        end = 0
        for piece in sorted(self._unread, key=lambda piece: piece.start):
            text = self.source.text[max(piece.start, end) : piece.end]
            tokens = tokens_of(text)
            found.update(token.text for token in tokens if token.kind == "word")
            found.update("use" for token in tokens if token.kind == "string" and token.text.endswith('.rect"'))
            end = max(end, piece.end)
            if piece.tokens and _nameless(piece.tokens):
                found.add("")
        return frozenset(found)

    def _read(self, piece: Piece) -> Statement | None:
        form = self._form(piece) if piece.tokens else None
        if not piece.tokens and piece.brace is not None and piece.whole:
            cure = "Write what the braces belong to before them, on the same line."
            self._wrong("these braces belong to nothing", cure, piece.brace.start, piece.brace.end)
        before = len(self.mistakes)
        body = self._body(form, piece)
        if form is None or not piece.whole:
            return None
        missing = len(self.mistakes) > before or not all(inner.whole for inner in piece.body or ())
        tree = self._parse(form, piece.tokens)
        built = None if tree is None else self._built(lambda: self._builder.statement(tree, body))
        return replace(built, whole=False) if missing and isinstance(built, Datasheet) else built

    def _form(self, piece: Piece) -> str | None:
        """Which statement a piece is, by its first words."""
        tokens = piece.tokens
        first = tokens[0]
        leads_on = len(tokens) > 1 and tokens[1].is_mark("->", "[", ".")
        if first.kind == "word" and first.text in _STATEMENTS and not leads_on:
            return first.text
        if first.is_mark("(") or self._has_arrow(tokens):
            return "element"
        if piece.whole and not self._strange(tokens):
            near = nearest(first.text, _STATEMENTS) if first.kind == "word" else None
            cure = f"Did you mean {near}? {FORMS[near]}" if near else f"{_STARTS} {FORMS['element']}"
            self._wrong(f"no statement starts with {first.text}", cure, first.start, first.end)
        return None

    def _has_arrow(self, tokens: Sequence[Token]) -> bool:
        depth = 0
        for token in tokens:
            depth += token.is_mark("(", "[") - token.is_mark(")", "]")
            if depth == 0 and token.is_mark("->"):
                return True
        return False

    def _body(self, form: str | None, piece: Piece) -> tuple[Any, ...]:
        """What the braces hold, as far as it can be read: settings, events or statements."""
        if piece.body is None:
            if form is not None and piece.whole and _WITH_BODY.get(form):
                cure = f"Write {{ at the end of its first line. {FORMS[form]}"
                first = piece.tokens[0]
                self._wrong(f"the {_SPOKEN.get(form, form)} has no body", cure, first.start, first.end)
            return ()
        if form is not None and form not in _WITH_BODY and piece.whole and piece.brace is not None:
            cure = "Leave them out: only data sheets, blocks, repeats and studies have a body."
            self._wrong(f"braces can't follow this {_SPOKEN.get(form, form)}", cure, piece.brace.start, piece.brace.end)
        if form not in _WITH_BODY and piece.tokens:
            form = next((token.text for token in piece.tokens if token.text in _WITH_BODY), "unknown")
        if form == "unknown":
            return ()
        if form == "datasheet":
            return _found(self._setting(part) for inner in piece.body for part in self._keys(inner))
        if form == "study":
            return _found(self._event(inner) for inner in piece.body)
        return self.statements(piece.body)

    def _keys(self, piece: Piece) -> list[Sequence[Token]]:
        """The keys of one line of a data sheet: its tokens, cut at the commas that stand in no bracket."""
        if piece.brace is not None and piece.whole:
            cure = "A data sheet holds keys only."
            self._wrong("braces can't stand in a data sheet", cure, piece.brace.start, piece.brace.end)
        if piece.body is not None or not piece.whole:
            return []
        cuts: list[int] = []
        depth = 0
        for position, token in enumerate(piece.tokens):
            depth += token.is_mark("(", "[") - token.is_mark(")", "]")
            if depth == 0 and token.is_mark(","):
                cuts.append(position)
        edges = [-1, *cuts, len(piece.tokens)]
        found = [piece.tokens[start + 1 : end] for start, end in zip(edges, edges[1:], strict=False)]
        for cut, keys in zip([cuts[0], *cuts] if cuts else [], found, strict=False):
            if not keys:
                comma = piece.tokens[cut]
                self._wrong("a key is missing beside this comma", "Leave the comma out.", comma.start, comma.end)
        return [keys for keys in found if keys]

    def _setting(self, tokens: Sequence[Token]) -> Setting | None:
        tree = self._parse("setting", tokens)
        return None if tree is None else self._built(lambda: self._builder.setting(tree))

    def _event(self, piece: Piece) -> Event | None:
        if piece.brace is not None and piece.whole:
            cure = "The braces of a study hold events, one a line."
            self._wrong("braces can't stand in a study's", cure, piece.brace.start, piece.brace.end)
        if piece.brace is not None or not piece.whole:
            return None
        tree = self._parse("event", piece.tokens)
        return None if tree is None else self._built(lambda: self._builder.event(tree))

    def _built(self, build: Callable[[], Built]) -> Built | None:
        try:
            return build()
        except Unbuildable as reason:
            self.mistakes.append(Mistake(reason.what, reason.cure, reason.span))
            return None

    # --- parsing -------------------------------------------------------------------------------------------------

    def _strange(self, tokens: Sequence[Token]) -> bool:
        """Whether there is a token that no statement has; it is reported."""
        for token in tokens:
            if token.kind in ("unclosed", "strange"):
                self._wrong(*strange(token), token.start, token.end)
                return True
        return False

    def _parse(self, form: str, tokens: Sequence[Token]) -> Tree | None:
        """The tree of a statement's head, None where it does not have the form."""
        from lark import Token as Leaf
        from lark.exceptions import UnexpectedToken

        if self._strange(tokens):
            return None
        grammar = _grammar()
        run = grammar.parser.parse_interactive(start=form)
        before: frozenset[str] = frozenset()
        for position, token in enumerate(tokens):
            choices = run.choices()
            name = _name_of(token, choices, grammar)
            try:
                run.feed_token(Leaf(name, token.text, start_pos=token.start, end_pos=token.end))
            except UnexpectedToken:
                self._misfit(form, tokens, position, frozenset(run.accepts()), before)
                return None
            before = frozenset(choices)
        try:
            return run.feed_token(Leaf("$END", "", start_pos=tokens[-1].end, end_pos=tokens[-1].end))
        except UnexpectedToken:
            self._misfit(form, tokens, len(tokens), frozenset(run.accepts()), before)
            return None

    def _misfit(
        self, form: str, tokens: Sequence[Token], position: int, accepted: frozenset[str], before: frozenset[str]
    ) -> None:
        """Report the token that does not fit the form; before: what could have stood in the place of the last one."""
        literals = _grammar().literals
        last = tokens[position - 1] if position else None
        if last is not None and last.kind == "word" and last.text not in _STATEMENTS:
            near = near_keyword(last.text, before, literals)
            if near is not None and near != last.text:
                what = f"{last.text} has no meaning here"
                self._wrong(what, f"Did you mean {near}? {FORMS[form]}", last.start, last.end)
                return
        wanted = expected(accepted, literals)
        if position == len(tokens):
            end = tokens[-1].end
            self._wrong(f"the {_SPOKEN.get(form, form)} ends too soon: {wanted} is missing", FORMS[form], end, end + 1)
            return
        token = tokens[position]
        what, cure = self._misfit_words(form, token, last, accepted, wanted)
        line = self.source.text.rfind("\n", 0, token.start) + 1
        above = next((each for each in reversed(tokens[:position]) if each.start < line), None)
        if above is not None and above.is_mark(","):
            cure = f"The comma at the end of the line above lets the statement go on here. {cure}"
        self._wrong(what, cure, token.start, token.end)

    def _misfit_words(
        self, form: str, token: Token, last: Token | None, accepted: frozenset[str], wanted: str
    ) -> tuple[str, str]:
        if token.kind == "word" and last is not None and last.kind == "number" and "UNIT" in accepted:
            return no_unit(token.text)
        if token.text in NEVER_NAMES and "NAME" in accepted:
            return f"{token.text} can't be a name", f"Take another word. {FORMS[form]}"
        near = near_keyword(token.text, accepted, _grammar().literals) if token.kind == "word" else None
        cure = FORMS[form] if near is None else f"Did you mean {near}? {FORMS[form]}"
        return f"{token.text} can't stand here: {wanted} is expected", cure


def _name_of(token: Token, choices: Container[str], grammar: _Grammar) -> str:
    """The grammar's name of a token: a word is a keyword where one of its spelling can stand."""
    name = _KINDS.get(token.kind)
    if name is None or (token.kind == "word" and grammar.names.get(token.text, "") in choices):
        return grammar.names.get(token.text, token.text)
    return "NEVER" if name == "NAME" and token.text in NEVER_NAMES else name


def _nameless(tokens: Sequence[Token]) -> bool:
    """Whether a statement should name something, and has no name where that belongs."""
    words = [token.kind == "word" for token in tokens]
    if tokens[0].text in _NAMING:
        return words[1:2] != [True]
    colons = [position for position, token in enumerate(tokens) if token.is_mark(":")]
    return bool(colons) and not any(words[position + 1 : position + 3] == [True, True] for position in colons)


def _found(parts: Iterable[Built | None]) -> tuple[Built, ...]:
    return tuple(part for part in parts if part is not None)
