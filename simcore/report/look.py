"""The circuit as understood, laid out for a terminal: what `look` prints.

Knows an overview's fields and how tables line up, and no circuits.
"""

from __future__ import annotations

from collections.abc import Mapping

from simcore.design.overview import Overview
from simcore.report.screen import Screen
from simcore.report.tables import INDENT, table


def look(overview: Overview, description: str, screen: Screen | None = None) -> str:
    """The whole overview as text; description: the file it comes from; screen: what it is shown on."""
    screen = screen or Screen()
    width = screen.width
    lines = [overview.purpose, description] if overview.purpose else [description]
    branches = [
        [branch.name, branch.kind, f"{branch.a} -> {branch.b}", _labelled(", ".join(branch.values), branch.label)]
        for branch in overview.branches
    ]
    lines += _titled("Branches", table(["name", "kind", "goes", "has"], branches, 4, width) if branches else [])
    lines += _titled("Parts of the circuit", _part_lines(overview, width))
    lets = [[let.name, let.value, let.tolerance, let.label] for let in overview.lets]
    lines += _titled("Lets", table(["name", "value", "tolerance", "wording"], lets, 4, width) if lets else [])
    used = {f"data sheet {sheet}": ", ".join(elements) for sheet, elements in overview.sheets.items()}
    used.update({f"block {copy}": f"copy of {block}" for copy, block in overview.blocks.items()})
    lines += _titled("Data sheets and blocks", _named(used))
    lines += _titled("Worked out", _listed(overview.worked_out))
    lines += _titled("Warnings", [INDENT + warning for warning in overview.warnings])
    lines += _titled("Observed", _named(overview.observes))
    lines += _titled("Studies", _named(overview.studies))
    required = [[study, claim, label] for study, claim, label in overview.requirements]
    lines += _titled("Requirements", table(["study", "requirement", "wording"], required, 3, width) if required else [])
    lines += _titled("Sweeps", _named(overview.sweeps))
    return "\n".join(screen.fitted(lines))


def _part_lines(overview: Overview, width: int | None) -> list[str]:
    rows = [
        [
            part.reference or "(none)",
            ", ".join(part.nodes),
            str(len(part.nodes)),
            str(part.branches),
            str(part.loops),
        ]
        for part in overview.parts
    ]
    headings = ["reference", "nodes", "count", "branches", "independent loops"]
    ambient = f"{INDENT}ambient temperature {overview.ambient}"
    return [*(table(headings, rows, 2, width) if rows else []), ambient]


def _titled(title: str, lines: list[str]) -> list[str]:
    """A section, left out where it is empty."""
    return ["", title, *lines] if lines else []


def _named(entries: Mapping[str, str]) -> list[str]:
    width = max((len(name) for name in entries), default=0)
    return [f"{INDENT}{name.ljust(width)}   {text}" for name, text in entries.items()]


def _listed(entries: Mapping[str, list[str]]) -> list[str]:
    """Each name above the lines on it."""
    return [line for name, texts in entries.items() for line in (INDENT + name, *(2 * INDENT + text for text in texts))]


def _labelled(text: str, label: str) -> str:
    return f"{text} ({label})" if label and text else text or label
