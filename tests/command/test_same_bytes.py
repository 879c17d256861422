"""The same text on the same machine gives the same bytes, whatever the surroundings of the process say."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import simcore

ROOT = Path(simcore.__file__).parent.parent
PLAIN = {"PYTHONHASHSEED": "0", "LC_ALL": "C", "TZ": "UTC", "OPENBLAS_NUM_THREADS": "1"}
SURROUNDINGS = {
    "hash seed": {"PYTHONHASHSEED": "12345"},
    "locale of the machine": {"LC_ALL": "C.UTF-8"},
    "locale with decimal commas": {"LC_ALL": "de_DE.UTF-8", "LANG": "de_DE.UTF-8"},
    "time zone": {"TZ": "Asia/Kathmandu"},
    "threads": {"OPENBLAS_NUM_THREADS": "4", "OMP_NUM_THREADS": "4"},
}
"""A locale that the machine lacks falls back to the plain one: then that line says nothing more."""
SWEEP = "\nsweep few: 6 samples of V_sec, seed = 2, studies = [light_load]\n"


def written(folder: Path, surroundings: dict[str, str], workers: int) -> dict[str, bytes]:
    """All that run and sweep write of a worked circuit."""
    text = (simcore.library_folder() / "bench_supply.rect").read_text("utf-8")
    folder.mkdir(parents=True)
    (folder / "bench.rect").write_text(text + SWEEP)
    environment = {**os.environ, **PLAIN, **surroundings, "PYTHONPATH": str(ROOT)}
    for arguments in (["run", "bench.rect", "--quiet"], ["sweep", "bench.rect", "--sweep", "few", "--workers", str(workers)]):
        command = [sys.executable, "-m", "simcore.command", *arguments, "--out", "out"]
        done = subprocess.run(command, cwd=folder, env=environment, capture_output=True, timeout=120, check=False)
        assert done.returncode in (0, 1), done.stderr
    files = {path.name: path.read_bytes() for path in sorted((folder / "out").iterdir())}
    assert {path.suffix for path in (folder / "out").iterdir()} == {".csv", ".json"} and len(files) > 6
    return files


@pytest.fixture(scope="module")
def plain(tmp_path_factory: pytest.TempPathFactory) -> dict[str, bytes]:
    return written(tmp_path_factory.mktemp("same") / "plain", {}, 1)


@pytest.mark.parametrize("what", SURROUNDINGS)
def test_surroundings_and_workers_change_no_byte(what: str, plain: dict[str, bytes], tmp_path: Path) -> None:
    found = written(tmp_path / "other", SURROUNDINGS[what], 3 if what == "hash seed" else 2)
    assert found.keys() == plain.keys()
    assert [name for name in plain if found[name] != plain[name]] == []
