"""What a sweep leaves: its table as CSV by RFC 4180, and what a person reads of it.

Knows the results of sweeps and works nothing out.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from grammar.quantities import quantity, show
from simcore.campaign.results import AS_DESCRIBED, CONFIDENCE, SOURCE, PassRate, Results, Worst, variant_words
from simcore.campaign.rows import Found
from simcore.campaign.sensitivity import Sensitivity
from simcore.judge.outcome import State
from simcore.report.tables import INDENT, table
from simcore.report.writing import whole_file

WORST_HEADINGS = ("verdict", "study", "requirement", "found", "±", "margin", "variant")
_REASONS = 5
_RATES = 24
_DIGITS = 5


def write_sweep(results: Results, path: Path) -> None:
    """The table of a sweep: one row a variant, an empty cell where a figure has no finite value."""
    columns = results.columns
    with whole_file(path) as file:
        writer = csv.writer(file)
        writer.writerow(columns)
        writer.writerows([_cell(value) for value in row] for row in zip(*columns.values(), strict=True))


def _cell(value: object) -> str:
    if isinstance(value, float):
        return repr(value) if math.isfinite(value) else ""
    return str(value)


def sweep_lines(results: Results, label: str | None = None, width: int | None = None) -> list[str]:
    """What one sweep found; width: characters a line, None for as many as it takes."""
    lines = [_title(results, label)]
    lines += [INDENT + axis.note for axis in results.plan.axes if axis.note]
    worst = results.worst
    if worst:
        lines += ["", INDENT + "The worst case of each requirement, and the variant where it lies"]
        lines += table(WORST_HEADINGS, [worst_cells(each) for each in worst], 3, width, 1)
        lines += ["", *_variants(results, worst)]
    return lines + _unsolved(results) + [INDENT + text for text in sums(results)]


def quiet_lines(results: Results, label: str | None = None, width: int | None = None) -> list[str]:
    """Only what does not hold in some variant, or was not solved; nothing where all is well."""
    wrong = [each for each in results.worst if each.found is None or each.found.state != State.HOLDS]
    lines = table(WORST_HEADINGS, [worst_cells(each) for each in wrong], 3, width, 1) if wrong else []
    lines += _unsolved(results)
    return [_title(results, label), *lines] if lines else []


def for_programs(results: Results) -> dict[str, object]:
    """What a sweep found, as it goes into JSON; a number that there is none of is null."""
    passing, failing, unsolved = results.counts
    return {
        "sweep": results.plan.name,
        "outcome": results.outcome.status,
        "variants": {"pass": passing, "do not": failing, "not solved": unsolved},
        "worst": [_plain_worst(results, each) for each in results.worst],
        "pass rates": [vars(rate) for rate in results.pass_rates],
    }


def _plain_worst(results: Results, worst: Worst) -> dict[str, object]:
    claim, found, row = worst.claim, worst.found, worst.row
    said: dict[str, object] = {"study": claim.study, "requirement": claim.requirement, "label": claim.label}
    if found is None or row is None:
        return {**said, "verdict": "not solved"}
    numbers = {"value": found.value, "bound": found.bound, "margin": found.margin}
    finite = {name: number if math.isfinite(number) else None for name, number in numbers.items()}
    lines = list(results.pasted(row))
    return {**said, "verdict": str(found.state), **finite, "unit": claim.unit, "variant": row.number, "lines": lines}


def _title(results: Results, label: str | None) -> str:
    plan = results.plan
    title = f"{plan.name} ({label})" if label else plan.name
    return f"{title}: {plan.sentence}" if plan.sentence else title


def sums(results: Results) -> list[str]:
    """How many variants came to what, and how many draws pass."""
    return [counted(results), *_rates(results.pass_rates)]


def swept(results: Results, label: str | None) -> Swept:
    """What a page shows of a sweep."""
    worst = results.worst
    lines = [*_variants(results, worst), *_unsolved(results)]
    return Swept(_title(results, label), [worst_cells(each) for each in worst], lines, sums(results))


@dataclass(frozen=True)
class Swept:
    """A sweep as a page shows it: title, worst cases under WORST_HEADINGS, the variants as lines to paste, and sums."""

    title: str
    worst: Sequence[Sequence[str]]
    variants: Sequence[str]
    sums: Sequence[str]


def worst_cells(worst: Worst) -> list[str]:
    """A worst case under WORST_HEADINGS."""
    claim, found = worst.claim, worst.found
    subject = f"{claim.label} ({claim.requirement})" if claim.label else claim.requirement
    if found is None or worst.row is None:
        return ["not solved", claim.study, subject, "-", "-", "-", "-"]
    return [found.state, claim.study, subject, *_found_cells(found), str(worst.row.number)]


def _found_cells(found: Found) -> list[str]:
    unit = found.claim.unit
    value = "never" if math.isinf(found.value) else _amount(found.value, unit)
    bound = "-" if math.isnan(found.bound) else _amount(found.bound, unit, 2)
    return [value, bound, _amount(found.margin, unit)]


def _amount(value: float, unit: str, digits: int = _DIGITS) -> str:
    if math.isnan(value):
        return "-"
    held = quantity(value, unit)
    return show(held.value, held.dimension, digits)


def _variants(results: Results, worst: Sequence[Worst]) -> list[str]:
    """The variants in which worst cases lie, as lines to paste."""
    rows = {each.row.number: each.row for each in worst if each.row is not None}
    lines = []
    for number, row in sorted(rows.items()):
        pasted = results.pasted(row)
        if pasted:
            lines += [f"{INDENT}variant {number}:", *(INDENT * 2 + line for line in pasted)]
        else:
            lines += [f"{INDENT}variant {number} is the circuit as described."]
    how = f"{INDENT}Pasted over the lines of the same names, these make the variant:"
    return [how, *lines, ""] if lines else []


def _unsolved(results: Results) -> list[str]:
    """Why variants were not solved, the first few."""
    failed = [row for row in results.rows if not row.solved]
    lines = []
    for row in failed[:_REASONS]:
        words = ", ".join(variant_words(results.plan.variant(row.number - 1))) or AS_DESCRIBED
        lines.append(f"{INDENT}variant {row.number} ({words}) was not solved: {row.ended}")
    if len(failed) > _REASONS:
        lines.append(f"{INDENT}and {len(failed) - _REASONS} more: see the column `ended` of the table")
    return lines + [""] if lines else []


def counted(results: Results) -> str:
    """How many variants came to what, in one sentence."""
    passing, failing, unsolved = results.counts
    total = len(results)
    hold = "hold every requirement" if passing != 1 else "holds every requirement"
    parts = [f"{passing} {hold}"] if results.required else [f"{passing} solved, nothing was required"]
    if failing:
        parts.append(f"{failing} {'do' if failing != 1 else 'does'} not")
    if unsolved:
        parts.append(f"{unsolved} {'were' if unsolved != 1 else 'was'} not solved")
    return f"Of {total} variant{'s' if total != 1 else ''}: {', '.join(parts)}."


def _rates(rates: Sequence[PassRate]) -> list[str]:
    """The pass rates of draws; the lowest first where there are too many for all."""
    shown = rates if len(rates) <= _RATES else sorted(rates, key=lambda rate: rate.passing / rate.drawn)[:_RATES]
    lines = []
    for rate in shown:
        where = f" at {rate.at}" if rate.at else ""
        sure = f"with {100.0 * CONFIDENCE:.0f} % confidence between {_percent(rate.low)} and {_percent(rate.high)}"
        lines.append(f"Pass rate{where}: {_percent(rate.passing / rate.drawn)}, {sure} ({SOURCE})")
    if len(shown) < len(rates):
        lines.append(f"These are the {len(shown)} lowest of {len(rates)} pass rates.")
    return lines


def _percent(share: float) -> str:
    return f"{100.0 * share:.2f} %"


# --- sensitivities ---------------------------------------------------------------------------------------------------

SENSITIVITY_COLUMNS = ("study", "figure", "let", "relative sensitivity", "bound", "step", "note")


def write_sensitivities(found: Sequence[Sensitivity], path: Path) -> None:
    """One row for each figure and let, none of its numbers with a unit: shares over shares."""
    with whole_file(path) as file:
        writer = csv.writer(file)
        writer.writerow(SENSITIVITY_COLUMNS)
        for each in found:
            cells = (each.claim.study, each.claim.figure, each.let, each.value, each.bound, each.step, each.reason)
            writer.writerow([_cell(value) for value in cells])


def sensitivity_lines(found: Sequence[Sensitivity]) -> list[str]:
    """The lets that each figure follows, the largest first."""
    if not found:
        return ["", "No let has a value that could be moved, or nothing that was required has a figure."]
    lines = ["", "Relative sensitivity: by how many per cent a figure rises where a let rises by one per cent"]
    for heading in dict.fromkeys(each.claim.heading for each in found):
        mine = [each for each in found if each.claim.heading == heading]
        cells = [[each.let, _share(each.value, 3), _share(each.bound, 2)] for each in mine]
        lines += ["", f"{INDENT}{heading}", *table(["let", "sensitivity", "±"], cells)]
        lines += [f"{INDENT}{each.let}: {each.reason}" for each in mine if each.reason]
    return lines


def _share(value: float, digits: int) -> str:
    return "-" if math.isnan(value) else f"{value:.{digits}g}"
