"""Files appear whole or not at all."""

from __future__ import annotations

from pathlib import Path

import pytest

from simcore.report.writing import together, whole_file


def test_a_finished_file_has_its_text_and_nothing_lies_beside_it(tmp_path: Path) -> None:
    target = tmp_path / "new" / "figures.csv"
    with whole_file(target) as file:
        file.write("a,b\r\n")
        assert not target.exists()
    assert target.read_bytes() == b"a,b\r\n"
    assert list(target.parent.iterdir()) == [target]


@pytest.mark.parametrize("stop", [RuntimeError, KeyboardInterrupt])
def test_an_interrupted_file_leaves_the_old_one_and_no_part(tmp_path: Path, stop: type[BaseException]) -> None:
    target = tmp_path / "figures.csv"
    target.write_text("old")
    with pytest.raises(stop), whole_file(target) as file:
        file.write("half of the new")
        raise stop
    assert target.read_text() == "old"
    assert list(tmp_path.iterdir()) == [target]


def test_a_file_that_cannot_take_its_name_leaves_no_part(tmp_path: Path) -> None:
    target = tmp_path / "figures.csv"
    target.mkdir()
    with pytest.raises(OSError, match="figures.csv"), whole_file(target) as file:
        file.write("text")
    assert list(tmp_path.iterdir()) == [target]


def test_a_new_file_can_be_read_by_whom_the_system_lets(tmp_path: Path) -> None:
    plain, ours = tmp_path / "plain", tmp_path / "ours"
    plain.write_text("")
    with whole_file(ours) as file:
        file.write("")
    assert ours.stat().st_mode == plain.stat().st_mode


@pytest.mark.parametrize("stop", [OSError, KeyboardInterrupt])
def test_files_written_together_take_their_names_together(tmp_path: Path, stop: type[BaseException]) -> None:
    """What stops the second leaves the first as it was; nothing has a new name before all are whole."""
    first, second = tmp_path / "figures.csv", tmp_path / "summary.json"
    first.write_text("old")
    with pytest.raises(stop), together() as opened:
        with opened(first) as file:
            file.write("new")
        assert first.read_text() == "old"
        with opened(second) as file:
            raise stop
    assert first.read_text() == "old" and list(tmp_path.iterdir()) == [first]
    with together() as opened:
        for path in (first, second):
            with opened(path) as file:
                file.write("new")
    assert [path.read_text() for path in (first, second)] == ["new", "new"]
    assert sorted(tmp_path.iterdir()) == [first, second]
