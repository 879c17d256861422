"""The canonical layout of a text: order of reading, groups parted by an empty line, columns aligned, comments kept.

A comment stays with the statement it stands before or behind. Knows texts and descriptions only.
"""

from __future__ import annotations

from bisect import bisect, bisect_left
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from itertools import groupby, pairwise
from typing import Any

from grammar import description as nodes
from grammar.description import Description, Statement
from grammar.mistakes import Mistake
from grammar.reader import read_text
from grammar.scanner import Piece, pieces_of, tokens_of
from grammar.spans import Source
from grammar.writer import write_event, write_expression, write_setting, write_statement, write_terminals

WIDTH = 120
"""Longest line; a longer one goes on after a comma."""
_INDENT = "    "
_COLUMNS = (24, 50, 50)
"""What is wider than this does not move the columns of its neighbours."""
_COMMENTS = 80
_ORDER: tuple[tuple[int, tuple[type, ...]], ...] = (
    (0, (nodes.Purpose,)),
    (0, (nodes.Use,)),
    (1, (nodes.Require,)),
    (2, (nodes.Study,)),
    (3, (nodes.Let,)),
    (4, (nodes.Datasheet,)),
    (5, (nodes.Block,)),
    (6, (nodes.Element, nodes.Repeat)),
    (6, (nodes.Reference,)),
    (6, (nodes.Ambient,)),
    (7, (nodes.Observe,)),
    (8, (nodes.Sweep,)),
)
"""The order of reading, and which statements stand in one group. Elements keep theirs: the first sine has a meaning."""
_RANK = {kind: rank for rank, (_, kinds) in enumerate(_ORDER) for kind in kinds}
_GROUP = {kind: group for group, kinds in _ORDER for kind in kinds}


def write(description: Description) -> str:
    """The text of a description, statements in their order."""
    return _lines_text(_top([_Item(*_written(statement)) for statement in description.statements]))


def in_order(description: Description) -> Description:
    """The same statements in the order of reading: what must hold, how it is judged, then the circuit."""
    ordered = sorted(description.statements, key=lambda statement: _RANK[type(statement)])
    return Description(tuple(ordered), description.source)


def tidy(text: str, name: str) -> tuple[str | None, list[Mistake]]:
    """A text in canonical order and layout, with all its comments; None with its mistakes where it has some.

    The result is read again: where it would mean something else, lack a comment, or change once more, that is a mistake
    and there is no result. name: what messages call the text
    """
    text = text.replace("\r\n", "\n")
    description, mistakes = read_text(text, name)
    if mistakes:
        return None, mistakes
    result = _tidied(text, description)
    again, wrong = read_text(result, name)
    same = not wrong and again == in_order(description) and _comments(result) == _comments(text)
    if not same or _tidied(result, again) != result:
        cure = "Leave it as it is: nothing of it was changed."
        return None, [Mistake("it can't be tidied without a change of what it says", cure, None, name)]
    return result, []


def _comments(text: str) -> list[str]:
    return sorted(token.text.rstrip() for token in tokens_of(text) if token.kind == "comment")


@dataclass
class _Item:
    """What stands between two line ends that are not its own.

    kind: type of statement; cells: what is aligned of its first line; lines: those that follow; before: comments above
    it, "" for an empty line; behind: the comment on its last line; apart: an empty line stands above
    """

    kind: type
    cells: list[str]
    lines: list[str] = field(default_factory=list)
    before: list[str] = field(default_factory=list)
    behind: str = ""
    apart: bool = False


def _tidied(text: str, description: Description) -> str:
    pieces = pieces_of(Source("", text)).pieces
    source = _Commented(text)
    opening, items, closing = source.statements(pieces, description.statements, 0, len(text))
    header: list[str] = []
    if items and "" in items[0].before:
        cut = items[0].before.index("")
        header, items[0].before = [*items[0].before[:cut], ""], items[0].before[cut + 1 :]
    items.sort(key=lambda item: _RANK[item.kind])
    lines = [*header, *_top(items)]
    return _lines_text([*lines, *([""] if lines and closing else []), *([opening] if opening else []), *closing])


def _lines_text(lines: list[str]) -> str:
    return "\n".join(lines) + ("\n" if lines else "")


