"""Texts made to do harm, or damaged: each ends in a circuit or in mistakes, soon, and one mistake makes no others."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import simcore
from grammar.description import Description
from grammar.layout import write
from grammar.mistakes import Mistake, render
from grammar.reader import read_text
from grammar.scanner import tokens_of
from grammar.spans import Span
from simcore.design.circuit import Circuit
from simcore.design.elaborate import elaborate
from simcore.design.files import load_text
from simcore.design.overview import describe
from simcore.report.look import look

LIBRARY = simcore.library_folder()
WORKED = {path.stem: path.read_text("utf-8") for path in sorted(LIBRARY.rglob("*.rect"))}
WORDS = sorted(
    {
        token.text
        for text in WORKED.values()
        for token in tokens_of(text)
        if token.kind in ("word", "mark", "number", "unit", "string")
    }
)
STRANGE = [
    "1e999",
    "1e-400",
    "9^9^9^9",
    "\0",
    "\x1b",
    "\u202e",
    "\r",
    "\x0c",
    "__import__",
    "[1..9999]",
    ",\n",
    "{",
    "}",
    "(",
    "\u00b5F",
    "1 TV^9 TV^9",
    "each",
    '"',
    "#",
]
STEERING = re.compile(r"[\x00-\x08\x0b-\x1f\x7f-\x9f\u202a-\u202e]")


def understood(text: str) -> tuple[Description, Circuit, list[Mistake], list[Mistake]]:
    project, mistakes = load_text(text, "design.rect", LIBRARY)
    circuit, more = elaborate(project)
    return project.top.description, circuit, mistakes, more


@st.composite
def altered(draw: st.DrawFn) -> str:
    """A worked description with tokens taken out, put in or exchanged, or a heap of tokens."""
    if draw(st.integers(0, 4)) == 0:
        return draw(st.lists(st.sampled_from(WORDS + STRANGE), max_size=40).map(" ".join))
    tokens = [token.text for token in tokens_of(draw(st.sampled_from(list(WORKED.values()))))]
    for _ in range(draw(st.integers(1, 4))):
        at = draw(st.integers(0, len(tokens) - 1))
        tokens[at : at + draw(st.integers(0, 2))] = draw(st.lists(st.sampled_from(WORDS + STRANGE), max_size=2))
    return "".join(tokens)


@settings(max_examples=80, deadline=None)
@given(altered())
def test_any_text_ends_in_a_circuit_or_in_mistakes(text: str) -> None:
    description, circuit, mistakes, more = understood(text)
    shown = render(mistakes + more)
    assert not STEERING.search(shown)
    for mistake in mistakes + more:
        assert mistake.what and mistake.cure and (mistake.span is not None or mistake.file)
    if not mistakes:
        again, wrong = read_text(write(description), "again")
        assert not wrong and again == description
    if not mistakes and not more:
        assert look(describe(circuit), "design.rect")


def spans(statements) -> list[Span]:
    found = [statement.span for statement in statements]
    return found + [
        span
        for statement in statements
        for span in spans(
            getattr(statement, "body", ()) if hasattr(statement, "terminals") or hasattr(statement, "variable") else ()
        )
    ]


DAMAGE = ["", "{} 1 2", "? {}", "{})", "@@{}", " zzz zzz {}"]


@settings(max_examples=80, deadline=None)
@given(st.data())
def test_a_damaged_statement_makes_no_mistake_elsewhere(data: st.DataObject) -> None:
    """What a statement that can't be read would have named is not called unknown, nor is the circuit called unsound."""
    text = WORKED[data.draw(st.sampled_from(sorted(WORKED)))]
    span = data.draw(st.sampled_from(spans(read_text(text, "x")[0].statements)))
    statement = text[span.start : span.end]
    token = data.draw(
        st.sampled_from([token for token in tokens_of(statement) if token.kind not in ("blank", "comment", "line")])
    )
    assume(not token.is_mark("{", "}"))
    damaged = statement[: token.start] + data.draw(st.sampled_from(DAMAGE)).format(token.text) + statement[token.end :]
    assume(not damaged.rstrip().endswith(","))
    description, _, mistakes, more = understood(text[: span.start] + damaged + text[span.end :])
    assume(description.unread)
    for mistake in mistakes + more:
        assert mistake.span is not None and span.start - 1 <= mistake.span.start <= span.start + len(damaged) + 1, (
            render([mistake])
        )


# --- bounds --------------------------------------------------------------------------------------------------------

BASE = "a -> b: source e, sine = 12 V rms, frequency = 50 Hz\na -> b: resistor R1, 100 Ohm\nreference b\nstudy s: settled\n"
MANY = 40_000
"""Characters: enough for a thousand statements, so that work of another order than the text's would be felt."""


def filled(form: str) -> str:
    """Many lines of a form."""
    lines, size = [], len(BASE)
    while size < MANY:
        lines.append(form.replace("#", str(len(lines))))
        size += len(lines[-1]) + 1
    return BASE + "\n".join(lines) + "\n"


HOSTILE = {
    "blank lines": "\n" * MANY,
    "no statements": filled("x"),
    "open braces": "{\n" * (MANY // 2),
    "closing braces": "}\n" * (MANY // 2),
    "open brackets": "(\n" * (MANY // 2),
    "closing brackets": (")" * 9000 + "\n") * 5,
    "one endless statement": "study s: settled,\n" + ",\n" * (MANY // 2 - 20),
    "unknown names": filled("let y# = zz# * 2"),
    "unknown kinds": filled("a -> b: resistr X#, 1 Ohm"),
    "nodes used once": filled("a -> n#: resistor X#, 1 Ohm"),
    "many elements": filled("a -> b: resistor X#, 1 Ohm"),
    "a chain of studies": filled("study t#: transient, duration = 1 ms, after = t#1"),
    "a product of requirements": filled("study t#: settled\nrequire each study: mean(voltage(a)) <= 1 V"),
    "copies of many lets": BASE
    + "repeat k from 1 to 9999 {\n"
    + "".join(f"let q{n}[k] = 1 V\n" for n in range(1000))
    + "}\n",
    "a voltage source twice, many times": filled(
        "a -> n#: source X#, constant = 1 V\na -> n#: source Y#, constant = 1 V"
    ),
}


@pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE)
def test_texts_made_to_take_long(text: str) -> None:
    _, _, mistakes, more = understood(text)
    assert len(mistakes) <= 101 and len(more) <= 101
    assert render(mistakes + more).count("cure:") == len(set(mistakes + more))


@pytest.mark.parametrize(
    "content",
    [b"", b"\0" * 100, b"\xff\xfe\x00", b"\x89PNG\r\n\x1a\n" + bytes(range(256)), b"let a = 9^9^9^9\n", b"let a = " + b"(" * 5000, b"\xef\xbb\xbflet a = 1e999\r\n", b"let __import__('os') = 1\n"],
    ids=["empty", "zeros", "utf16", "picture", "tower", "parentheses", "mark", "code"],
)  # fmt: skip
def test_the_command_never_breaks(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "x.rect").write_bytes(content)
    command = [sys.executable, "-m", "simcore.command", "look", "x.rect"]
    environment = {"PYTHONPATH": str(Path(simcore.__file__).parent.parent), "PATH": "/usr/bin:/bin"}
    done = subprocess.run(
        command, cwd=tmp_path, capture_output=True, text=True, timeout=60, env=environment, check=False
    )
    assert "Traceback" not in done.stderr and not STEERING.search(done.stdout + done.stderr)
    assert done.returncode == (2 if content else 0) and ("cure:" in done.stderr) == bool(content)
