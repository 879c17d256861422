"""Every form of statement as it is read, statements that can't be read, and files that are no text."""

from __future__ import annotations

from pathlib import Path

import pytest

from grammar import axes
from grammar import description as nodes
from grammar.description import Description, Name, Number, Part, Setting
from grammar.reader import LARGEST_FILE, LONGEST_LINE, read_expression, read_file, read_text


def read(text: str) -> Description:
    description, mistakes = read_text(text, "text")
    assert not mistakes, mistakes
    return description


def only(text: str) -> nodes.Statement:
    (statement,) = read(text).statements
    return statement


def name(text: str, *indices: float) -> Name:
    return Name((Part(text, tuple(Number(index) for index in indices)),))


def whats(text: str) -> list[str]:
    return [mistake.what for mistake in read_text(text, "text")[1]]


def key(text: str) -> nodes.Given:
    statement = only(f"a -> b: source s, k = {text}")
    assert isinstance(statement, nodes.Element)
    return statement.settings[0].value


VOLTS = Number(1.0, "V")


@pytest.mark.parametrize(
    ("text", "statement"),
    [
        ('purpose "12 V supply"', nodes.Purpose("12 V supply")),
        ('use "parts/d.rect"', nodes.Use("parts/d.rect")),
        ("reference minus, N", nodes.Reference((name("minus"), name("N")))),
        ("ambient 40 degC", nodes.Ambient(Number(40.0, "degC"))),
        ("let R = 1 V", nodes.Let(name("R"), VOLTS)),
        ('let R[2] = 1 V as "x"', nodes.Let(name("R", 2.0), VOLTS, None, "x")),
        ("let R = 1 V tolerance 20 %", nodes.Let(name("R"), VOLTS, nodes.Spread(Number(20.0, "%")))),
        (
            "let R = 1 V tolerance -1 V .. 2 V normal",
            nodes.Let(name("R"), VOLTS, nodes.Spread(nodes.Negative(VOLTS), Number(2.0, "V"), "normal")),
        ),
        ("a -> b: resistor R1", nodes.Element(nodes.Terminals("branch", (name("a"), name("b"))), "resistor", name("R1"), None, ())),
        (
            'a -> b: resistor R1, 1 V, k = 1 V as "x"',
            nodes.Element(nodes.Terminals("branch", (name("a"), name("b"))), "resistor", name("R1"), VOLTS, (Setting("k", VOLTS),), "x"),
        ),
        (
            "(a, b, c) -> n: three_phase g",
            nodes.Element(nodes.Terminals("set", (name("a"), name("b"), name("c")), name("n")), "three_phase", name("g"), None, ()),
        ),
        ("(a, b): box B[1]", nodes.Element(nodes.Terminals("set", (name("a"), name("b"))), "box", name("B", 1.0), None, ())),
        (
            "(a -> b) : (c -> d): transformer T",
            nodes.Element(nodes.Terminals("windings", tuple(name(n) for n in "abcd")), "transformer", name("T"), None, ()),
        ),
        ("datasheet D: diode {\n k = 1 V, m = 1 V\n n = 1 V\n}", nodes.Datasheet("D", "diode", tuple(Setting(k, VOLTS) for k in "kmn"))),
        ('datasheet D: diode as "x" { k = 1 V }', nodes.Datasheet("D", "diode", (Setting("k", VOLTS),), "x")),
        (
            "block b(x, s[1]) with p, q = 1 V {\n let y = 1 V\n}",
            nodes.Block("b", (name("x"), name("s", 1.0)), (nodes.Parameter("p"), nodes.Parameter("q", VOLTS)), (nodes.Let(name("y"), VOLTS),)),
        ),
        ("repeat k from 1 to n { let y = 1 V }", nodes.Repeat("k", Number(1.0), name("n"), (nodes.Let(name("y"), VOLTS),))),
        ('observe u = 1 V as "out"', nodes.Observe(name("u"), VOLTS, "out")),
        ("study s: settled", nodes.Study("s", "settled", (), (), ())),
        (
            "study s: transient, after = r, set R = 1 V, open D, angle = worst for peak(u) {\n at 1 V: short D\n}",
            nodes.Study(
                "s",
                "transient",
                (Setting("after", name("r")), Setting("angle", nodes.Worst(nodes.Call("peak", (name("u"),))))),
                (nodes.Action("set", name("R"), VOLTS), nodes.Action("open", name("D"))),
                (nodes.Event(VOLTS, nodes.Action("short", name("D"))),),
            ),
        ),
        ("require s, t: u <= 1 V", nodes.Require(("s", "t"), nodes.Comparison(name("u"), "<=", VOLTS))),
        ("require each study: u between 1 V and 2", nodes.Require((), nodes.Comparison(name("u"), "between", VOLTS, Number(2.0)))),
        ('require s: h within "IEC"', nodes.Require(("s",), nodes.Comparison(name("h"), "within", table="IEC"))),
        ("require s: f(each diode) > 1 V", nodes.Require(("s",), nodes.Comparison(nodes.Call("f", (nodes.Each("diode"),)), ">", VOLTS))),
        ("require s: f(u) at t < 1 V", nodes.Require(("s",), nodes.Comparison(nodes.Call("f", (name("u"),), "t"), "<", VOLTS))),
        ("require s: ratings, margin = 1 V", nodes.Require(("s",), nodes.Ratings((), (Setting("margin", VOLTS),)))),
        ("require s: ratings of each diode", nodes.Require(("s",), nodes.Ratings((nodes.Each("diode"),), ()))),
        ('require s: ratings of X, Y as "r"', nodes.Require(("s",), nodes.Ratings((name("X"), name("Y")), ()), "r")),
        ("sweep w: R from 1 V to 2 in 5 steps", nodes.Sweep("w", (axes.RangeAxis(name("R"), VOLTS, Number(2.0), Number(5.0), False),), ())),
        ("sweep w: R from 1 V to 2 in 5 log steps", nodes.Sweep("w", (axes.RangeAxis(name("R"), VOLTS, Number(2.0), Number(5.0), True),), ())),
        (
            "sweep w: R over [1 V, d] by extremes of A, B, studies = [s]",
            nodes.Sweep(
                "w",
                (axes.OverAxis(name("R"), nodes.Listed((nodes.Item(VOLTS), nodes.Item(name("d"))))), axes.ExtremesAxis((name("A"), name("B")))),
                (Setting("studies", nodes.Listed((nodes.Item(name("s")),))),),
            ),
        ),
        ("sweep w: 20 samples of each let, seed = 7", nodes.Sweep("w", (axes.SamplesAxis(Number(20.0), ()),), (Setting("seed", Number(7.0)),))),
        ("sweep w: open or short each diode", nodes.Sweep("w", (axes.FaultsAxis(("open", "short"), (), "diode"),), ())),
        (
            "sweep w: short each of D[1..4], C",
            nodes.Sweep("w", (axes.FaultsAxis(("short",), (Name((Part("D", (nodes.Range(Number(1.0), Number(4.0)),)),)), name("C"))),), ()),
        ),
    ],
)  # fmt: skip
def test_statements(text: str, statement: nodes.Statement) -> None:
    assert only(text) == statement


