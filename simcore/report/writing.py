"""Files written whole or not at all: a temporary name beside the target, forced to disk, then renamed.

Knows nothing of what is written.
"""

from __future__ import annotations

import os
import tempfile
from collections.abc import Callable, Iterator, Sequence
from contextlib import AbstractContextManager, contextmanager, suppress
from pathlib import Path
from typing import TextIO


def why_unwritable(folder: Path) -> str:
    """Why files can't go to a folder that may have to be made first, "" where nothing is known against it."""
    nearest = next((place for place in (folder, *folder.absolute().parents) if place.exists()), Path())
    if not nearest.is_dir():
        return f"{nearest} is no folder"
    return "" if os.access(nearest, os.W_OK | os.X_OK) else f"there is no right to write to {nearest}"


@contextmanager
def whole_file(path: Path) -> Iterator[TextIO]:
    """A UTF-8 text file that appears under its name, complete, when the block ends; line ends are written as given.

    Whatever stops the block leaves an earlier file of that name as it was, and no part of the new one. What takes the
    place of another file has its rights.
    """
    with together() as opened, opened(path) as file:
        yield file


Opened = Callable[[Path], AbstractContextManager[TextIO]]


@contextmanager
def together() -> Iterator[Opened]:
    """Opens whole files that take their names one right after the other when the block ends, in the order in which they
    were finished: whatever stops it before, a full disk too, none of them has changed."""
    finished: list[tuple[str, Path]] = []

    @contextmanager
    def opened(path: Path) -> Iterator[TextIO]:
        with _part(path) as (handle, temporary), open(handle, "w", encoding="utf-8", newline="") as file:
            yield file
            file.flush()
            os.fsync(file.fileno())
        finished.append((temporary, path))

    try:
        yield opened
        _name(finished)
    except BaseException:
        for temporary, _ in finished:
            with suppress(FileNotFoundError):
                os.unlink(temporary)
        raise


def whole_bytes(path: Path, content: bytes) -> None:
    """The same for a file that is no text, such as a picture."""
    with _part(path) as (handle, temporary), open(handle, "wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())
        _name([(temporary, path)])


@contextmanager
def _part(path: Path) -> Iterator[tuple[int, str]]:
    """The handle and name of a temporary file beside the target, with its rights; it goes where the block fails."""
    path.parent.mkdir(parents=True, exist_ok=True)
    handle, temporary = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=path.parent)
    try:
        os.chmod(temporary, path.stat().st_mode & 0o777 if path.exists() else 0o666 & ~_umask())
        yield handle, temporary
    except BaseException:
        with suppress(FileNotFoundError):
            os.unlink(temporary)
        raise


def _name(finished: Sequence[tuple[str, Path]]) -> None:
    """Give finished files their names, and force the names to disk."""
    for temporary, path in finished:
        os.replace(temporary, path)
    for folder in dict.fromkeys(path.parent for _, path in finished):
        _force_folder(folder)


def _umask() -> int:
    """The mask for new files; it can only be read by setting it."""
    mask = os.umask(0)
    os.umask(mask)
    return mask


def _force_folder(folder: Path) -> None:
    """Force the new name to disk, where the system lets a folder be opened."""
    try:
        handle = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def append_forced(path: Path, text: str) -> None:
    """Put text at the end of a file, on disk when this returns. An interruption may leave the beginning of it."""
    with open(path, "a", encoding="utf-8", newline="") as file:
        file.write(text)
        file.flush()
        os.fsync(file.fileno())
