"""The kept tables are those of the grammar, and are used only where they are."""

from __future__ import annotations

import json
from pathlib import Path

import lark
import pytest

from grammar import reader, tables

RULES = tables.GRAMMAR.read_text("utf-8")
KEPT = tables.TABLES.read_text("ascii")


@pytest.fixture
def made(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """The grammars that parsers are made from while a test runs."""
    found: list[str] = []
    make = tables._made

    def noted(rules: str) -> lark.Lark:
        found.append(rules)
        return make(rules)

    monkeypatch.setattr(tables, "_made", noted)
    return found


def in_use(version: str) -> bool:
    return json.loads(KEPT)["made from"]["lark"] == version


@pytest.mark.skipif(not in_use(lark.__version__), reason="the tables were made by another version of lark")
def test_the_kept_tables_are_those_of_the_grammar_to_the_byte() -> None:
    assert tables.tables_of(RULES) == KEPT, "run `python -m grammar.tables`"


@pytest.mark.skipif(not in_use(lark.__version__), reason="the tables were made by another version of lark")
def test_nothing_is_made_where_the_tables_fit(made: list[str]) -> None:
    tables.parser()
    assert not made


def test_a_changed_grammar_is_made_anew(made: list[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    changed = RULES.replace('"purpose" STRING', '"purpose" STRING STRING')
    monkeypatch.setattr(tables, "GRAMMAR", tmp_path / "changed.lark")
    tables.GRAMMAR.write_text(changed, "utf-8")
    tables.parser()
    assert made == [changed]


def test_another_lark_makes_its_own(made: list[str], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(lark, "__version__", "0.0")
    tables.parser()
    assert made == [RULES]


@pytest.mark.parametrize("content", [None, "", "{"])
def test_without_whole_tables_the_parser_is_made(
    content: str | None, made: list[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(tables, "TABLES", tmp_path / "tables.json")
    if content is not None:
        tables.TABLES.write_text(content, "ascii")
    tables.parser()
    assert made == [RULES]


def test_texts_read_the_same_by_kept_tables_and_by_made_ones(made: list[str], monkeypatch: pytest.MonkeyPatch) -> None:
    root = Path(__file__).resolve().parents[2]
    files = [*sorted(root.glob("circuits/*.rect")), *sorted(root.glob("tests/mistakes/cases/*.case"))]
    texts = [file.read_text("utf-8", errors="replace") for file in files]
    assert len(texts) > 100
    reader._grammar.cache_clear()
    by_kept = [reader.read_text(text, "text") for text in texts]
    monkeypatch.setattr(tables, "TABLES", root / "none")
    reader._grammar.cache_clear()
    by_made = [reader.read_text(text, "text") for text in texts]
    reader._grammar.cache_clear()
    assert made and by_kept == by_made
