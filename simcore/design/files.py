"""Finding and reading the files of a design: the one that is solved, and those it uses, directly or not.

A used file is looked for beside the file that uses it, never above the top file's folder, then in the library that
ships with the tool. Nothing here knows circuits.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from grammar.description import Block, Datasheet, Description, Use
from grammar.mistakes import Mistake
from grammar.reader import read_file, read_text

MOST_FILES = 200
DEEPEST_USE = 16
MOST_TEXT = 300_000
"""Characters in all files of a design together."""
MOST_BYTES = 10**6
"""Of a file of numbers that a description names."""


@dataclass(frozen=True, eq=False)
class Unit:
    """One file, with the files it uses in the order written.

    sheets, blocks: what may be named in it, its own and what its uses bring in, with the unit each belongs to
    """

    name: str
    description: Description
    uses: tuple[Unit, ...] = ()
    sheets: dict[str, tuple[Unit, Datasheet]] = field(default_factory=dict, repr=False)
    blocks: dict[str, tuple[Unit, Block]] = field(default_factory=dict, repr=False)


@dataclass(frozen=True, eq=False)
class Project:
    """A design as read: the top file and, through it, every file it uses.

    name: what its results are filed under; unread: words of statements that could not be read, which may name anything;
    sound: whether all texts could be read in full; found: whether every used file could be had; lost: whether nothing
    can be said of the top file beyond the mistakes in its text; folder: the top file's, None for a text that is no file
    """

    name: str
    top: Unit
    unread: frozenset[str] = frozenset()
    sound: bool = True
    found: bool = True
    lost: bool = False
    folder: Path | None = None


def library_folder() -> Path:
    """The folder of the shipped library: beside the package in a checkout, inside it once installed."""
    package = Path(__file__).resolve().parent.parent
    inside = package / "circuits"
    return inside if inside.is_dir() else package.parent / "circuits"


def load(path: str | Path) -> tuple[Project, list[Mistake]]:
    """Read a file and all it uses. The mistakes are those of the texts alone; a file that can't be read is one."""
    given = Path(path)
    text, mistakes = read_file(given)
    if text is None:
        return Project(given.stem, Unit(str(path), Description(())), sound=False, lost=True), mistakes
    loader = _Loader(given.resolve().parent)
    top = loader.unit(text, str(path), given.resolve(), [])
    return loader.project(given.stem, top, loader.folder), loader.mistakes


def load_text(text: str, name: str, folder: str | Path | None = None) -> tuple[Project, list[Mistake]]:
    """The same for a text that is no file: its uses are looked for in the folder, if one is given, and the library."""
    beside = None if folder is None else Path(folder).resolve()
    loader = _Loader(beside)
    here = None if beside is None else beside / "text"
    top = loader.unit(text, name, here, [])
    return loader.project(Path(name).stem, top, beside), loader.mistakes


def read_beside(folder: Path | None, name: str) -> str:
    """The text of a file of numbers that a description names, which lies in its folder or below.

    Raises ValueError, in words for the user, for one that lies elsewhere or is no such text; OSError where it can't be
    read.
    """
    if folder is None:
        raise ValueError("the description is no file, so nothing lies beside it")
    if Path(name).is_absolute() or "\\" in name or "\0" in name:
        raise ValueError("it is no relative path")
    found = (folder / name).resolve()
    if not found.is_relative_to(folder.resolve()):
        raise ValueError("it lies outside the folder of the description")
    if not found.is_file():
        raise ValueError("there is no such file")
    with found.open("rb") as file:
        content = file.read(MOST_BYTES + 1)
    if len(content) > MOST_BYTES:
        raise ValueError(f"it is larger than {MOST_BYTES // 10**6} MB")
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise ValueError("it is no UTF-8 text") from None


