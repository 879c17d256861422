"""Bad descriptions and the messages they get, to the letter.

A case file is the text as a user wrote it, a marker line, and what is printed. To see what a changed message looks like, run
`python tests/mistakes/test_mistakes.py`: it prints every case whose output differs.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from grammar.mistakes import render
from simcore.design.elaborate import elaborate
from simcore.design.files import load_text

FOLDER = Path(__file__).with_name("cases")
MARKER = "==== messages ====\n"
CASES = sorted(FOLDER.glob("*.case"))


def messages(text: str) -> str:
    """What the command prints for a description, read and understood like a file of its own."""
    project, mistakes = load_text(text, "design.rect")
    return render(mistakes + elaborate(project)[1])


def parts(case: Path) -> tuple[str, str]:
    """The text and the expected messages of a case."""
    text, _, expected = case.read_bytes().decode("utf-8").partition(MARKER)
    return text, expected


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.stem)
def test_message(case: Path) -> None:
    text, expected = parts(case)
    assert expected, "a case holds the messages it expects"
    assert messages(text) == expected


def test_there_are_enough_cases() -> None:
    assert len(CASES) >= 60


def test_every_message_says_where_what_and_the_cure() -> None:
    for case in CASES:
        blocks = parts(case)[1].strip("\n").split("\n\n")
        assert blocks, case.stem
        for block in blocks:
            assert block.startswith("design.rect:"), case.stem
            assert "cure: " in block, case.stem


if __name__ == "__main__":
    for path in CASES:
        written, wanted = parts(path)
        if messages(written) != wanted:
            print(f"---- {path.name}\n{messages(written)}")
