"""Why a study was not solved: an enumeration, each with its sentence and cure."""

from __future__ import annotations

from enum import Enum


class Reason(Enum):
    """What stopped a solve; the value is (sentence, cure)."""

    NO_CONVERGENCE = (
        "the Newton iteration does not converge",
        "look for a diode law with extreme values, or for parts that contradict one another at this instant",
    )
    SINGULAR = (
        "the equations have no unique solution",
        "look for nodes that nothing ties to the rest, or ideal parts in a loop",
    )
    NOT_SETTLED = (
        "no periodic steady state was reached",
        "ask for a looser accuracy, or use a transient study with last = n",
    )
    NO_PERIOD = (
        "the sources have no common period",
        "give the study a period, or use an operating_point or transient study",
    )
    NOT_WHOLE = (
        "the period is no whole number of the sources' periods",
        "leave the period out, or give a multiple of theirs",
    )
    CHATTER = (
        "parts switch one another on and off without end",
        "set the level that closes or starts them further from the one that opens or stops them, or describe what "
        "holds the voltage meanwhile, such as a capacitor beside a load",
    )
    KIRCHHOFF = (
        "the currents at a node do not add up to zero",
        "ask for more accuracy, or look for parts whose values lie far out of proportion to the others",
    )
    RUNAWAY = (
        "thermal runaway: a junction finds no temperature at which its loss is carried away",
        "give it a smaller thermal_resistance, less leakage or less voltage",
    )
    WORK = (
        "the work bound was reached",
        "shorten the duration or ask for a looser accuracy",
    )


class NoSolution(Exception):
    """A study that cannot be solved.

    study: its name; reason; time: of the study in s, None where it has no meaning; detail: what more is known, "" for
    none
    """

    def __init__(self, study: str, reason: Reason, time: float | None = None, detail: str = ""):
        self.study, self.reason, self.time, self.detail = study, reason, time, detail
        sentence, cure = reason.value
        where = "" if time is None else f" at {time:.6g} s"
        more = f" ({detail})" if detail else ""
        super().__init__(f"{study}: {sentence}{where}{more}; cure: {cure}")
