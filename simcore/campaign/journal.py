"""The journal of a sweep: each finished block forced to disk, so that an interrupted sweep goes on where it stopped.

A text file of lines, each with a checksum of its own. The first line says which sweep of which design it belongs to;
every other is a block: first variant, the one after the last, and the rows. A last line that was cut short is what an
interruption leaves, and counts as not written. A block whose line was damaged since is left out, those that check are
kept; a first line that does not check, or a line that checks and makes no sense, is a mistake.
"""

from __future__ import annotations

import zlib
from dataclasses import dataclass
from pathlib import Path

from grammar.mistakes import DescriptionError, Mistake
from simcore.campaign.workers import Block
from simcore.report.writing import append_forced, whole_file

_TITLE = "bulkrail sweep journal 1"


@dataclass(frozen=True)
class Journal:
    """The journal of a sweep at a path; fingerprint: of all that its results depend on."""

    path: Path
    fingerprint: str

    def begin(self) -> None:
        """Start afresh."""
        with whole_file(self.path) as file:
            file.write(_checked(self._head()))

    def add(self, block: Block, line: str) -> None:
        """Put a finished block on disk."""
        append_forced(self.path, _checked(f"{block[0]} {block[1]} {line}"))

    def resumed(self) -> dict[Block, str]:
        """The blocks of an earlier run of the same sweep; the journal is then ready to be added to.

        Raises DescriptionError where it is not a journal of this sweep, or is damaged.
        """
        lines, _ = self._lines()
        blocks: dict[Block, str] = {}
        for number, line in enumerate(lines[1:], 2):
            try:
                first, last, rows = line.split(" ", 2)
                block = int(first), int(last)
            except ValueError as fault:
                raise self._wrong(f"line {number} holds no block of variants") from fault
            if block in blocks:
                raise self._wrong(f"line {number} holds a block that was there before")
            blocks[block] = rows
        with whole_file(self.path) as file:
            file.writelines(_checked(line) for line in lines)
        return blocks

    def left_by(self) -> int:
        """Blocks in a journal that an earlier run of this same sweep left; 0 where there is none."""
        try:
            return len(self._lines()[0]) - 1
        except DescriptionError:
            return 0

    def damaged(self) -> int:
        """Lines of blocks that are no longer as they were written; 0 where there is no journal of this sweep."""
        try:
            return self._lines()[1]
        except DescriptionError:
            return 0

    def end(self) -> None:
        """Take the journal away: its rows are in the table."""
        self.path.unlink(missing_ok=True)

    def _head(self) -> str:
        return f"{_TITLE} {self.fingerprint}"

    def _lines(self) -> tuple[list[str], int]:
        """The lines that are as they were written, and how many are not."""
        try:
            pieces = self.path.read_bytes().split(b"\n")
        except FileNotFoundError:
            cure = "Run it without --resume, or name the folder of the interrupted run with --out."
            raise DescriptionError([Mistake("no interrupted sweep is here", cure, file=str(self.path))]) from None
        except OSError as fault:
            raise self._wrong("it can't be read") from fault
        found = []
        for piece in pieces[:-1]:
            check, _, line = piece.decode("utf-8", "replace").partition(" ")
            if check == _check(line):
                found.append(line)
            elif not found:
                raise self._wrong("line 1 is not as it was written")
        if not found or not found[0].startswith(_TITLE):
            raise self._wrong("this is no journal of a sweep")
        if found[0] != self._head():
            what = "the journal belongs to another description, sweep or version of the tool"
            cure = "Run the sweep without --resume; its journal then starts afresh."
            raise DescriptionError([Mistake(what, cure, file=str(self.path))])
        return found, len(pieces) - 1 - len(found)

    def _wrong(self, what: str) -> DescriptionError:
        cure = "Delete the journal and run the sweep without --resume."
        return DescriptionError([Mistake(f"the journal is damaged: {what}", cure, file=str(self.path))])


def _check(line: str) -> str:
    return f"{zlib.crc32(line.encode()):08x}"


def _checked(line: str) -> str:
    return f"{_check(line)} {line}\n"