class _Loader:
    """Reads each file once, however often it is used."""

    def __init__(self, folder: Path | None):
        self.folder = folder
        self.library = library_folder().resolve()
        self.known: dict[Path, Unit] = {}
        self.mistakes: list[Mistake] = []
        self.unread: set[str] = set()
        self.found = True
        self._size = 0

    def project(self, name: str, top: Unit, folder: Path | None) -> Project:
        """The design with a top file, after all its files were read; folder: the top file's."""
        sound = not self.mistakes
        return Project(name, top, frozenset(self.unread), sound, self.found, top.description.lost, folder)

    def unit(self, text: str, name: str, path: Path | None, above: list[Path]) -> Unit:
        description, mistakes = read_text(text, name)
        self.mistakes += mistakes
        self.unread |= description.unread
        self._size += len(text)
        chain = above if path is None else [*above, path]
        used: list[tuple[Use, Unit]] = []
        for statement in description.statements:
            if isinstance(statement, Use):
                found = self._used(statement, path, chain)
                if found is not None:
                    used.append((statement, found))
                if found is None or found.description.lost:
                    self.found = False
        self.found = self.found and "use" not in description.unread
        unit = Unit(name, description, tuple(other for _, other in used))
        self._names(unit, used)
        return unit

    def _used(self, use: Use, path: Path | None, chain: list[Path]) -> Unit | None:
        found, name = self._find(use, path)
        if found is None:
            return None
        if found in chain:
            self._wrong(use, "the files use each other in a circle", "Move what both need into a third file.")
            return None
        if found not in self.known:
            if len(chain) >= DEEPEST_USE or len(self.known) >= MOST_FILES:
                cure = f"At most {MOST_FILES} files, {DEEPEST_USE} deep: put data sheets and blocks into fewer files."
                self._wrong(use, "too many files use one another", cure)
                return None
            text, mistakes = read_file(found)
            self.mistakes += [Mistake(each.what, each.cure, use.span, each.file) for each in mistakes]
            if text is None:
                return None
            if self._size + len(text) > MOST_TEXT:
                cure = f"At most {MOST_TEXT // 1000} kB in all files of a design: use files that hold less."
                self._wrong(use, "the files of the design are too large together", cure)
                return None
            self.known[found] = self.unit(text, name, found, chain)
        return self.known[found]

    def _find(self, use: Use, path: Path | None) -> tuple[Path | None, str]:
        """The real path of a used file, inside the top file's folder or the library, and the name to show for it."""
        if Path(use.path).is_absolute() or "\\" in use.path or "\0" in use.path:
            self._wrong(
                use, f'"{use.path}" is no relative path', 'Write it from this file on, as in "parts/diodes.rect".'
            )
            return None, ""
        outside = False
        for base, root in self._places(path):
            try:
                candidate = (base / use.path).resolve()
                there = candidate.is_file()
            except (OSError, RuntimeError, ValueError):  # too long a name, links in a circle, a name that can't be one
                continue
            if not there:
                continue
            if candidate.is_relative_to(root):
                return candidate, candidate.relative_to(root).as_posix()
            outside = True
        if outside:
            cure = (
                "Move the file beside the one that uses it, or below it: nothing above the top file's folder is read."
            )
            self._wrong(use, f'"{use.path}" lies outside the top file\'s folder', cure)
        else:
            cure = "It is looked for beside this file, then in the library that ships with the tool: check the path."
            self._wrong(use, f'there is no file "{use.path}"', cure)
        return None, ""

    def _places(self, path: Path | None) -> list[tuple[Path, Path]]:
        """Folders to look in, each with the folder that must not be left."""
        places = []
        if path is not None:
            inside = self.folder is not None and path.is_relative_to(self.folder)
            places.append((path.parent, self.folder if inside and self.folder is not None else self.library))
        return [*places, (self.library, self.library)]

    def _names(self, unit: Unit, used: list[tuple[Use, Unit]]) -> None:
        """Enter the unit's own data sheets and blocks and those its uses bring in; a name stands for one thing."""
        for statement in unit.description.statements:
            if isinstance(statement, Datasheet):
                unit.sheets.setdefault(statement.name, (unit, statement))
            elif isinstance(statement, Block):
                unit.blocks.setdefault(statement.name, (unit, statement))
        for use, other in used:
            for names, theirs, what in (
                (unit.sheets, other.sheets, "data sheet"),
                (unit.blocks, other.blocks, "block"),
            ):
                for name, (owner, node) in theirs.items():
                    if owner is not other:
                        continue
                    if name in names and names[name][1] is not node:
                        cure = "Rename one of the two: a name stands for one thing."
                        self._wrong(use, f"the {what} {name} of this file is named in another file too", cure)
                    names.setdefault(name, (owner, node))

    def _wrong(self, use: Use, what: str, cure: str) -> None:
        self.mistakes.append(Mistake(what, cure, use.span))