def _top(items: list[_Item]) -> list[str]:
    """The lines of a file's statements, groups parted by an empty line."""
    for item, earlier in zip(items, [None, *items], strict=False):
        if earlier is None:
            item.apart = False
        elif item.kind in (nodes.Block, nodes.Datasheet) or _GROUP[item.kind] != _GROUP[earlier.kind]:
            item.apart = True
    return _body(items, WIDTH)


# --- lines out of items ----------------------------------------------------------------------------------------------


def _body(items: Sequence[_Item], width: int) -> list[str]:
    """The lines of items one after another, those without an empty line between them in columns."""
    lines: list[str] = []
    run = 0
    numbered = []
    for item in items:
        run += item.apart
        numbered.append((run, item))
    for _, members in groupby(numbered, key=lambda pair: pair[0]):
        group = [item for _, item in members]
        if group[0].apart:
            lines.append("")
        lines += _run(group, width)
    return lines


def _run(items: Sequence[_Item], width: int) -> list[str]:
    widths = [_column(items, column) for column in range(len(_COLUMNS))]
    firsts = [_wrapped(_padded(item.cells, widths), width) for item in items]
    ends = [len(first[-1]) for item, first in zip(items, firsts, strict=True) if item.behind and not item.lines]
    column = max((end for end in ends if end <= _COMMENTS), default=0)
    lines: list[str] = []
    for item, first in zip(items, firsts, strict=True):
        own = [*first, *item.lines]
        if item.behind:
            own[-1] = f"{own[-1].ljust(0 if item.lines else column)}  {item.behind}"
        lines += [*item.before, *own]
    return lines


def _column(items: Sequence[_Item], column: int) -> int:
    """The width of a column: that of its widest cell with something behind it, the very wide ones left out."""
    cells = [item.cells[column] for item in items if any(item.cells[column + 1 :])]
    return max((len(cell) for cell in cells if len(cell) <= _COLUMNS[column]), default=0)


def _padded(cells: Sequence[str], widths: Sequence[int]) -> str:
    padded = [cell.ljust(width) if width else cell for cell, width in zip(cells, widths, strict=False)]
    padded += cells[len(widths) :]
    return " ".join(cell for cell in padded if cell).rstrip()


def _wrapped(line: str, width: int) -> list[str]:
    """A line cut after commas where it is too long; texts in quotes stay whole."""
    lines = [""]
    quoted = False
    for part in line.split(", "):
        joined = f"{lines[-1]}, {part}" if lines[-1].strip() else lines[-1] + part
        if quoted or len(joined) < width or not lines[-1].strip():
            lines[-1] = joined
        else:
            lines[-1] += ","
            lines.append(_INDENT + part)
        quoted ^= part.count('"') % 2 == 1
    return lines


# --- items out of statements -----------------------------------------------------------------------------------------


def _written(statement: Statement) -> tuple[type, list[str], list[str]]:
    """Type, cells and further lines of a statement that has no comments."""
    first, *rest = write_statement(statement)
    return type(statement), _cells(statement, first), rest


def _cells(statement: Any, line: str) -> list[str]:
    """The first line of a statement in columns: what it is about, what it says, its tolerance, its wording."""
    label = getattr(statement, "label", None)
    wording = "" if label is None else f' as "{label}"'
    if not line.endswith(wording):
        wording = ""
    line = line.removesuffix(wording)
    match statement:
        case nodes.Let():
            about = f"let {write_expression(statement.name)}"
        case nodes.Element():
            about = f"{write_terminals(statement.terminals)}:"
        case nodes.Require():
            about = f"require {', '.join(statement.studies) or 'each study'}:"
        case nodes.Study():
            about = f"study {statement.name}:"
        case nodes.Sweep():
            about = f"sweep {statement.name}:"
        case _:
            return [line + wording]
    says, tolerance, spread = line.removeprefix(about).strip().partition(" tolerance ")
    if not isinstance(statement, nodes.Let):
        says, tolerance, spread = says + tolerance + spread, "", ""
    return [about, says, (tolerance + spread).strip(), wording.strip()]


