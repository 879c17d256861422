"""Disks that are really full or may only be read: mounted in a name space of their own, where the system allows that."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest
from plain_design import GOOD

import simcore

ROOT = Path(simcore.__file__).parent.parent
TOOL = f'"{sys.executable}" -m simcore.command'
VERBS = {
    "run": "run good.rect --out out",
    "keep": "keep good.rect",
    "sweep": "sweep good.rect --out out --workers 1",
    "tidy": "tidy good.rect",
}


def in_own_mounts(folder: Path, script: str) -> subprocess.CompletedProcess[str]:
    """A shell script, in a folder, that may mount what nobody else sees."""
    command = ["unshare", "--map-root-user", "--mount", "bash", "-c", script]
    environment = {**os.environ, "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1"}
    return subprocess.run(command, cwd=folder, env=environment, capture_output=True, text=True, timeout=120, check=False)


@pytest.fixture
def disk(tmp_path: Path) -> Path:
    """A folder with a good description, and one beside it to mount on."""
    (tmp_path / "good.rect").write_text(GOOD)
    (tmp_path / "disk").mkdir()
    try:
        tried = in_own_mounts(tmp_path, "mount -t tmpfs -o size=64k tmpfs disk")
    except OSError:
        pytest.skip("there is no unshare here")
    if tried.returncode:
        pytest.skip(f"nothing can be mounted here: {tried.stderr.strip()}")
    return tmp_path


NIGHTLY = [pytest.param(verb, "0", marks=pytest.mark.nightly) for verb in ("keep", "sweep", "tidy")]


@pytest.mark.parametrize(("verb", "room"), [("run", "8K"), *NIGHTLY])
def test_a_full_disk_is_a_message_and_leaves_no_part(verb: str, room: str, disk: Path) -> None:
    """With room for the beginning of what is written, or with none; once there is room, the same command ends well."""
    done = in_own_mounts(
        disk,
        f"""
        mount -t tmpfs -o size=256k tmpfs disk && cp good.rect disk && cd disk || exit 9
        head -c 1M /dev/zero > filler 2> /dev/null
        truncate -s -{room} filler
        {TOOL} {VERBS[verb]}; echo "status $?"
        rm filler
        echo "files" $(find . -type f)
        cmp good.rect ../good.rect && echo same
        {TOOL} {VERBS[verb]} > /dev/null; echo "then $?"
        """,
    )
    assert "status 2" in done.stdout and "No space left on device" in done.stderr and "cure:" in done.stderr
    assert "files ./good.rect\nsame\n" in done.stdout and "then 0" in done.stdout and "Traceback" not in done.stderr


@pytest.mark.parametrize("verb", ["run", pytest.param("keep", marks=pytest.mark.nightly), "tidy"])
def test_a_disk_that_may_only_be_read_is_a_message(verb: str, disk: Path) -> None:
    done = in_own_mounts(
        disk,
        f"mount -t tmpfs tmpfs disk && cp good.rect disk && mount -o remount,ro disk && cd disk && {TOOL} {VERBS[verb]}",
    )
    assert done.returncode == 2 and done.stdout == "" and "cure:" in done.stderr and "Traceback" not in done.stderr
