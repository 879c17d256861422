"""`bulkrail draw`: pictures of the circuit, of traces, of harmonics beside their limits, and of sweeps."""

from __future__ import annotations

import argparse
from pathlib import Path

from simcore.commands.options import add_file, add_out, add_settings, add_studies
from simcore.commands.speaking import complain, say
from simcore.judge.outcome import Outcome


def add(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb."""
    draw = commands.add_parser("draw", help="draw the circuit and the traces of each study, or sweeps")
    add_file(draw)
    draw.add_argument("--format", choices=("png", "svg"), default="png", help="of the pictures, by default png")
    add_out(draw)
    add_studies(draw)
    draw.add_argument(
        "--sweep",
        metavar="NAME",
        action="append",
        default=[],
        help="draw this sweep from its table instead, which `bulkrail sweep` writes; may be repeated",
    )
    add_settings(draw)
    draw.set_defaults(action=_draw)


def _draw(options: argparse.Namespace) -> Outcome:
    from simcore.report.pictures import draw_file

    folder = options.out or Path("results") / Path(options.file).stem
    if options.sweep and (options.study or options.settings):
        complain("--sweep goes with neither --study nor --set: it draws a table as it is")
        complain("    cure: draw studies and sweeps apart")
        return Outcome.INPUT_WRONG
    return draw_file(
        options.file, folder, options.format, options.study, options.sweep, dict(options.settings), say, complain
    )