@pytest.mark.parametrize(
    ("text", "given"),
    [
        ("1 V @ 10 mA", nodes.Point(VOLTS, Number(10.0, "mA"))),
        ("1 V : 1 V : 2", nodes.Ratio((VOLTS, VOLTS, Number(2.0)))),
        ("1 V rms", nodes.Amplitude((VOLTS,), "rms")),
        ("1 V line peak", nodes.Amplitude((VOLTS,), "peak", "line")),
        ("1 V : 2 phase rms", nodes.Amplitude((VOLTS, Number(2.0)), "rms", "phase")),
        ("[]", nodes.Listed(())),
        ("[1 V, 2: 1 V, 1 V @ 3, 3: 2 @ 1 V]", nodes.Listed((
            nodes.Item(VOLTS), nodes.Item(VOLTS, Number(2.0)), nodes.Item(VOLTS, None, Number(3.0)), nodes.Item(Number(2.0), Number(3.0), VOLTS)))),
        ('"file.csv"', nodes.Text("file.csv")),
        ("open", name("open")),
        ("closed", name("closed")),
        ("voltage(a -> b)", nodes.Call("voltage", (nodes.Branch(name("a"), name("b")),))),
    ],
)  # fmt: skip
def test_what_a_key_is_given(text: str, given: nodes.Given) -> None:
    assert key(text) == given


@pytest.mark.parametrize(
    "word", ["line", "in", "to", "from", "by", "log", "rms", "at", "study", "let", "for", "use", "between", "V", "pi"]
)
def test_a_keyword_may_be_a_name(word: str) -> None:
    statement = only(f"{word} -> x: resistor R, {word}")
    assert isinstance(statement, nodes.Element)
    assert statement.terminals.nodes[0] == name(word) and statement.value == name(word)


@pytest.mark.parametrize("word", ["each", "of", "open", "short", "extremes", "ratings", "worst"])
def test_words_that_are_never_names(word: str) -> None:
    assert whats(f"let {word} = 1") == [f"{word} can't be a name"]


def test_spans_stand_where_the_text_does() -> None:
    text = "let a = 1\nx -> y: resistor R, 2 Ohm\n"
    let, element = read(text).statements
    assert isinstance(let, nodes.Let) and isinstance(element, nodes.Element)
    assert element.span is not None and text[element.span.start : element.span.end] == "x -> y: resistor R, 2 Ohm"
    assert element.value is not None and element.value.span is not None
    assert text[element.value.span.start : element.value.span.end] == "2 Ohm"


def test_all_mistakes_at_once_and_the_rest_is_read() -> None:
    description, mistakes = read_text("let a =\nlet b = 1\nstudy\nxyz\nreference g\n", "text")
    assert len(mistakes) == 3 and len(description.statements) == 2
    assert description.unread == {"let", "a", "study", "xyz", ""} and not description.lost


