"""Figures kept beside a design: the file, and what counts as drift."""

import math
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from simcore.report.baseline import Kept, KeptFileError, compared, kept_path, read_kept, write_kept

FIGURES = {
    ("s", "u, the output", "mean"): Kept(12.5, "V", 1e-3),
    ("s", 'i "line"', "rms"): Kept(0.1 + 0.2, "A", 2e-17),
    ("s", "u", "ripple_factor"): Kept(math.nan, "", 0.0),
    ("t", "u", "time_until_below"): Kept(math.inf, "s", 0.0),
}


def test_what_is_written_is_read_back(tmp_path: Path) -> None:
    path = kept_path(tmp_path / "my.bench.rect")
    assert path.name == "my.bench.kept.csv"
    write_kept(path, FIGURES)
    found = read_kept(path)
    assert list(found) == list(FIGURES)
    assert compared(FIGURES, found) == ([], [], [])
    assert found["s", 'i "line"', "rms"] == FIGURES["s", 'i "line"', "rms"]


@pytest.mark.parametrize(
    ("now", "same"),
    [
        (Kept(12.502, "V", 1.1e-3), True),
        (Kept(12.502, "V", 0.9e-3), False),
        (Kept(12.5, "mV", 1.0), False),
        (Kept(math.nan, "V", 0.0), False),
        (Kept(math.inf, "V", 0.0), False),
    ],
)
def test_drift_is_what_both_bounds_leave_no_room_for(now: Kept, same: bool) -> None:
    key = ("s", "u", "mean")
    drifted, missing, new = compared({key: Kept(12.5, "V", 1e-3)}, {key: now})
    assert not missing and not new and bool(drifted) is not same


@given(st.floats(-1e6, 1e6), st.floats(0.0, 10.0), st.floats(0.0, 10.0), st.floats(-1.0, 1.0))
def test_drift_is_symmetrical(value: float, bound: float, other: float, share: float) -> None:
    key = ("s", "u", "mean")
    one, two = Kept(value, "V", bound), Kept(value + 3.0 * share * (bound + other), "V", other)
    assert bool(compared({key: one}, {key: two})[0]) == bool(compared({key: two}, {key: one})[0])


def test_missing_and_new_figures_are_told_apart() -> None:
    a, b = ("s", "a", "mean"), ("s", "b", "mean")
    kept = Kept(1.0, "V", 0.1)
    drifted, missing, new = compared({a: kept}, {b: kept})
    assert not drifted and [each.key for each in missing] == [a] and [each.key for each in new] == [b]


@pytest.mark.parametrize(
    ("content", "why"),
    [
        (None, "no figures are kept"),
        (b"value\n", "line 1"),
        (b"study,subject,figure,value,unit,bound\na,b\n", "line 2"),
        (b"study,subject,figure,value,unit,bound\ns,u,mean,x,V,0\n", "line 2"),
        (b"\xff\xfe", "can't be read"),
    ],
)
def test_a_kept_file_with_a_fault_says_so(tmp_path: Path, content: bytes | None, why: str) -> None:
    path = tmp_path / "d.kept.csv"
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(KeptFileError, match=why):
        read_kept(path)
