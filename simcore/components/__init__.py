"""The component kinds, one module each, in the order of the language reference."""

from __future__ import annotations

from simcore.components.capacitor import CAPACITOR
from simcore.components.clamp import CLAMP
from simcore.components.diode import DIODE
from simcore.components.fuse import FUSE
from simcore.components.inductor import INDUCTOR
from simcore.components.inrush_limiter import INRUSH_LIMITER
from simcore.components.kind import Kind
from simcore.components.load import LOAD
from simcore.components.resistor import RESISTOR
from simcore.components.source import SOURCE
from simcore.components.switch import SWITCH
from simcore.components.three_phase import THREE_PHASE
from simcore.components.thyristor import THYRISTOR
from simcore.components.transformer import TRANSFORMER

KINDS: dict[str, Kind] = {
    kind.name: kind
    for kind in (
        SOURCE,
        THREE_PHASE,
        RESISTOR,
        CAPACITOR,
        INDUCTOR,
        TRANSFORMER,
        DIODE,
        THYRISTOR,
        SWITCH,
        LOAD,
        FUSE,
        INRUSH_LIMITER,
        CLAMP,
    )
}
