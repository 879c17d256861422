"""Machine code that is kept: found again, never trusted where others can write, and done without where it is damaged."""

from __future__ import annotations

import os
import time
from pathlib import Path

import numpy as np
import pytest

from simcore.equations import kept_code
from simcore.equations.compiled import LINES_AT_MOST, SECONDS_A_LINE, SECONDS_KEPT, CompiledRun, available, seconds_for
from simcore.equations.run_interface import CONTROLS

SOURCE = "def run(p, s, out, c):\n    out[0] = p[0] * s[0] + exp(c[0])\n    s[0] = s[0] + 1.0\n    return 1, 2.5\n"


@pytest.fixture
def caches(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder of caches of a user's own."""
    tmp_path.chmod(0o700)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    if not hasattr(os, "getuid") or kept_code.folder() is None:
        pytest.skip("no folder here is this user's alone")
    return tmp_path / "bulkrail"


def results() -> tuple:
    out, saved = np.zeros(1), [3.0]
    controls = tuple(0.5 for _ in CONTROLS)
    found = CompiledRun(SOURCE, False)([2.0], saved, out, controls)
    return found, out.tolist(), saved


needs_numba = pytest.mark.skipif(not available(), reason="the extra `fast` is not installed")


@needs_numba
def test_it_is_compiled_once_and_found_again(caches: Path) -> None:
    assert 4 * SECONDS_A_LINE < seconds_for(SOURCE) < 0.1
    first = results()
    kept = sorted(caches.rglob("*.nb?"))
    assert len(kept) == 2 and first == ((1, 2.5), [6.0 + np.exp(0.5)], [4.0])
    assert seconds_for(SOURCE) == SECONDS_KEPT
    written = [path.stat().st_mtime_ns for path in kept]
    assert results() == first and sorted(caches.rglob("*.nb?")) == kept
    assert [path.stat().st_mtime_ns for path in kept] == written, "it was read, and not made again"
    assert seconds_for(SOURCE.replace("2.5", "2.0")) != SECONDS_KEPT, "another source is another run"


    kept[0].write_bytes(kept[0].read_bytes()[:100])
    assert results() == first, "what is damaged is made again"


@needs_numba
def test_without_a_folder_it_is_compiled_all_the_same(caches: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (caches / "no_folder").write_text("")
    monkeypatch.setenv("XDG_CACHE_HOME", str(caches / "no_folder"))
    assert kept_code.folder() is None and results()[1] == [6.0 + np.exp(0.5)] and not list(caches.rglob("*.nb?"))


@pytest.mark.parametrize("place", ["bulkrail", "."])
def test_a_folder_that_others_can_write_to_is_not_used(place: str, caches: Path) -> None:
    """Or in whose place they can put another."""
    assert kept_code.folder() == caches.resolve()
    (caches.parent / place).chmod(0o777)
    assert kept_code.folder() is None and not kept_code.is_kept("run_x") and kept_code.place_for("run_x", "") is None


def test_what_is_too_long_is_never_worth_compiling() -> None:
    """A source that takes minutes and a gigabyte; up to there, the time grows faster than the lines."""
    assert seconds_for(SOURCE * LINES_AT_MOST) == float("inf")
    assert seconds_for("pass\n" * 2000) > 4.0 * seconds_for("pass\n" * 700)


def test_the_oldest_go_first(caches: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(kept_code, "MOST_KEPT", 3)
    for age, name in enumerate(["run_a", "run_b", "run_c", "run_d", "run_e"]):
        path = kept_code.place_for(name, "pass")
        assert path is not None
        os.utime(path, (time.time() - 100.0 + age,) * 2)
    assert sorted(path.stem for path in caches.glob("*.py")) == ["run_c", "run_d", "run_e"]
    assert kept_code.place_for("run_e", "pass") and len(list(caches.iterdir())) == 3
