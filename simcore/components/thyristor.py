"""A thyristor: a junction that conducts only once fired, until its current falls below the holding current.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math

from grammar.quantities import AMPERE, ANGLE, VOLT
from simcore.components.diode import DIODE_KEYS, check_law
from simcore.components.frame import UNLIMITED, Flag, Frame, Sensed
from simcore.components.junction import BLOCKED, Junction, describe, warn
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _build(frame: Frame, part: Part) -> None:
    """While the gate is driven, and then while the current is above the holding current, the forward law holds."""
    conducts, gate = frame.flag(part, "conducts", False), frame.flag(part, "gate", False)
    Junction(frame, part, conducts.choose(1.0, BLOCKED)).stamp()
    current = frame.sensed_port(part, part.ports[0])
    _gate(frame, part, gate, current)
    driven = [(gate, True), (conducts, False)]
    frame.threshold(part, [current], -UNLIMITED, armed=driven, sets=[(conducts, True)])
    holding = -part.value("holding_current")
    armed = [(gate, False), (conducts, True)]
    frame.threshold(part, [current.times(-1.0)], holding, armed=armed, sets=[(conducts, False)])


def _gate(frame: Frame, part: Part, gate: Flag, always: Sensed) -> None:
    """The gate is driven from the firing angle after the reference's upward zero crossing until it comes down again.

    Overlaps of other valves distort the reference, so all but the crossing itself have a little to pass. A crossing is
    withdrawn where the reference falls back before it was a little above zero (an overlap lifted it to zero for a
    while); one that stood holds through a dip, and counts if the reference is above zero when the angle is over.
    always: a term of any value, for what follows from flags alone
    """
    above, stands = frame.flag(part, "reference", True), frame.flag(part, "stands", False)
    due = frame.flag(part, "due", False)
    reference = frame.sense(part.given("firing_reference"))
    falling = [term.times(-1.0) for term in reference]
    little, turns = frame.small_voltage, part.given("firing_angle") / (2.0 * math.pi)
    for terms, level, armed, sets, later in (
        (reference, 0.0, [(above, False)], [(above, True), (due, True)], turns),
        (reference, little, [(above, True), (stands, False)], [(stands, True)], 0.0),
        (falling, little, [(above, True), (stands, True)], [(above, False), (stands, False), (gate, False)], 0.0),
        (falling, little, [(above, True), (stands, False)], [(above, False), (due, False), (gate, False)], 0.0),
        ([always], -UNLIMITED, [(due, True), (above, True)], [(due, False), (gate, True)], 0.0),
        ([always], -UNLIMITED, [(due, True), (above, False)], [(due, False)], 0.0),
    ):
        frame.threshold(part, terms, level, armed=armed, sets=sets, turns=later)


THYRISTOR = Kind(
    "thyristor",
    "controlled diode",
    "branch",
    (
        *DIODE_KEYS,
        Key(
            "firing_angle",
            "angle after the upward zero crossing of the firing reference, of the first sine's period",
            ANGLE,
            low=0.0,
            high=math.pi,
            required=True,
        ),
        Key(
            "firing_reference",
            "voltage whose upward zero crossing the angle counts from; of more than 1 % of the circuit's largest",
            VOLT,
            form="expression",
            required=True,
        ),
        Key("holding_current", "current below which it stops conducting", AMPERE, default=0.0, low=0.0),
    ),
    check=check_law,
    build=_build,
    describe=describe,
    warn=warn,
)
