"""A variant as lines of a description, to be pasted over those of the same names: reading them gives the same variant.

It knows descriptions and variants, and nothing of what came of them.
"""

from __future__ import annotations

from dataclasses import replace

from grammar.description import Action, Expression, Let, Name, Spread, Study
from grammar.quantities import Quantity
from grammar.reader import read_expression
from grammar.writer import write_expression, write_statement
from simcore.campaign.exact import exact
from simcore.campaign.plan import Variant
from simcore.design.circuit import Change, LetValue
from simcore.design.elaborate import elaborate
from simcore.opening import Opened


def value_text(value: Quantity | Expression | str) -> str:
    """A let's value as a description writes it."""
    if isinstance(value, Quantity):
        return exact(value.value, value.dimension)
    return value if isinstance(value, str) else write_expression(value)


def pasted_lines(opened: Opened | None, variant: Variant) -> list[str]:
    """A variant of a design as lines: its lets, with what the design was opened with, and where it has faults the
    studies that begin with them. Without the design, its lets alone.

    A let keeps its label and its tolerance, so that sweeps can still be made. One inside a repeat or block has no line
    of its own: a comment then says how to set it.
    """
    if opened is None:
        return [f"let {let} = {value_text(value)}" for let, value in variant.values.items()]
    values = {**opened.overrides, **variant.values}
    moved, _ = elaborate(opened.project, values, again=True)
    statements = opened.project.top.description.statements
    written = {write_expression(each.name): each for each in statements if isinstance(each, Let)}
    lines = []
    for let, value in values.items():
        text = value_text(value)
        if let in written:
            spread = _spread(written[let], opened.circuit.lets[let], moved.lets[let])
            lines += write_statement(replace(written[let], value=_expression(text), spread=spread))
        else:
            lines.append(f'# bulkrail run --set "{let}={text}"')
    if variant.faults:
        studies = [each for each in statements if isinstance(each, Study) and _begins(each)]
        lines += [line for study in studies for line in write_statement(_faulted(study, variant.faults))]
    return lines


def _spread(let: Let, described: LetValue, moved: LetValue) -> Spread | None:
    """The tolerance of a let with another value: its limits as described where the value lies between them, else what
    is written, a share of the value or an amount; none where that is a limit which the value has left."""
    value = moved.value
    if let.spread is None or not isinstance(value, Quantity):
        return None
    if _between(described, value.value):
        assert described.low is not None and described.high is not None
        low, high = (_expression(exact(limit, value.dimension)) for limit in (described.low, described.high))
        return Spread(low, high, let.spread.distribution)
    return let.spread if _between(moved, value.value) else None


def _between(let: LetValue, value: float) -> bool:
    return let.low is not None and let.high is not None and let.low <= value <= let.high


def _begins(study: Study) -> bool:
    """Whether a study begins by itself; one that comes after another has the faults from there."""
    return all(setting.key != "after" for setting in study.settings)


def _faulted(study: Study, faults: tuple[Change, ...]) -> Study:
    actions = []
    for fault in faults:
        target = _expression(fault.target)
        assert isinstance(target, Name)
        actions.append(Action(fault.verb, target))
    return replace(study, actions=(*actions, *study.actions))


def _expression(text: str) -> Expression:
    expression, mistakes = read_expression(text, text)
    assert expression is not None and not mistakes, text
    return expression
