"""What is shown fits the terminal, and colours only where they are wanted."""

import sys

import pytest

from simcore.judge.outcome import State
from simcore.report import screen
from simcore.report.screen import Screen
from simcore.report.tables import table

ROWS = [["holds", "a requirement of many words, to be broken", "12.5 V", "1 mV"], ["fails", "short", "3 V", "2 mV"]]
HEADINGS = ["verdict", "requirement", "found", "margin"]


def test_a_table_without_width_is_as_wide_as_it_is() -> None:
    assert len(table(HEADINGS, ROWS, 2)) == 4


@pytest.mark.parametrize("width", [46, 50, 60, 75])
def test_a_table_fits_the_width_and_loses_nothing(width: int) -> None:
    lines = table(HEADINGS, ROWS, 2, width)
    assert all(len(line) <= width for line in lines)
    words = " ".join(lines).split()
    for row in (HEADINGS, *ROWS):
        for cell in row:
            assert set(cell.split()) <= set(words)


def test_columns_that_do_not_fit_follow_below() -> None:
    rows = [["D1", *(f"{column}.{column} V" for column in range(6))]]
    lines = table(["diode", *(f"column {column}" for column in range(6))], rows, 1, 40)
    assert all(len(line) <= 40 for line in lines)
    assert sum(line.strip().startswith("D1") for line in lines) >= 2 and "" in lines


def test_lines_are_broken_at_spaces_and_set_in() -> None:
    line = "  " + "word " * 30
    fitted = Screen(40).fitted([line.rstrip(), "short"])
    assert all(len(each) <= 40 for each in fitted) and fitted[-1] == "short"
    assert fitted[0].startswith("  word") and fitted[1].startswith("    word")
    assert " ".join(fitted[:-1]).split() == line.split()
    assert Screen().fitted([line]) == [line]


def test_only_the_verdict_is_coloured() -> None:
    lines = [f"  {state}   study   holds" for state in State] + ["holds nothing", "upholds", "  other   holds"]
    painted = Screen(80, True).painted(lines)
    for state, line in zip(State, painted, strict=False):
        assert line.startswith("  \x1b[") and f"m{state}\x1b[0m   study" in line and line.count("\x1b") == 2
    assert painted[-2:] == lines[-2:]
    assert Screen(80).painted(lines) == lines


class Terminal:
    """Standard output that says it is a terminal."""

    def __init__(self, is_one: bool):
        self.is_one = is_one

    def isatty(self) -> bool:
        return self.is_one


@pytest.mark.parametrize(
    ("is_one", "settings", "expected"),
    [
        (False, {"COLUMNS": "60"}, Screen(None, False)),
        (True, {"COLUMNS": "60"}, Screen(60, True)),
        (True, {"COLUMNS": "60", "NO_COLOR": "1"}, Screen(60, False)),
        (True, {"COLUMNS": "60", "NO_COLOR": ""}, Screen(60, True)),
        (True, {"COLUMNS": "60", "TERM": "dumb"}, Screen(60, False)),
        (True, {"COLUMNS": "3"}, Screen(screen.NARROWEST, True)),
    ],
)
def test_the_present_screen(
    monkeypatch: pytest.MonkeyPatch, is_one: bool, settings: dict[str, str], expected: Screen
) -> None:
    for name in ("COLUMNS", "NO_COLOR"):
        monkeypatch.delenv(name, raising=False)
    monkeypatch.setenv("TERM", "xterm")
    for name, value in settings.items():
        monkeypatch.setenv(name, value)
    monkeypatch.setattr(sys, "stdout", Terminal(is_one))
    found = screen.present_screen()
    monkeypatch.undo()
    assert found == expected
