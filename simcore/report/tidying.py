"""A call of `tidy`: description files put in canonical order and layout, where they lie.

All mistakes of all files are said before anything is written, and then nothing is.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

from grammar.layout import tidy
from grammar.mistakes import Mistake, render
from grammar.reader import read_file
from simcore.judge.outcome import Outcome
from simcore.report.writing import whole_file

Say = Callable[[str], None]


def tidy_files(files: Sequence[str], say: Say, complain: Say) -> Outcome:
    """Tidy each file; say is for people, complain for mistakes. A link is followed to the file that it names."""
    found: dict[str, tuple[str, str]] = {}
    mistakes: list[Mistake] = []
    for file in files:
        text, wrong = read_file(file)
        result = None
        if text is not None:
            result, wrong = tidy(text, file)
        mistakes += wrong
        if text is not None and result is not None:
            found[file] = text, result.replace("\n", "\r\n") if "\r\n" in text else result
    if not mistakes:
        mistakes += _written(found, say)
    if mistakes:
        complain(render(mistakes).rstrip("\n"))
        return Outcome.INPUT_WRONG
    return Outcome.ALL_HOLD


def _written(found: dict[str, tuple[str, str]], say: Say) -> list[Mistake]:
    """Write what changed; what is wrong with a file that can't be written ends it."""
    for file, (text, result) in found.items():
        if result == text:
            say(f"{file}: tidy already")
            continue
        try:
            with whole_file(Path(file).resolve()) as target:
                target.write(result)
        except OSError as error:
            cure = "See to the rights of the file and its folder; it is as it was."
            return [Mistake(f"it can't be written: {error.strerror}", cure, file=file)]
        say(f"{file}: tidied")
    return []
