"""Texts drawn from the grammar, and every text that once broke something: the whole command ends as it must."""

from __future__ import annotations

import re
import shutil
import tempfile
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from statements import circuits, revalued, statement, texts
from whole_command import bounded, ends

from grammar.reader import read_text

CORPUS = sorted(Path(__file__).with_name("corpus").iterdir())


def tried(content: bytes, *arguments: str) -> int:
    folder = Path(tempfile.mkdtemp())
    try:
        with bounded():
            return ends(content, folder, *arguments)
    finally:
        shutil.rmtree(folder)


FORM = re.compile("can't stand here|no statement starts|ends too soon|has no meaning")
QUIET = {"deadline": None, "suppress_health_check": list(HealthCheck)}


@settings(max_examples=30, derandomize=True, **QUIET)
@given(texts(), st.sampled_from(["look", "tidy", "run"]))
def test_texts_of_the_grammar_end(text: str, verb: str) -> None:
    tried(text.encode(), verb)


@settings(max_examples=30, derandomize=True, **QUIET)
@given(circuits(), st.sampled_from(["run", "run", "tidy"]))
def test_elements_as_declared_end(text: str, verb: str) -> None:
    tried(text.encode(), verb)


@settings(max_examples=8, derandomize=True, **QUIET)
@given(revalued())
def test_numbers_far_off_end(text: str) -> None:
    tried(text.encode())


@pytest.mark.nightly
@settings(max_examples=5000, **QUIET)
@given(texts() | circuits() | revalued(), st.sampled_from(["look", "tidy", "run"]))
def test_many_texts_end(text: str, verb: str) -> None:
    tried(text.encode(), verb)


@settings(max_examples=40, derandomize=True, **QUIET)
@given(statement())
def test_what_the_grammar_makes_is_read(text: str) -> None:
    """Whatever is wrong with its meaning, its form is right: so the walk covers the grammar and nothing else."""
    _, mistakes = read_text(text, "drawn")
    assert not [mistake for mistake in mistakes if FORM.search(mistake.what)], (text, mistakes)


@pytest.mark.parametrize("path", CORPUS, ids=lambda path: path.name)
def test_what_once_broke_ends(path: Path) -> None:
    for verb in ("look", "run", "tidy"):
        tried(path.read_bytes(), verb)
