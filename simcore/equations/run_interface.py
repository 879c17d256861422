"""The face of a run, emitted or on arrays: what it is given, what it carries and records, what it answers.

The function is `run(p, s, out, c)`.
p: parameters. s: t, H, then states, nonlinear branches' voltages, peaks of the states and of the watched currents, ends
of the columns, how far each threshold is passed; read and written back. out: records of 2 + 2 * columns numbers: time
at the end of a step, each column's middle and end value, 1 where a nonlinear branch began or ceased to conduct within
it or a voltage jumped (a kink or jump lies inside), else 0.
c: the controls, in the order of CONTROLS. With responses a further argument m holds four squares of the number of
states: the derivative of the states by those at the start, direction by direction, and room for three more. Returns
(status, numbers written, steps, rejected, solves, iterations, weak pivots, which). After so many attempts at a step as
the controls allow it answers FULL, so that its caller may bound the work. which: after an EVENT the threshold passed
+ 1; after NO_CONVERGENCE what is nearest to the trouble, else what sets the size of the steps (see nearest), 0 where
nothing stands out.
"""

from __future__ import annotations

from collections.abc import Hashable

from simcore.components.frame import NonlinearBranch
from simcore.equations.assemble import System

CONTROLS = (
    "t_end",
    "largest",
    "smallest",
    "tolerance",
    "order",
    "limit",
    "fade",
    "record",
    "room",
    "attempts",
    "floor_voltage",
    "floor_current",
    "watch_tolerance",
    "agreement",
    "kink_size",
    "event_size",
)
DONE, FULL, NO_CONVERGENCE, EVENT = 0, 1, 2, 3
WEAK = 6
"""Position of the weak pivots in the answer."""
ROUNDING = 1e-9
"""Share of a branch's voltage that rounding may move it by between nodes that next to nothing ties."""

SHORT = 0.98
"""Share of the way to a threshold that a step takes: what is left shrinks fifty-fold a step, to the event size."""
BLOCKED, PATIENCE = 0.01, 8
"""Agreement, over the law's scale, of a branch that blocks, and the iterations after which any will do: the rounding of
the large voltages around such a branch is all that moves it, and while it blocks it errs by less than its leakage. A
branch that carries next to nothing needs no better then than the least error that the control of the step sees."""
JUMP = 100.0
"""Difference of a voltage's two last orders at which it jumps, over the step's tolerance and the voltage that needs no
accuracy: the tolerance of the circuit's largest."""
UNEVEN = 8
"""Steps from a kink on in which a voltage may jump."""
BEYOND = 60.0
"""Most that the iterate of a junction lies above its critical voltage, over the scale of its law: it would carry 1e26
times its critical current there."""


MOST_NAMED = 6
"""Elements that a message names where none of them stands out."""


def nearest(system: System, which: int) -> str:
    """The element or node that a run told to be nearest to what stopped it: above zero the nonlinear branch + 1, below
    zero the negative of the state + 1, or of all states and the column + 1; for zero, where none stood out, all."""
    if which == 0:
        elements = list(dict.fromkeys(branch.element for branch in system.frame.branches))
        more = f" and {len(elements) - MOST_NAMED} more" if len(elements) > MOST_NAMED else ""
        return f"among {', '.join(elements[:MOST_NAMED])}{more}"
    owners: list[Hashable] = [system.frame.branches[state.branch].element for state in system.states]
    for column in system.columns:
        owners.append(column.unknown if column.branch is None else system.frame.branches[column.branch].element)
    found = system.frame.branches[system.junctions[which - 1].branch].element if which > 0 else owners[-which - 1]
    return f"near {found[0] if isinstance(found, tuple) else found}"


def watched_columns(system: System) -> list[int]:
    """Positions of the columns whose curvature bounds the step, besides the states: the currents of the nonlinear
    branches but those that carry a quantity, whose current follows from a state that is watched as it is."""
    nonlinear = [(junction.branch, system.frame.branches[junction.branch]) for junction in system.junctions]
    branches = [index for index, branch in nonlinear if isinstance(branch, NonlinearBranch) and branch.carried is None]
    return [index for index, column in enumerate(system.columns) if column.branch in branches]


def saved_groups(system: System) -> list[tuple[str, int]]:
    """The groups of numbers in s after t and H: states, junction voltages, state peaks, watched peaks, column ends,
    thresholds."""
    states, watched, junctions = len(system.states), len(watched_columns(system)), len(system.junctions)
    ends = [("l", len(system.columns)), ("f", len(system.thresholds))]
    return [("z", states), ("u", junctions), ("i", states), ("j", watched), *ends]


def saved_count(system: System) -> int:
    """Length of s."""
    return 2 + sum(count for _, count in saved_groups(system))


def record_width(system: System) -> int:
    """Numbers that a step records."""
    return 2 + 2 * len(system.columns)
