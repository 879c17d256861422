"""A junction diode: what its data sheet may say of it, and the rules between that.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from itertools import pairwise

from grammar.quantities import AMPERE, COULOMB, FARAD, I2T, KELVIN, KELVIN_PER_WATT, NONE, OHM, SECOND, VOLT
from simcore.components.forward_fit import NoLaw
from simcore.components.frame import Frame
from simcore.components.junction import Junction, describe, law_of, warn
from simcore.components.kind import Key, Kind
from simcore.components.part import Part

_FORWARD = (
    Key(
        "forward",
        "points of the forward curve, to which the law is fitted",
        VOLT,
        form="curve",
        at=AMPERE,
        low=0.0,
        open_low=True,
    ),
    Key("saturation_current", "saturation current of the law", AMPERE, low=0.0, open_low=True),
    Key("ideality_factor", "ideality factor of the law", NONE, low=0.01, high=20.0),
    Key("series_resistance", "resistance in series with the junction", OHM, default=0.0, low=0.0),
)

_REVERSE = (
    Key(
        "reverse_leakage",
        "reverse current at a reverse voltage",
        AMPERE,
        form="point",
        at=VOLT,
        low=0.0,
        open_low=True,
    ),
    Key(
        "breakdown_voltage",
        "reverse voltage of breakdown, with the current it holds at (else 1 mA)",
        VOLT,
        form="point",
        at=AMPERE,
        low=0.0,
        open_low=True,
        bare=True,
    ),
    Key("breakdown_resistance", "slope of the reverse curve in breakdown", OHM, default=0.0, low=0.0),
    Key(
        "junction_capacitance",
        "junction capacitance at a reverse voltage",
        FARAD,
        form="point",
        at=VOLT,
        low=0.0,
    ),
    Key("built_in_voltage", "built-in voltage of the junction", VOLT, default=0.7, low=0.0, open_low=True),
    Key("capacitance_exponent", "exponent of the capacitance law", NONE, default=0.5, low=0.05, high=0.95),
    Key(
        "recovery_charge",
        "charge swept out when a current is commutated",
        COULOMB,
        form="point",
        at=AMPERE,
        low=0.0,
    ),
    Key("carrier_lifetime", "lifetime of the stored carriers", SECOND, low=0.0, open_low=True),
)

_THERMAL = (
    Key("thermal_resistance", "thermal resistance from junction to ambient", KELVIN_PER_WATT, low=0.0),
    Key(
        "data_temperature",
        "temperature at which its values hold; else the temperature written beside them, else 25 degC",
        KELVIN,
        default=298.15,
        low=50.0,
        high=1000.0,
    ),
    Key("temperature", "temperature it runs at", KELVIN, low=50.0, high=1000.0),
    Key("ambient", "temperature around it, where it differs from the circuit's", KELVIN, low=50.0, high=1000.0),
    Key("bandgap", "band gap over the elementary charge", VOLT, default=1.12, low=0.0, open_low=True),
    Key("temperature_exponent", "power of the temperature in the saturation current", NONE, default=3.0),
)

_ARRAY = (
    Key("in_series", "equal diodes in series", NONE, default=1.0, low=1.0, high=1e6, whole=True),
    Key("in_parallel", "equal diodes in parallel", NONE, default=1.0, low=1.0, high=1e6, whole=True),
)

_RATINGS = (
    Key("rated_reverse_voltage", "repetitive reverse voltage it stands", VOLT, low=0.0, open_low=True, rating=True),
    Key("rated_mean_current", "mean forward current it stands", AMPERE, low=0.0, open_low=True, rating=True),
    Key(
        "rated_surge_current",
        "crest of the single surge it stands, with the width of its half sine (else any peak counts whole)",
        AMPERE,
        form="point",
        at=SECOND,
        low=0.0,
        open_low=True,
        rating=True,
        bare=True,
    ),
    Key(
        "surge_half_cycles",
        "crest of the surge it stands in so many half cycles in a row, one a period",
        AMPERE,
        form="series",
        at=NONE,
        low=0.0,
        open_low=True,
    ),
    Key("rated_i2t", "integral of the squared surge it stands", I2T, low=0.0, open_low=True, rating=True),
    Key("rated_junction_temperature", "junction temperature it stands", KELVIN, low=0.0, open_low=True, rating=True),
)

_ABOVE = ("reverse_leakage", "recovery_charge", "breakdown_voltage")
"""Points whose @ value may not be zero."""

DIODE_KEYS = _FORWARD + _REVERSE + _THERMAL + _ARRAY + _RATINGS


def check_law(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """A law must be given in full, and once: none is assumed."""
    law = ("saturation_current", "ideality_factor")
    if "forward" in given:
        return _check_forward(given)
    faults = _check_points(given)
    if all(key in given for key in law):
        return faults
    for key, other in (law, law[::-1]):
        if key in given:
            return [(key, f"{key} is given without {other}", f"Add `{other}`: the law needs both."), *faults]
    cure = "Name a data sheet in the value's place, or give `forward`, or `saturation_current` and `ideality_factor`."
    return [(None, "it has no law", f"{cure} No law is assumed."), *faults]


def _check_forward(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    if "saturation_current" in given:
        what = "saturation_current is given beside the forward points"
        return [("saturation_current", what, "Its law is fitted to the points: leave one of the two out.")]
    points = given["forward"]
    if not isinstance(points, tuple):
        return []
    if any(current <= 0.0 for _, current in points):
        return [("forward", "a forward point has no current above zero", "Write the points as V @ A: `0.7 V @ 10 mA`.")]
    try:
        law_of(given)
    except NoLaw as fault:
        return [("forward", str(fault), fault.cure)]
    return _check_points(given)


def _check_points(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """What stands behind an @ must be above zero, and one effect be given once."""
    faults: list[tuple[str | None, str, str]] = []
    for key in (*_ABOVE, "junction_capacitance"):
        point = given.get(key)
        if isinstance(point, tuple) and point[1] is not None and (point[1] < 0.0 or key in _ABOVE and point[1] == 0.0):
            faults.append((key, f"{key} holds at nothing above zero", "Write what it holds at behind the @."))
    if "recovery_charge" in given and "carrier_lifetime" in given:
        cure = "The lifetime follows from the charge: leave one of the two out."
        faults.append(("carrier_lifetime", "carrier_lifetime is given beside recovery_charge", cure))
    return faults + _check_surge(given)


def _check_surge(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """A surge has a width, and what more half cycles may have is never more."""
    surge, cycles = given.get("rated_surge_current"), given.get("surge_half_cycles")
    if isinstance(surge, tuple) and surge[1] is not None and not 1e-3 <= surge[1] <= 0.1:
        cure = "Write the width of its half sine behind the @: `30 A @ 10 ms`, or `8.3 ms` for 60 Hz."
        return [("rated_surge_current", "the surge is of no width that a half cycle could have", cure)]
    if not isinstance(cycles, tuple):
        return []
    if not isinstance(surge, tuple) or surge[1] is None:
        cure = "Add it with its width, such as `rated_surge_current = 30 A @ 10 ms`."
        return [("surge_half_cycles", "surge_half_cycles is given without rated_surge_current of a width", cure)]
    numbers, crests = [1.0, *(number for number, _ in cycles)], [surge[0], *(crest for _, crest in cycles)]
    rising = all(one < other or at == 0 and one == other for at, (one, other) in enumerate(pairwise(numbers)))
    if not rising or any(number != round(number) for number in numbers) or numbers[-1] > 1e4:
        cure = "Write whole numbers from 1 to 10000, rising: `[5: 20 A, 20: 12 A, 100: 8 A]`."
        return [("surge_half_cycles", "the numbers of half cycles don't rise", cure)]
    if any(one < other for one, other in pairwise(crests)):
        cure = "Start from the single surge, and let it fall with the number."
        return [("surge_half_cycles", "more half cycles are stood at a higher current", cure)]
    return []


def _build(frame: Frame, part: Part) -> None:
    Junction(frame, part).stamp()


DIODE = Kind(
    "diode",
    "junction diode, conducting from its first terminal to its second",
    "branch",
    DIODE_KEYS,
    check=check_law,
    build=_build,
    describe=describe,
    warn=warn,
)
