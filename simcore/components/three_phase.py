"""A three-phase set: three sources a third of a period apart between its phases and a star point.

Knows the keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math
from dataclasses import replace

from grammar.quantities import NONE, WATT
from simcore.components.frame import Frame
from simcore.components.kind import Key, Kind
from simcore.components.part import Part
from simcore.components.source import IMPEDANCE_KEYS, WAVEFORM_KEYS, check_waveform, describe, waveform

_IN_VOLTS = tuple(replace(key, alternatives=()) for key in WAVEFORM_KEYS)

_SET_KEYS = (
    Key(
        "sequence",
        "order in which the phases reach their peaks",
        NONE,
        form="word",
        words=("positive", "negative"),
        default="positive",
    ),
    Key("unbalance", "factor on each phase's amplitude", NONE, form="ratio", low=0.0),
    Key(
        "short_circuit_power",
        "three-phase short-circuit power, from which the series impedance follows",
        WATT,
        low=0.0,
        open_low=True,
    ),
    Key("reactance_ratio", "reactance over resistance of that impedance", NONE, low=0.0),
)


def _check(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    faults = check_waveform(given)
    sine = given.get("sine")
    if isinstance(sine, tuple) and not sine[2]:
        cure = "Write `line rms`, `phase rms`, `line peak` or `phase peak` after the value."
        faults.append(("sine", "the amplitude does not say whether it is line or phase", cure))
    if isinstance(sine, tuple) and sine[2] == "line" and len(sine[0]) != 1:
        faults.append(("sine", "a line amplitude is one value for the set", "Give one value, and `unbalance`."))
    if isinstance(sine, tuple) and len(sine[0]) not in (1, 3):
        faults.append(("sine", "its sine has neither one value nor three", "Give one value, or one for each phase."))
    for key, other in (("short_circuit_power", "reactance_ratio"), ("reactance_ratio", "short_circuit_power")):
        if key in given and other not in given:
            faults.append((key, f"{key} is given without {other}", f"Add `{other}`: the impedance follows from both."))
    for key in ("series_resistance", "series_inductance"):
        if key in given and "short_circuit_power" in given:
            faults.append(
                (key, f"{key} is given beside short_circuit_power", "Give the impedance once: leave one out.")
            )
    if "short_circuit_power" in given and "sine" not in given:
        faults.append(("short_circuit_power", "short_circuit_power is given without a sine", "Add `sine`."))
    return faults


def _impedance(part: Part) -> tuple[float, float]:
    """Resistance and inductance of a phase: as given, or from Z = U^2 / S and X / R (IEC 60909-0, from memory)."""
    power = part.given("short_circuit_power")
    if power is None:
        return part.given("series_resistance"), part.given("series_inductance")
    values, measure, of = part.given("sine")
    line = values[0] * (1.0 if measure == "rms" else math.sqrt(0.5)) * (1.0 if of == "line" else math.sqrt(3.0))
    impedance, ratio = line * line / power, part.given("reactance_ratio")
    resistance = impedance / math.hypot(1.0, ratio)
    return resistance, ratio * resistance / (2.0 * math.pi * part.given("frequency"))


def _build(frame: Frame, part: Part) -> None:
    """The second phase lags the first by a third of a period, in a negative sequence it leads."""
    resistance, inductance = (frame.parameter(number, positive=True) for number in _impedance(part))
    third = 2.0 * math.pi / 3.0 * (1.0 if part.given("sequence") == "positive" else -1.0)
    unbalance = part.given("unbalance") or (1.0, 1.0, 1.0)
    sine = part.given("sine")
    factor = math.sqrt(1.0 / 3.0) if sine is not None and sine[2] == "line" else 1.0
    for port in part.ports:
        index = port.index
        frame.series(
            part,
            part.across(port),
            port=port.name,
            resistance=resistance,
            inductance=inductance,
            source=waveform(frame, part, factor * unbalance[index], index * third, index),
        )


THREE_PHASE = Kind(
    "three_phase",
    "three-phase set, star connected; the star point is brought out where one is named",
    "set",
    _IN_VOLTS + IMPEDANCE_KEYS + _SET_KEYS,
    check=_check,
    build=_build,
    describe=describe,
)
