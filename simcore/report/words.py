"""Figures, verdicts and bills in words and numbers with units, for whatever a person reads.

Knows how numbers are written; lays nothing out and works nothing out.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence

from grammar.description import Call
from grammar.quantities import AMPERE, KELVIN, show
from grammar.writer import write_expression
from simcore.design.circuit import Requirement
from simcore.figures.catalogue import ABSOLUTE
from simcore.figures.figure import Figure
from simcore.figures.overview import Row
from simcore.judge.bill import BillLine
from simcore.judge.harmonics import Harmonic
from simcore.judge.held import Verdict
from simcore.judge.outcome import State
from simcore.judge.ratings import stress_text

BOUND_DIGITS = 2
APPARENT = "apparent power"
"""What a stress in VA is called."""
CELSIUS = 273.15
"""K at 0 degC."""

VERDICT_HEADINGS = ("verdict", "study", "requirement", "required", "found", "margin")
BILL_HEADINGS = ("element", "stress", "worst in", "found", "rated", "unused", "suggested")
HARMONIC_HEADINGS = ("verdict", "order", "limit", "found", "margin")


def value(figure: Figure, absolute: bool = False) -> str:
    """A figure without its bound; absolute: in K it is a temperature, which is shown in degC."""
    if not figure.defined:
        return "undefined"
    if absolute and figure.dimension == KELVIN:
        return f"{figure.value - CELSIUS:.5g} degC"
    if math.isinf(figure.value):
        return "never" if figure.beyond is None else f"later than {show(figure.beyond, figure.dimension)}"
    return show(figure.value, figure.dimension)


def row_value(row: Row, column: str) -> str:
    """A figure of a table's row without its bound."""
    return value(row.figures[column], row.temperature and column in ABSOLUTE)


def bound(figure: Figure) -> str:
    """The bound of a figure."""
    if figure.bound is None:
        return "-"
    if math.isinf(figure.bound):
        return "unknown"
    return show(figure.bound, figure.dimension, BOUND_DIGITS)


def with_bound(figure: Figure, absolute: bool = False) -> str:
    """A figure with its bound; absolute: see value."""
    text = value(figure, absolute)
    return text if not figure.defined or math.isinf(figure.value) else f"{text} ± {bound(figure)}"


def row_with_bound(row: Row, column: str) -> str:
    """A figure of a table's row with its bound."""
    return with_bound(row.figures[column], row.temperature and column in ABSOLUTE)


def largest_bound(figures: Iterable[Figure]) -> str:
    """The bound that none of several figures exceeds."""
    known = [figure for figure in figures if figure.bound is not None and figure.defined]
    return bound(max(known, key=lambda figure: figure.bound or 0.0)) if known else "-"


# --- verdicts --------------------------------------------------------------------------------------------------------


def verdict_cells(verdict: Verdict) -> list[str]:
    """A verdict under VERDICT_HEADINGS."""
    margin = value(verdict.margin) if verdict.margin is not None else "-"
    found = "-" if verdict.figure is None else with_bound(verdict.figure, verdict.requirement.temperature)
    numbers = [required(verdict), found, margin]
    if _is_apparent(verdict.requirement):
        numbers = [volt_amperes(each) for each in numbers]
    return [str(verdict.state), verdict.requirement.study, subject(verdict), *numbers]


def _is_apparent(requirement: Requirement) -> bool:
    """Whether a requirement is on an apparent power, which is in VA."""
    figure = requirement.figure
    return figure.name == "apparent_power" if isinstance(figure, Call) else APPARENT in requirement.wording


def volt_amperes(text: str) -> str:
    """A power in words as an apparent one."""
    return re.sub(r"\b([a-zA-Z]?)W\b", r"\1VA", text)


def subject(verdict: Verdict) -> str:
    """What was required, by its label if it has one."""
    requirement = verdict.requirement
    if requirement.label:
        return requirement.label
    if requirement.figure is None or requirement.limits is not None:
        return requirement.wording
    return write_expression(requirement.figure)


def required(verdict: Verdict) -> str:
    """The limit or limits of a verdict."""
    if verdict.limit is None:
        return "-"
    absolute = verdict.requirement.temperature
    if verdict.upper is not None:
        return f"{value(verdict.limit, absolute)} to {value(verdict.upper, absolute)}"
    relation = "<=" if verdict.requirement.limits is not None else verdict.requirement.relation
    return f"{relation} {value(verdict.limit, absolute)}"


def reasons(verdicts: Sequence[Verdict]) -> list[str]:
    """Why verdicts were not decided or what must be known of them, each reason once with all it is about."""
    found: dict[str, dict[str, None]] = {}
    for verdict in verdicts:
        if verdict.reason:
            found.setdefault(verdict.reason, {})[subject(verdict)] = None
    return [f"{', '.join(subjects)}: {reason}" for reason, subjects in found.items()]


def unrated(names: Sequence[str]) -> list[str]:
    """Which elements had no rating to be held against, in a line or none."""
    return [f"no rating is given of {', '.join(names)}"] if names else []


def closing(verdicts: Sequence[Verdict]) -> str:
    """How many requirements came to what, in one sentence."""
    if not verdicts:
        return "Nothing was required."
    counts = {state: sum(verdict.state is state for verdict in verdicts) for state in State}
    if counts[State.HOLDS] == len(verdicts):
        return f"All {len(verdicts)} requirements hold." if len(verdicts) > 1 else "The requirement holds."
    return f"Of {len(verdicts)}: " + ", ".join(f"{count} {state}" for state, count in counts.items() if count) + "."


# --- ratings and harmonics -------------------------------------------------------------------------------------------


def bill_cells(line: BillLine, bounds: bool = True) -> list[str]:
    """A line of the bill of ratings under BILL_HEADINGS; bounds: whether with what follows ±."""
    found = stress_text(line.figure) + (f" ± {bound(line.figure)}" if bounds else "")
    suggested = "-" if line.suggested is None else f"{show(line.suggested, line.figure.dimension)}"
    if line.stress == APPARENT:
        found, suggested = volt_amperes(found), volt_amperes(suggested)
    left = "-" if line.unused is None else percent(line.unused)
    where = f"{line.study}, {line.variant}" if line.variant else line.study
    return [line.name, line.stress, where, found, line.rating_text or "-", left, suggested]


def bill_note(lines: Sequence[BillLine]) -> str:
    """What suggestions of a bill count on."""
    margins = ", ".join(dict.fromkeys(percent(line.margin) for line in lines if line.suggested is not None))
    return f"suggested: the next R10 value (ISO 3) that leaves {margins or 'a margin'} unused" if lines else ""


def percent(share: float) -> str:
    """A share in per cent."""
    return f"{100.0 * share:.3g} %"


def harmonic_cells(row: Harmonic) -> list[str]:
    """One harmonic under HARMONIC_HEADINGS."""
    limit = show(row.limit.value, AMPERE)
    margin = value(row.margin) if row.margin is not None else "-"
    return [str(row.state), str(row.order), limit, with_bound(row.figure), margin]
