"""The figures of a design kept beside it, and what has drifted from them since.

A kept file is CSV, one figure a line in the order of the report, so that it shows well in a review. It holds figures of
solved studies and of requirements; it works none out.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from grammar.quantities import ANGLE, unit_of
from simcore.figures.figure import Figure
from simcore.proof import Proof
from simcore.report import words
from simcore.report.files import write_table

COLUMNS = ("study", "subject", "figure", "value", "unit", "bound")
REQUIRED = "required"
"""What stands as the figure of a requirement's own."""
MOST_BYTES = 10**8

Key = tuple[str, str, str]


@dataclass(frozen=True)
class Kept:
    """A figure: value and bound in unit; value nan where it is undefined, inf for an instant that does not come."""

    value: float
    unit: str
    bound: float


@dataclass(frozen=True)
class Drift:
    """A figure that is not what it was; was or now None where there is none. allowed: what both bounds leave room
    for."""

    key: Key
    was: Kept | None
    now: Kept | None

    @property
    def allowed(self) -> float:
        """What both bounds together leave room for."""
        return sum(each.bound for each in (self.was, self.now) if each is not None)


class KeptFileError(Exception):
    """A kept file that can't be read; the text says why, in the user's words."""


def kept_path(description: Path) -> Path:
    """Where the figures of a description are kept: beside it."""
    return description.with_suffix(".kept.csv")


def figures_to_keep(proof: Proof) -> dict[Key, Kept]:
    """Every figure with a bound that a proof shows: of signals, of diodes, and those that were required."""
    found: dict[Key, Kept] = {}
    for study, solved in proof.studies.items():
        for row in (*solved.signals, *solved.diodes):
            for title, figure in row.figures.items():
                found[study, row.name, title] = _kept(figure)
    for verdict in proof.verdicts:
        if verdict.figure is not None:
            found[verdict.requirement.study, words.subject(verdict), REQUIRED] = _kept(verdict.figure)
    return found


def _kept(figure: Figure) -> Kept:
    """A figure in the unit that stands beside it: an angle, which figures have in radians, in degrees."""
    scale = math.degrees(1.0) if figure.dimension == ANGLE else 1.0
    bound = 0.0 if figure.bound is None else figure.bound
    return Kept(float(figure.value) * scale, unit_of(figure.dimension), float(bound) * scale)


def write_kept(path: Path, figures: Mapping[Key, Kept]) -> None:
    """Write a kept file."""
    write_table(path, COLUMNS, [(*key, kept.value, kept.unit, kept.bound) for key, kept in figures.items()])


def read_kept(path: Path) -> dict[Key, Kept]:
    """Read a kept file. Raises KeptFileError where that can't be done."""
    try:
        if path.stat().st_size > MOST_BYTES:
            raise KeptFileError("it is too large to be a file of kept figures")
        with path.open(newline="", encoding="utf-8") as file:
            return _rows(csv.reader(file))
    except FileNotFoundError:
        raise KeptFileError("no figures are kept of this design") from None
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise KeptFileError(f"the kept figures can't be read: {error}") from None


def _rows(rows: Iterable[Sequence[str]]) -> dict[Key, Kept]:
    found: dict[Key, Kept] = {}
    for line, row in enumerate(rows, start=1):
        if line == 1:
            if tuple(row) != COLUMNS:
                raise KeptFileError(f"line 1 does not name the columns {', '.join(COLUMNS)}")
            continue
        try:
            study, subject, title, value, unit, bound = row
            found[study, subject, title] = Kept(float(value), unit, float(bound))
        except ValueError:
            raise KeptFileError(f"line {line} holds no figure") from None
    return found


def compared(was: Mapping[Key, Kept], now: Mapping[Key, Kept]) -> tuple[list[Drift], list[Drift], list[Drift]]:
    """Figures that drifted beyond what both bounds leave room for, those that are missing now, and new ones."""
    drifted = [Drift(key, was[key], now[key]) for key in was if key in now and not _same(was[key], now[key])]
    missing = [Drift(key, kept, None) for key, kept in was.items() if key not in now]
    new = [Drift(key, None, kept) for key, kept in now.items() if key not in was]
    return drifted, missing, new


def _same(was: Kept, now: Kept) -> bool:
    if was.unit != now.unit:
        return False
    if math.isfinite(was.value) and math.isfinite(now.value):
        return abs(now.value - was.value) <= was.bound + now.bound
    return was.value == now.value or (math.isnan(was.value) and math.isnan(now.value))
