"""What elements have to stand in the variants of a sweep, taken from its rows.

It knows rows and circuits, and neither how variants are solved nor what a bill makes of this.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from grammar.quantities import quantity
from simcore.campaign.results import Results
from simcore.campaign.rows import demand_text
from simcore.design.circuit import Circuit
from simcore.figures.figure import Figure
from simcore.figures.stresses import stress_names, stresses_of
from simcore.judge.bill import Demand


def demands_of(results: Results, circuit: Circuit) -> Iterator[Demand]:
    """What the variants of a sweep without a fault make the elements of a circuit stand: a part that survives every
    fault of every other is not what is bought. Elements that only variants have are left out."""
    known = {
        demand_text(name, stress.title): (name, stress.title)
        for element in circuit.elements.values()
        for stress in stresses_of(element.kind)
        for name in stress_names(element, stress)
    }
    for row in results.rows:
        if results.plan.variant(row.number - 1).faults:
            continue
        for each in row.found:
            if not each.claim.requirement and each.claim.study and each.claim.figure in known:
                held = quantity(each.value, each.claim.unit)
                bound = None if math.isnan(each.bound) else quantity(each.bound, each.claim.unit).value
                figure = Figure(held.value, held.dimension, bound)
                yield Demand(*known[each.claim.figure], each.claim.study, figure, f"{results.plan.name} {row.number}")
