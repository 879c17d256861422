"""A junction diode: the exponential law at its temperature, behind a series resistance.

Knows its keys and the rules between them, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math

from grammar.quantities import AMPERE, COULOMB, FARAD, I2T, KELVIN, KELVIN_PER_WATT, NONE, OHM, SECOND, VOLT
from simcore.components.frame import Frame, Part
from simcore.components.kind import Key, Kind
from simcore.equations.values import Value, exp, log

BOLTZMANN_OVER_CHARGE = 1.380649e-23 / 1.602176634e-19
"""k / q in V/K (SI, exact since 2019)."""

LEAK = 1e-12
"""Conductance in S across every junction, so that a node between blocked diodes stays defined."""

_FORWARD = (
    Key(
        "forward",
        "points of the forward curve, to which the law is fitted",
        VOLT,
        form="curve",
        at=AMPERE,
        low=0.0,
        open_low=True,
        available=False,
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
        available=False,
    ),
    Key("breakdown_voltage", "reverse voltage of breakdown", VOLT, low=0.0, open_low=True, available=False),
    Key(
        "junction_capacitance",
        "junction capacitance at a reverse voltage",
        FARAD,
        form="point",
        at=VOLT,
        low=0.0,
        available=False,
    ),
    Key("built_in_voltage", "built-in voltage of the junction", VOLT, low=0.0, open_low=True, available=False),
    Key("capacitance_exponent", "exponent of the capacitance law", NONE, low=0.0, high=1.0, available=False),
    Key(
        "recovery_charge",
        "charge swept out when a current is commutated",
        COULOMB,
        form="point",
        at=AMPERE,
        low=0.0,
        available=False,
    ),
    Key("carrier_lifetime", "lifetime of the stored carriers", SECOND, low=0.0, open_low=True, available=False),
)

_THERMAL = (
    Key("thermal_resistance", "thermal resistance from junction to ambient", KELVIN_PER_WATT, low=0.0, available=False),
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
    Key("rated_surge_current", "single surge of current it stands", AMPERE, low=0.0, open_low=True, rating=True),
    Key("rated_i2t", "integral of the squared surge it stands", I2T, low=0.0, open_low=True, rating=True),
    Key("rated_junction_temperature", "junction temperature it stands", KELVIN, low=0.0, open_low=True, rating=True),
)

DIODE_KEYS = _FORWARD + _REVERSE + _THERMAL + _ARRAY + _RATINGS


def check_law(given: dict[str, object]) -> list[tuple[str | None, str, str]]:
    """A law must be given in full: none is assumed."""
    law = ("saturation_current", "ideality_factor")
    if "forward" in given or all(key in given for key in law):
        return []
    for key, other in (law, law[::-1]):
        if key in given:
            return [(key, f"{key} is given without {other}", f"Add `{other}`: the law needs both.")]
    cure = (
        "Name a data sheet in the value's place, or give `saturation_current` and `ideality_factor`: no law is assumed."
    )
    return [(None, "it has no law", cure)]


def saturation_current(frame: Frame, part: Part) -> Value:
    """Saturation current at the temperature the diode runs at.

    I_S(T) = I_S(T_0) (T/T_0)^(r/n) exp[(E_g/(n k)) (1/T_0 - 1/T)], from n_i^2 ~ T^3 exp(-E_g/kT).
    Source: Sze, Ng, Physics of Semiconductor Devices, 2007 (from memory); the exponents are divided by the ideality
    factor.
    """
    hot, cold = part.temperature(), part.given("data_temperature")
    current = part.value("saturation_current")
    if hot == cold:
        return current
    ratio = frame.parameter(hot / cold, positive=True)
    energy = frame.parameter(part.given("bandgap") / BOLTZMANN_OVER_CHARGE * (1.0 / cold - 1.0 / hot))
    exponent = part.value("temperature_exponent") * log(ratio) + energy
    return current * exp(exponent / part.value("ideality_factor"))


def _build(frame: Frame, part: Part) -> None:
    """i = I_S (exp(v/(n V_T)) - 1) at the junction, V_T = k T/q (Shockley, Bell System Technical Journal 28, 1949)."""
    port = part.ports[0]
    series, parallel = part.value("in_series"), part.value("in_parallel")
    thermal = frame.parameter(BOLTZMANN_OVER_CHARGE * part.temperature(), positive=True)
    scale = part.value("ideality_factor") * thermal * series
    saturation = saturation_current(frame, part) * parallel
    resistance = part.value("series_resistance") * series / parallel
    junction = part.across(port)
    if resistance.constant != 0.0:
        inner = f"{part.name}.inner"
        frame.series(part, {port.a: 1.0, inner: -1.0}, resistance=resistance)
        junction = {inner: 1.0, port.b: -1.0}
    frame.nonlinear(
        part,
        junction,
        lambda voltage: saturation * (exp(voltage / scale) - 1.0) + LEAK * voltage,
        scale=scale,
        critical=scale * log(1.0 + scale / (math.sqrt(2.0) * saturation)),
    )


DIODE = Kind(
    "diode",
    "junction diode, conducting from its first terminal to its second",
    "branch",
    DIODE_KEYS,
    check=check_law,
    build=_build,
)
