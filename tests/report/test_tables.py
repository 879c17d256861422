"""Tables line up."""

from __future__ import annotations

import pytest

from simcore.report.tables import table


def test_text_stands_left_and_numbers_right() -> None:
    lines = table(["diode", "mean"], [["D1", "1.2 A"], ["valve", "230 mA"]])
    assert lines == [
        "  diode     mean",
        "  --------------",
        "  D1       1.2 A",
        "  valve   230 mA",
    ]


def test_a_short_row_is_refused() -> None:
    with pytest.raises(ValueError, match="as many cells"):
        table(["a", "b"], [["only one"]])


WIDE = [["holds", "full", "ripple", "1 V"], ["fails", "light", "mean", "2 V"], ["holds", "full", "mean", "3 V"]]


def test_a_column_stands_over_the_rows_that_share_it_where_that_spares_a_block() -> None:
    headings = ["verdict", "study", "figure", "found"]
    assert table(headings, WIDE, 3, 80, 1) == table(headings, WIDE, 3)
    assert table(headings, WIDE, 3, 30, 1) == [
        "  verdict   figure   found",
        "  ------------------------",
        "  full:",
        "  holds     ripple     1 V",
        "  holds     mean       3 V",
        "  light:",
        "  fails     mean       2 V",
    ]


def test_where_it_spares_none_the_column_stays() -> None:
    headings = ["verdict", "study", "figure", "found", "as much again", "and once more"]
    rows = [[*row, "1", "2"] for row in WIDE]
    assert table(headings, rows, 3, 20, 1) == table(headings, rows, 3, 20)
