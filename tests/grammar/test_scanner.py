"""Cutting a text into statements: units, line ends, continuation, comments, brackets, braces, and signs that mean nothing."""

from __future__ import annotations

import pytest

from grammar.description import Source
from grammar.scanner import Cut, pieces_of, tokens_of


def cut(text: str) -> Cut:
    return pieces_of(Source("text", text))


def heads(text: str) -> list[str]:
    return [" ".join(token.text for token in piece.tokens) for piece in cut(text).pieces]


@pytest.mark.parametrize(
    ("text", "tokens"),
    [
        ("1 V/A", "number:1 unit:V/A"),
        ("1 V / A", "number:1 unit:V mark:/ word:A"),
        ("1 V/ A", "number:1 unit:V mark:/ word:A"),
        ("1V", "number:1 unit:V"),
        ("2 A^2 s", "number:2 unit:A^2 s"),
        ("2 A ^2", "number:2 unit:A mark:^ number:2"),
        ("2 A^2.5", "number:2 unit:A mark:^ number:2.5"),
        ("230 V rms", "number:230 unit:V word:rms"),
        ("1 mm", "number:1 word:mm"),
        ("10 Ohms", "number:10 word:Ohms"),
        ("4700 \u00b5F", "number:4700 unit:\u00b5F"),
        ("1 \u03a9", "number:1 unit:\u03a9"),
        ("20 %", "number:20 unit:%"),
        ("1e3", "number:1e3"),
        ("1.5e-3 s", "number:1.5e-3 unit:s"),
        ("1..4", "number:1 mark:.. number:4"),
        ("U1.D[3]", "word:U1 mark:. word:D mark:[ number:3 mark:]"),
        ("a->b", "word:a mark:-> word:b"),
        ("x <= 1", "word:x mark:<= number:1"),
        ('as "a # b"', 'word:as string:"a # b"'),
        ('"open', 'unclosed:"open'),
        ("V", "word:V"),
        ("a V", "word:a word:V"),
        ("\u2264", "strange:\u2264"),
        ("_x", "strange:_ word:x"),
    ],
)
def test_tokens(text: str, tokens: str) -> None:
    found = [token for token in tokens_of(text) if token.kind not in ("blank", "comment")]
    assert " ".join(f"{token.kind}:{token.text}" for token in found) == tokens


def test_each_character_is_in_one_token() -> None:
    text = 'let a = 1 V # x\r\n\t"q" \u00b5 2 kOhm/s\n{'
    assert "".join(token.text for token in tokens_of(text)) == text


@pytest.mark.parametrize(
    ("text", "statements"),
    [
        ("a\nb\n", ["a", "b"]),
        ("a\r\nb", ["a", "b"]),
        ("a,\nb\nc", ["a , b", "c"]),
        ("a, # why\n\n  # more\n b", ["a , b"]),
        ("f(a\n+ b)\nc", ["f ( a + b )", "c"]),
        ("[1,\n2\n]\nc", ["[ 1 , 2 ]", "c"]),
        ("# only\n\n", []),
        ("", []),
        ("\ta \t b", ["a b"]),
        ("a # b\nc", ["a", "c"]),
    ],
)
def test_where_a_statement_ends(text: str, statements: list[str]) -> None:
    assert heads(text) == statements and not cut(text).mistakes


def test_bodies() -> None:
    found = cut("a {\n b\n c { d }\n}\ne").pieces
    assert [piece.tokens[0].text for piece in found] == ["a", "e"]
    body = found[0].body
    assert body is not None and [piece.tokens[0].text for piece in body] == ["b", "c"]
    assert body[1].body is not None and body[1].body[0].tokens[0].text == "d"
    assert (found[0].start, found[0].end) == (0, 17)


@pytest.mark.parametrize(
    ("text", "what", "lost"),
    [
        ("f(a\nb", "this ( is never closed", False),
        ("[a)\nb", "this [ is never closed", False),
        ("a)\nb", "this ) closes nothing", False),
        ("a {\nb", "this { is never closed", True),
        ("a\n}\nb", "this } closes nothing", True),
        ("a { b } c", "after } a new line begins", False),
        ("(" * 31 + ")" * 31, "brackets stand more than 30 deep", False),
        ("a {" * 17 + "}" * 17, "braces stand more than 16 deep", False),
        ("q" * 101, "this name is too long", False),
        ('"a\x1bb"', "the character U+001B can't be seen and has no meaning here", False),
        ("# a\u202eb", "the character U+202E can't be seen and has no meaning here", False),
    ],
)
def test_brackets_braces_and_signs(text: str, what: str, lost: bool) -> None:
    found = cut(text)
    assert [mistake.what for mistake in found.mistakes] == [what] and found.lost is lost


@pytest.mark.parametrize("text", ["(" * 30 + ")" * 30, "a {\n" * 16 + "}\n" * 16, "q" * 100, '"\u00e9 \u03a9 \u4e2d"'])
def test_what_is_just_within_the_bounds(text: str) -> None:
    assert not cut(text).mistakes


def test_the_statement_after_an_unclosed_bracket_is_found() -> None:
    assert heads("f(a\nlet b = 1\n")[1:] == ["let b = 1"]
