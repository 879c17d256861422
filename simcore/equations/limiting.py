"""When the iterate of a nonlinear branch counts as converged, and how far it may move: lines of the emitted run.

In them v#, n# are the branch's voltage before and after an iteration; b#, o#, k#, w# the agreement that is asked for,
the voltage below which it is off, the critical one, and the scale of its law.
"""

from __future__ import annotations

from simcore.equations.assemble import Junction
from simcore.equations.run_interface import BEYOND, ROUNDING


def limited(junction: Junction, index: int, slope: str, straight: str) -> list[str]:
    """The lines for a branch; slope, straight: names of these values of its law."""
    stands_straight = [f"        or {straight} > 0.0"] if junction.straight.constant != 0.0 else []
    carries_nothing = f"        or (n# <= k# and abs(d) * {slope} <= noise)"
    return (_both_ways if junction.flattens else _one_way)(index, [carries_nothing, *stands_straight])


def _one_way(index: int, more: list[str]) -> list[str]:
    """Convergence in units of the law's scale; an off branch and what rounding moves are ignored, NaN is not. What is
    true most often is asked first.
    A voltage that rises past the critical one moves by the logarithm of the step (common practice, no source), and
    never so far that an iteration that runs away overflows: it fails, and a shorter step is tried."""
    return [
        "if not (n# < o# and v# < o#):",
        "    d = n# - v#",
        "    if not (",
        "        -b# <= d <= b#",
        "        or (n# < 0.0 and v# < 0.0 and -slack * w# <= d <= slack * w#)",
        f"        or abs(d) <= {ROUNDING!r} * abs(n#)",
        *more,
        "    ):",
        "        good = False",
        f"        stuck = {index + 1}",
        "        if n# > k# and d > 0.0:",
        "            if v# > 0.0:",
        f"                n# = min(v# + w# * log(1.0 + d / w#), k# + {BEYOND!r} * w#)",
        "            else:",
        "                n# = w# * log(n# / w#)",
    ]


def _both_ways(index: int, more: list[str]) -> list[str]:
    """A law that flattens on both sides of 0 V is off on neither. From one flat part the iteration leaps to the other
    and back for ever, so it stops at 0 V first, from where it climbs a concave law without passing the solution."""
    return [
        "d = n# - v#",
        "if not (",
        "    -b# <= d <= b#",
        f"    or abs(d) <= {ROUNDING!r} * abs(n#)",
        *(line[4:] for line in more),
        "):",
        "    good = False",
        f"    stuck = {index + 1}",
        "    if n# * v# < 0.0:",
        "        n# = 0.0",
    ]