class _Commented:
    """A text with its comments, from which each statement takes those that are its own."""

    def __init__(self, text: str):
        self.text = text
        self._comments = [token.start for token in tokens_of(text) if token.kind == "comment"]

    def statements(
        self, pieces: Sequence[Piece], found: Sequence[Statement], start: int, end: int
    ) -> tuple[str, list[_Item], list[str]]:
        """The comment on the opening line, the items, and the comments after the last, of a range of the text."""
        return self._parted(pieces, [[self._statement(*pair)] for pair in zip(pieces, found, strict=True)], start, end)

    def _parted(
        self, pieces: Sequence[Piece], items: Sequence[list[_Item]], start: int, end: int
    ) -> tuple[str, list[_Item], list[str]]:
        """Give each piece's items the comments between it and its neighbours."""
        opening = ""
        position, last = start, None
        for piece, own in zip(pieces, items, strict=True):
            behind, own[0].before, own[0].apart = self._gap(position, piece.tokens[0].start)
            if last is None:
                opening = behind
            else:
                last.behind = behind
            position, last = piece.end, own[-1]
        behind, closing, _ = self._gap(position, end)
        if last is None:
            opening = behind
        else:
            last.behind = behind
        while closing and not closing[-1]:
            closing.pop()
        return opening, [item for own in items for item in own], closing

    def _gap(self, start: int, end: int) -> tuple[str, list[str], bool]:
        """The comment on the line that the gap starts in, those on lines of their own, and whether an empty line stands
        before these."""
        first, *others = [line.strip() for line in ("\n" * (start == 0) + self.text[start:end]).split("\n")]
        others = others[:-1] if end < len(self.text) else others
        lines = [line for line, above in zip(others, ["#", *others], strict=False) if line or above]
        apart = bool(lines) and not lines[0]
        return first, lines[1:] if apart else lines, apart

    def _as_written(self, piece: Piece) -> list[str] | None:
        """The head of a piece as it stands, where it has comments inside."""
        start, end = piece.tokens[0].start, piece.tokens[-1].end
        if bisect(self._comments, start) == bisect_left(self._comments, end):
            return None
        first, *others = [line.strip() for line in self.text[start:end].split("\n")]
        return [first, *(_INDENT + line for line in others if line)]

    def _statement(self, piece: Piece, statement: Any) -> _Item:
        kind, cells, rest = _written(statement)
        head = self._as_written(piece)
        if piece.body is None or piece.brace is None:
            return _Item(kind, cells, rest) if head is None else _Item(kind, head[:1], head[1:])
        opening, items, closing = self._inside(piece, piece.body, statement)
        lines = [*_body(items, WIDTH - len(_INDENT)), *closing]
        bare = replace(statement, **{_HELD[kind]: ()})
        if not lines and not opening and kind is nodes.Study:
            return _Item(kind, cells) if head is None else _Item(kind, head[:1], head[1:])
        brace = " {" + (f"  {opening}" if opening else "")
        inner = [*(_INDENT + line if line else "" for line in lines), "}"]
        if head is None:
            first = write_statement(bare)[0].removesuffix(" {") + brace
            return _Item(kind, _cells(bare, first), inner)
        return _Item(kind, head[:1], [*head[1:-1], head[-1] + brace, *inner])

    def _inside(self, piece: Piece, body: Sequence[Piece], statement: Any) -> tuple[str, list[_Item], list[str]]:
        """What the braces of a statement hold; see statements."""
        assert piece.brace is not None
        start, end = piece.brace.end, piece.end - 1
        if isinstance(statement, nodes.Block | nodes.Repeat):
            return self.statements(body, statement.body, start, end)
        if isinstance(statement, nodes.Study):
            texts = [[(event, write_event(event))] for event in statement.events]
        else:
            settings = [(setting, write_setting(setting)) for setting in statement.settings]
            starts = [setting.span.start for setting in statement.settings]
            cuts = [bisect_left(starts, part.tokens[0].start) for part in body]
            texts = [settings[cut:after] for cut, after in pairwise([*cuts, len(starts)])]
        items = []
        for part, own in zip(body, texts, strict=True):
            head = self._as_written(part)
            written = [_Item(type(node), [text]) for node, text in own]
            items.append(written if head is None else [_Item(nodes.Setting, head[:1], head[1:])])
        return self._parted(body, items, start, end)


_HELD = {nodes.Datasheet: "settings", nodes.Block: "body", nodes.Repeat: "body", nodes.Study: "events"}