def test_what_stands_in_a_body_that_can_not_be_read() -> None:
    description, mistakes = read_text(
        "block (x) {\n let inner = 1\n let = 2\n}\ndatasheet D: diode {\n k 1 V\n m = 1 V\n}\n", "text"
    )
    assert len(mistakes) == 3 and {"block", "x", "inner"} <= description.unread
    (sheet,) = description.statements
    assert isinstance(sheet, nodes.Datasheet) and not sheet.whole and [each.key for each in sheet.settings] == ["m"]


@pytest.mark.parametrize(
    "text",
    ["}\n", "block b(x) {\nlet a = 1\n", "\0", "x" * (LONGEST_LINE + 1), "\n" * (LARGEST_FILE + 1), "}\n" * 2000],
)
def test_a_text_of_which_nothing_can_be_said(text: str) -> None:
    description, mistakes = read_text(text, "text")
    assert description.lost and mistakes


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("let a = 1e999", "the number is too large"),
        ("let a = 1e-400 V", "the number is too small"),
        ("let a = 0." + "0" * 400 + "1", "the number is too small"),
        ("let a = " + "9" * 400, "the number is too large"),
        ("let a = " + "-" * 101 + "1", "the expression has more than 100 steps in one another"),
        ("let a = " + "1+" * 101 + "1", "the expression has more than 100 steps in one another"),
        ("let a = " + "2^" * 101 + "1", "the expression has more than 100 steps in one another"),
        ("let a = b" + "[b" * 29 + "]" * 29 + "+" + "-" * 99 + "1", "the expression has more than 100 steps in one another"),
        ("let a = " + "(" * 31 + "1" + ")" * 31, "brackets stand more than 30 deep"),
        ("x" * (LONGEST_LINE + 1), "a line is too long"),
        ("#" * (LARGEST_FILE + 1), "the text is too large"),
        ("let a = 1\0", "a NUL character stands here"),
        ("let a = 1\x0c", "the character U+000C has no meaning here"),
        ("let a\u00a0= 1", "the character U+00A0 has no meaning here"),
        ("let \u0430 = 1", "\u0430 has no meaning here"),
        ("let a = 1\rlet b = 2", "a carriage return stands within the line"),
        ("\ufefflet a = 1", "the character U+FEFF has no meaning here"),
        ("let __import__ = 1", "_ has no meaning here"),
        ("let a = __import__(\"os\")", "_ has no meaning here"),
        ("let a = \u0661", "\u0661 has no meaning here"),
    ],
)  # fmt: skip
def test_bounds_and_strange_signs(text: str, what: str) -> None:
    assert whats(text) == [what]


@pytest.mark.parametrize(
    "text",
    [
        "let a = " + "-" * 99 + "1",
        "let a = 0e-999",
        "let a = 1e-299",
        "let a = 1e299",
        "let a = " + "(" * 30 + "1" + ")" * 30,
        "\tlet a = 1\t\r\n",
    ],
)
def test_what_is_just_within_the_bounds(text: str) -> None:
    assert whats(text) == []


def test_at_most_a_hundred_mistakes_are_shown() -> None:
    found = whats("x\n" * 150)
    assert len(found) == 101 and found[-1] == "only the first 100 mistakes are shown"


@pytest.mark.parametrize(
    ("content", "what"),
    [
        (b"let a = \xff\n", "the file is not UTF-8 text"),
        (b"\xff\xfel\x00e\x00t\x00", "the file is not UTF-8 text"),
        (b"let a = \xed\xa0\x80", "the file is not UTF-8 text"),
        (b"#" * (LARGEST_FILE + 1), "the file is too large"),
    ],
)
def test_a_file_that_is_no_description(tmp_path: Path, content: bytes, what: str) -> None:
    (tmp_path / "a.rect").write_bytes(content)
    text, mistakes = read_file(tmp_path / "a.rect")
    assert text is None and [mistake.what for mistake in mistakes] == [what] and mistakes[0].file.endswith("a.rect")


def test_a_byte_order_mark_and_line_ends_of_either_kind(tmp_path: Path) -> None:
    (tmp_path / "a.rect").write_bytes(b"\xef\xbb\xbflet a = 1\r\n\tlet b = 2\r\n")
    text, mistakes = read_file(tmp_path / "a.rect")
    assert text is not None and not mistakes and len(read(text).statements) == 2


@pytest.mark.parametrize("path", [".", "a\0b", "no/such/file.rect", "x" * 5000])
def test_a_path_that_is_no_file(tmp_path: Path, path: str) -> None:
    text, mistakes = read_file(f"{tmp_path}/{path}")
    assert text is None and len(mistakes) == 1 and mistakes[0].cure


@pytest.mark.parametrize(
    ("text", "right"),
    [
        ("2 * R", True),
        ("", False),
        ("1\n2", False),
        ("let a = 1", False),
        ("1 {}", False),
        ("1 +", False),
        ("(1", False),
    ],
)
def test_an_expression_that_stands_alone(text: str, right: bool) -> None:
    expression, mistakes = read_expression(text, "option")
    assert (expression is not None) is right and bool(mistakes) is not right
