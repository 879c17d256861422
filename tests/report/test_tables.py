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
