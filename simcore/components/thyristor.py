"""A thyristor: a junction that conducts only once fired, until its current falls below the holding current.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math

from grammar.quantities import AMPERE, ANGLE, VOLT
from simcore.components.diode import DIODE_KEYS, check_law
from simcore.components.frame import UNLIMITED, Frame
from simcore.components.junction import BLOCKED, Junction, describe
from simcore.components.kind import Key, Kind
from simcore.components.part import Part


def _build(frame: Frame, part: Part) -> None:
    """The gate is driven from the firing angle after the reference's upward zero crossing until it has come down again,
    by a little below zero, so that what commutation does to it does not count: an overlap that lifts the reference to
    zero for a while is withdrawn as it ends. While the gate is driven, and then while the current is above the holding
    current, the forward law holds."""
    conducts = frame.flag(part, "conducts", False)
    gate = frame.flag(part, "gate", False)
    above = frame.flag(part, "reference", True)
    Junction(frame, part, conducts.choose(1.0, BLOCKED)).stamp()
    current = frame.sensed_port(part, part.ports[0])
    reference = frame.sense(part.given("firing_reference"))
    turns = part.given("firing_angle") / (2.0 * math.pi)
    fires = [(above, True), (gate, True)]
    frame.threshold(part, reference, 0.0, armed=[(above, False)], sets=fires, turns=turns)
    driven = [(gate, True), (conducts, False)]
    frame.threshold(part, [current], -UNLIMITED, armed=driven, sets=[(conducts, True)])
    falling = [term.times(-1.0) for term in reference]
    below = [(above, False), (gate, False)]
    frame.threshold(part, falling, frame.small_voltage, armed=[(above, True)], sets=below)
    holding = -part.value("holding_current")
    armed = [(gate, False), (conducts, True)]
    frame.threshold(part, [current.times(-1.0)], holding, armed=armed, sets=[(conducts, False)])


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
)
