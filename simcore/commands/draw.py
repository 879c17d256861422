"""`bulkrail draw`: pictures of traces, and of harmonics beside their limits."""

from __future__ import annotations

import argparse
from pathlib import Path

from simcore.commands.options import add_file, add_out, add_settings, add_studies
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    draw = commands.add_parser("draw", help="draw the traces of each study, and harmonics beside their limits")
    add_file(draw)
    draw.add_argument("--format", choices=("png", "svg"), default="png", help="of the pictures, by default png")
    add_out(draw)
    add_studies(draw)
    add_settings(draw)
    draw.set_defaults(action=_draw)


def _draw(options: argparse.Namespace) -> Outcome:
    from simcore.report.pictures import draw_file

    folder = options.out or Path("results") / Path(options.file).stem
    return draw_file(options.file, folder, options.format, options.study, dict(options.settings), say, complain)
