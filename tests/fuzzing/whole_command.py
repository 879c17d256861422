"""The whole command on any bytes: how it must end, whatever they are."""

from __future__ import annotations

import contextlib
import io
import os
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

from simcore.command import main
from simcore.solve import engine

STATUSES = {0, 1, 2, 3}
STEERING = re.compile(r"[\x00-\x08\x0b-\x1f\x7f-\x9f\u202a-\u202e]")
WORK = 2e4
"""Work that all studies of a text may take here: what is looked for is a break, not a solution."""


@contextlib.contextmanager
def bounded() -> Iterator[None]:
    """Solve little, so that many texts can be tried."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(engine, "_WORK_AT_MOST", WORK)
        patch.setattr("simcore.pipeline.WORK_OF_ALL", 3.0 * WORK)
        yield


def ends(content: bytes, folder: Path, *arguments: str) -> int:
    """The exit status of a verb on a file of these bytes in a folder; asserts that it tells what it must.

    Mistakes have a cure and leave nothing written; no byte of the file steers a terminal.
    """
    (folder / "x.rect").write_bytes(content)
    before = sorted(folder.rglob("*"))
    out, err = io.StringIO(), io.StringIO()
    here = Path.cwd()
    os.chdir(folder)
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            status = main([*(arguments or ("run",)), "x.rect"])
    finally:
        os.chdir(here)
    said = out.getvalue() + err.getvalue()
    assert status in STATUSES and "Traceback" not in said and not STEERING.search(said)
    if status == 2:
        assert "cure:" in err.getvalue() and sorted(folder.rglob("*")) == before
    if status == 3:
        assert "cure:" in said
    return status
