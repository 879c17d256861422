"""The `bulkrail` command: reads what is asked, hands it on, and turns the outcome into an exit status.

Imports nothing heavy until a command needs it, and knows neither circuits nor figures.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Callable, Sequence
from pathlib import Path

from simcore.judge.outcome import Outcome

INTERRUPTED = 130
"""Exit status after an interrupt from the keyboard, as shells have it: 128 + signal number."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command with the given arguments, by default those of the process; returns the exit status."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    options = _parser().parse_args(arguments)
    action: Callable[[argparse.Namespace], Outcome] = options.action
    try:
        return action(options).status
    except KeyboardInterrupt:
        print("interrupted; no file is half written", file=sys.stderr)
        return INTERRUPTED


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="bulkrail",
        description="Solves rectifier circuits described in text and judges them against what they must hold.",
        epilog="exit status: " + "; ".join(f"{outcome.status} {outcome.sentence}" for outcome in Outcome),
    )
    parser.add_argument("--version", action="version", version=_version_text())
    commands = parser.add_subparsers(metavar="COMMAND", required=True)
    run = commands.add_parser("run", help="solve the studies, print figures and verdicts, write traces")
    run.add_argument("files", metavar="FILE", nargs="+", help="a description, ending in .rect")
    run.add_argument(
        "--out",
        metavar="DIR",
        type=Path,
        help="folder for the results, by default results/<file's stem>; with several files one folder each in it",
    )
    run.add_argument(
        "--study", metavar="NAME", action="append", default=[], help="solve this study only; may be repeated"
    )
    _add_settings(run)
    run.set_defaults(action=_run)
    _add_sweep(commands)
    look = commands.add_parser("look", help="show the circuit as understood, and what each study will do")
    look.add_argument("file", metavar="FILE", help="a description, ending in .rect")
    _add_settings(look)
    look.set_defaults(action=_look)
    return parser


def _add_sweep(commands: argparse._SubParsersAction) -> None:
    sweep = commands.add_parser("sweep", help="solve the sweeps: worst cases and where they lie, pass rates, tables")
    sweep.add_argument("files", metavar="FILE", nargs="+", help="a description, ending in .rect")
    sweep.add_argument(
        "--out",
        metavar="DIR",
        type=Path,
        help="folder for the tables, by default results/<file's stem>; with several files one folder each in it",
    )
    sweep.add_argument(
        "--sweep", metavar="NAME", action="append", default=[], help="solve this sweep only; may be repeated"
    )
    sweep.add_argument(
        "--sensitivity",
        action="store_true",
        help="solve no sweep, but how far each requirement's figure follows each let",
    )
    sweep.add_argument(
        "--workers", metavar="N", type=_count, help="processes to solve on, by default one a core; 1: in this one"
    )
    sweep.add_argument("--scheduler", metavar="ADDRESS", default="", help="solve on the workers of a dask scheduler")
    sweep.add_argument("--resume", action="store_true", help="go on with an interrupted sweep")
    _add_settings(sweep)
    sweep.set_defaults(action=_sweep)


def _count(text: str) -> int:
    if not text.isdecimal() or not 1 <= int(text) <= 1024:
        raise argparse.ArgumentTypeError(f'"{text}" is not a number of workers from 1 to 1024')
    return int(text)


def _add_settings(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--set",
        metavar="NAME=VALUE",
        dest="settings",
        type=_setting,
        action="append",
        default=[],
        help='give a let another value, as "C_res=2200 uF"; may be repeated',
    )


def _setting(text: str) -> tuple[str, str]:
    name, equals, value = (part.strip() for part in text.partition("="))
    if not (name and equals and value):
        raise argparse.ArgumentTypeError(f'"{text}" is not NAME=VALUE, such as "C_res=2200 uF"')
    return name, value


def _version_text() -> str:
    from simcore import __version__

    return f"bulkrail {__version__}"


def _run(options: argparse.Namespace) -> Outcome:
    from simcore.report.session import run_files

    folders = _folders(options.files, options.out)
    if folders is None:
        return Outcome.INPUT_WRONG
    return run_files(folders, options.study, dict(options.settings), say, complain)


def _sweep(options: argparse.Namespace) -> Outcome:
    from simcore.judge.outcome import worst
    from simcore.report.sweep_session import Asked, sensitivity_of_file, sweep_file

    folders = _folders(options.files, options.out)
    if folders is None:
        return Outcome.INPUT_WRONG
    asked = Asked(options.sweep, dict(options.settings), options.workers, options.scheduler, options.resume)
    call = sensitivity_of_file if options.sensitivity else sweep_file
    return worst([call(file, folder, asked, say, complain) for file, folder in folders.items()])


def _folders(files: Sequence[str], out: Path | None) -> dict[str, Path] | None:
    """Where the results of each file go; None, with a message, where two would share a folder."""
    base = Path("results") if out is None else out
    alone = out is not None and len(files) == 1
    folders = {file: base if alone else base / Path(file).stem for file in files}
    first: dict[Path, str] = {}
    for file, folder in folders.items():
        other = first.setdefault(folder, file)
        if other != file:
            complain(f"{file}: its results would take the place of those of {other}")
            complain("    cure: run the two apart, each with its own --out")
            return None
    return folders


def _look(options: argparse.Namespace) -> Outcome:
    from simcore.report.session import look_at

    return look_at(options.file, dict(options.settings), say, complain)


def say(text: str) -> None:
    """Print for people. A reader who has gone away ends the printing and nothing else."""
    try:
        print(text, flush=True)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def complain(text: str) -> None:
    """Print a mistake or progress, apart from what people asked for."""
    print(text, file=sys.stderr, flush=True)


if __name__ == "__main__":
    sys.exit(main())
