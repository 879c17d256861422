"""Where the machine code of emitted runs is kept from one call to the next: a folder of this user's own.

Code is read from it and run, so it counts only where nobody else can write to it. It knows files and no circuits.
"""

from __future__ import annotations

import hashlib
import os
import stat
from contextlib import suppress
from importlib.metadata import version
from pathlib import Path

MOST_KEPT = 200
"""Runs that are kept, some 0.7 MB each; the oldest go first."""


def folder() -> Path | None:
    """The folder, in that of the user's caches and made where it is missing; None where there is none to be trusted."""
    if not hasattr(os, "getuid"):
        return None
    with suppress(OSError, RuntimeError):
        base = Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")
        found = (base / "bulkrail").resolve()
        found.mkdir(mode=0o700, parents=True, exist_ok=True)
        if all(map(_ours, (found, *found.parents))):
            return found
    return None


def _ours(place: Path) -> bool:
    """Whether nobody but this user and the system's can put anything into a folder, or another in its place."""
    known = place.stat()
    others_write = known.st_mode & (stat.S_IWGRP | stat.S_IWOTH) and not known.st_mode & stat.S_ISVTX
    return known.st_uid in (0, os.getuid()) and not others_write


def name_of(*texts: str) -> str:
    """What a run is kept as: told by all that its machine code comes from."""
    digest = hashlib.sha256("\0".join((version("numba"), *texts)).encode())
    return f"run_{digest.hexdigest()[:32]}"


def is_kept(name: str) -> bool:
    """Whether the machine code of a run is there."""
    place = folder()
    return place is not None and any((place / "__pycache__").glob(f"{name}.*.nbc"))


def place_for(name: str, source: str) -> str | None:
    """The path of a source beside which its machine code is kept, once the oldest were taken away; None for nowhere."""
    place = folder()
    if place is None:
        return None
    path = place / f"{name}.py"
    with suppress(OSError):
        if not path.exists():
            _make_room(place)
            whole = path.with_suffix(f".{os.getpid()}")
            whole.write_text(source, encoding="utf-8")
            whole.replace(path)
        return str(path)
    return None


def forget(name: str) -> None:
    """Take a run away that could not be read."""
    place = folder()
    if place is not None:
        for path in (place / f"{name}.py", *(place / "__pycache__").glob(f"{name}.*")):
            with suppress(OSError):
                path.unlink()


def _make_room(place: Path) -> None:
    kept = sorted(place.glob("run_*.py"), key=lambda path: path.stat().st_mtime)
    for path in kept[: len(kept) - MOST_KEPT + 1] if len(kept) >= MOST_KEPT else []:
        forget(path.stem)
