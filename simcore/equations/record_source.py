"""The part of a run's source that records a step: each column's end, and its middle.

It knows the names that the run gives what it solved (see run_source).
"""

from __future__ import annotations

from simcore.equations.assemble import System


def extrapolated(column: int) -> str:
    """A column's extrapolated value at the end of a step."""
    return f"take1 * c1_{column} + take2 * c2_{column} + take3 * c3_{column}"


def recording(system: System, watched: list[int]) -> list[str]:
    """Each column's end, and a middle that gives the quadratic the extrapolated integral of the step: charges add up.

    Where a branch begins or ceases to conduct a voltage may jump, then or a few steps later, and the step after has to
    bring back a current that was extrapolated past zero: extrapolation would overshoot by as much as the jump. Where
    its last two orders differ by that much, all ends are those of the step in thirds, which does not overshoot.
    watched: the columns whose ends the run has worked out before
    """
    columns = range(len(system.columns))
    lines = ["if record > 0.0:", "    out[position] = now", "    jump = 0.0"]
    lines.append("    if order == 3 and (kink > 0.0 or uneven > 0):")
    for i in columns:
        if system.columns[i].branch is None:
            difference = f"abs(miss1 * c1_{i} + miss2 * c2_{i} + miss3 * c3_{i})"
            lines += [f"        if {difference} > jump_size:", "            jump = 1.0"]
    lines.append("        pass")
    for i in columns:
        mean = f"mean1 * c1_{i} + mean2 * (m2_{i} + c2_{i}) + mean3 * (m3_{i} + c3_{i})"
        known = f"q{watched.index(i)}" if i in watched else extrapolated(i)
        lines += [
            f"    r = {known} if jump == 0.0 else c3_{i}",
            f"    out[position + {1 + 2 * i}] = {mean} - 0.25 * (l{i} + r)",
            f"    out[position + {2 + 2 * i}] = r",
            f"    l{i} = r",
        ]
    ending = 1 + 2 * len(columns)
    return [*lines, f"    out[position + {ending}] = max(kink, jump)", f"    position += {ending + 1}"]
