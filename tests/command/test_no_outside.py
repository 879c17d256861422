"""What a run takes nothing from: a network, and the clock on the wall, which may jump."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import simcore

ROOT = Path(simcore.__file__).parent.parent
CHILD = """
import itertools, os, sys, time
import simcore.report.session
def heard(event, arguments):
    if event.startswith("socket.") or event == "urllib.Request":
        raise SystemExit(f"asked for the network: {event}")
sys.addaudithook(heard)
jumps = itertools.cycle([2e9, 0.0, 4e9, 1e9])
if "PLAIN" not in os.environ:
    time.time = lambda: next(jumps)
from simcore.command import main
sys.exit(main(sys.argv[1:]))
"""
SWEEP = "\nsweep few: 2 samples of V_sec, seed = 2, studies = [light_load]\n"


def child(folder: Path, program: str, *arguments: str, plain: bool = False) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-c", program, *arguments]
    environment = {**os.environ, "PYTHONPATH": str(ROOT)} | ({"PLAIN": "1"} if plain else {})
    return subprocess.run(command, cwd=folder, env=environment, capture_output=True, text=True, timeout=120, check=False)


SWEEPS = pytest.param("sweep bench.rect --sweep few --workers 1", marks=pytest.mark.nightly)


@pytest.mark.parametrize("arguments", ["run bench.rect --page page.html", SWEEPS])
def test_neither_a_network_nor_the_time(arguments: str, tmp_path: Path) -> None:
    """The same files whether the clock stands where it should or jumps to and fro by decades; nothing is sent for."""
    text = (simcore.library_folder() / "bench_supply.rect").read_text("utf-8")
    (tmp_path / "bench.rect").write_text(text + SWEEP)
    files = []
    for plain in (True, False):
        done = child(tmp_path, CHILD, *arguments.split(), "--out", "out", plain=plain)
        assert done.returncode in (0, 1) and done.stderr == "", done.stderr
        files.append({path.name: path.read_bytes() for path in (tmp_path / "out").iterdir()})
    assert files[0] and files[0] == files[1]


@pytest.mark.parametrize("asks", ["socket.getaddrinfo('localhost', 80)", "socket.socket()"])
def test_asking_for_a_network_would_be_heard(asks: str, tmp_path: Path) -> None:
    done = child(tmp_path, CHILD.partition("from simcore.command")[0] + f"import socket; {asks}")
    assert done.returncode == 1 and done.stderr.startswith("asked for the network")
