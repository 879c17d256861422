"""Options that several verbs share, and where the results of several files go."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from pathlib import Path

from simcore.commands.speaking import complain


def add_file(parser: argparse.ArgumentParser) -> None:
    """The one description that a verb takes."""
    parser.add_argument("file", metavar="FILE", help="a description, ending in .rect")


def add_files(parser: argparse.ArgumentParser) -> None:
    """The descriptions that a verb takes."""
    parser.add_argument("files", metavar="FILE", nargs="+", help="a description, ending in .rect")


def add_settings(parser: argparse.ArgumentParser) -> None:
    """Other values for lets."""
    parser.add_argument(
        "--set",
        metavar="NAME=VALUE",
        dest="settings",
        type=_setting,
        action="append",
        default=[],
        help='give a let another value, as "C_res=2200 uF"; may be repeated',
    )


def add_studies(parser: argparse.ArgumentParser) -> None:
    """The studies to solve."""
    parser.add_argument(
        "--study", metavar="NAME", action="append", default=[], help="solve this study only; may be repeated"
    )


def add_out(parser: argparse.ArgumentParser) -> None:
    """The folder that results go to."""
    parser.add_argument(
        "--out",
        metavar="DIR",
        type=Path,
        help="folder for the results, by default results/<file's stem>; with several files one folder each in it",
    )


def add_junit(parser: argparse.ArgumentParser) -> None:
    """A test report for build servers."""
    parser.add_argument("--junit", metavar="FILE", type=Path, help="write the verdicts as JUnit XML too")


def add_amount(parser: argparse.ArgumentParser, quiet: str, as_json: str) -> None:
    """How much is said, and to whom; quiet, as_json: what help says of either."""
    amount = parser.add_mutually_exclusive_group()
    amount.add_argument("--quiet", action="store_true", help=quiet)
    amount.add_argument("--json", action="store_true", help=as_json)


def _setting(text: str) -> tuple[str, str]:
    name, equals, value = (part.strip() for part in text.partition("="))
    if not (name and equals and value):
        raise argparse.ArgumentTypeError(f'"{text}" is not NAME=VALUE, such as "C_res=2200 uF"')
    return name, value


def folders(files: Sequence[str], out: Path | None) -> dict[str, Path] | None:
    """Where the results of each file go; None, with a message, where two would share a folder."""
    base = Path("results") if out is None else out
    alone = out is not None and len(files) == 1
    found = {file: base if alone else base / Path(file).stem for file in files}
    first: dict[Path, str] = {}
    for file, folder in found.items():
        other = first.setdefault(folder, file)
        if other != file:
            complain(f"{file}: its results would take the place of those of {other}")
            complain("    cure: run the two apart, each with its own --out")
            return None
    return found
