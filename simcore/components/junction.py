"""A junction's physics: the exponential law at its temperature with leakage, breakdown and charge, behind a resistance.

What diodes and thyristors share. Knows frames and parts, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence

from grammar.quantities import AMPERE, OHM, VOLT, show
from simcore.components.forward_fit import ForwardLaw, fit, poor
from simcore.components.frame import UNLIMITED, Frame
from simcore.components.part import Part
from simcore.components.physics import BOLTZMANN_OVER_CHARGE, depletion_capacitance, depletion_charge
from simcore.equations.values import Value, derivative, exp, larger, log, where

LEAK = 1e-12
"""Conductance in S across every junction, so that a node between blocked diodes stays defined."""

ONSET = 1e-12
"""Current in A from which the exponential law of a breakdown starts."""

BREAKDOWN_CURRENT = 1e-3
"""Current in A at which a breakdown voltage holds where none is said (common practice, no source)."""

Capacitance = tuple[Value, Value, Value]
Law = Callable[[Value, Value], tuple[Value, Value, dict[str, Value]]]


def law_of(given: dict[str, object]) -> ForwardLaw:
    """The forward law at the data temperature: as given, or fitted to the forward points. Raises NoLaw."""
    resistance, points = given.get("series_resistance"), given.get("forward")
    factor = given.get("ideality_factor")
    if isinstance(points, tuple):
        temperature = given.get("data_temperature")
        return fit(
            points,
            temperature if isinstance(temperature, float) else 298.15,
            factor if isinstance(factor, float) else None,
            resistance if isinstance(resistance, float) else None,
        )
    saturation = given["saturation_current"]
    assert isinstance(saturation, float) and isinstance(factor, float)
    return ForwardLaw(saturation, factor, resistance if isinstance(resistance, float) else 0.0, ())

BLOCKED = 1e-30
"""Share of its forward current that a junction carries while it is not fired: nothing, yet known to be above zero."""

SMALL_CURRENT = 1e-5
"""Forward current in A whose stored charge needs no accuracy before the circuit has carried more than a hundred times
as much."""


class Junction:
    """The junction of a part in a frame; conducts: 1 while its forward law holds, else BLOCKED (None: always 1)."""

    def __init__(self, frame: Frame, part: Part, conducts: Value | None = None):
        self._frame, self._part, self._conducts = frame, part, conducts
        law = law_of(part.everything)
        self.series, self.parallel = part.value("in_series"), part.value("in_parallel")
        self._factor = frame.parameter(law.ideality_factor, positive=True)
        self._thermal = frame.parameter(BOLTZMANN_OVER_CHARGE * part.temperature(), positive=True)
        self.scale = self._factor * self._thermal * self.series
        self._warming = self._warmed()
        single = frame.parameter(law.saturation_current, positive=True) * self._warming
        self.saturation = single * self.parallel
        self._exponent = log(self.saturation)
        self.leak = LEAK + self._leak(law.saturation_current) * self._warming * (self.parallel / self.series)
        self.resistance = frame.parameter(law.series_resistance, positive=True) * self.series / self.parallel

    def _warmed(self) -> Value:
        """Saturation current at the temperature it runs at over that at the data's.

        I_S(T) = I_S(T_0) (T/T_0)^(r/n) exp[(E_g/(n k)) (1/T_0 - 1/T)], from n_i^2 ~ T^3 exp(-E_g/kT).
        Source: Sze, Ng, Physics of Semiconductor Devices, 2007 (from memory); the exponents are divided by the
        ideality factor.
        """
        part, frame = self._part, self._frame
        hot, cold = part.temperature(), part.given("data_temperature")
        if hot == cold:
            return frame.graph.one
        energy = frame.parameter(part.given("bandgap") / BOLTZMANN_OVER_CHARGE * (1.0 / cold - 1.0 / hot))
        exponent = part.value("temperature_exponent") * frame.parameter(math.log(hot / cold)) + energy
        return exp(exponent / self._factor)

    def _leak(self, saturation: float) -> Value:
        """Conductance in S of a diode that carries what its reverse leakage exceeds its saturation current by."""
        point = self._part.given("reverse_leakage")
        excess = 0.0 if point is None else max(0.0, (point[0] - saturation) / point[1])
        return self._frame.parameter(excess, positive=True)

    def stamp(self) -> None:
        """Add it to the frame, from the part's first terminal to its second."""
        frame, part, port = self._frame, self._part, self._part.ports[0]
        anode: Hashable = port.a
        if self.resistance.constant != 0.0:
            anode = f"{part.name}.inner"
            frame.series(part, {port.a: 1.0, anode: -1.0}, resistance=self.resistance)
        weights = {anode: 1.0, port.b: -1.0}
        steep = self.scale * log(1.0 + self.scale / (math.sqrt(2.0) * self.saturation))
        straight = frame.graph.zero
        if self._conducts is not None:
            steep, straight = where(self._conducts - 0.5, steep, UNLIMITED), 0.5 - self._conducts
        lifetime, capacitance = self._lifetime(), self._capacitance()
        manner = {"scale": self.scale, "critical": steep, "leak": self.leak}
        if lifetime is None and capacitance is None:
            frame.nonlinear(part, weights, self._law, straight=straight, **manner)
        else:
            small = self._small(lifetime, capacitance)
            law, rises = self._charged(lifetime, capacitance), self._rises(lifetime, capacitance)
            frame.carrying(part, weights, law, quantity="charge", small=small, slope=rises, **manner)
        self._breakdown(anode, port.b)

    def _law(self, voltage: Value) -> Value:
        """i = I_S (exp(v/(n V_T)) - 1), V_T = k T/q (Shockley, Bell System Technical Journal 28, 1949); I_S stands in
        the exponent, where it costs an addition."""
        inverse = 1.0 / self.scale
        if self._conducts is not None:
            return self._conducts * (exp(self._conducts * voltage * inverse + self._exponent) - self.saturation)
        return exp(voltage * inverse + self._exponent) - self.saturation

    # --- charge ---

    def _lifetime(self) -> Value | None:
        """Of the stored carriers, in s: as given, or recovery charge over the forward current it was stored by."""
        point = self._part.given("recovery_charge")
        lifetime = self._part.given("carrier_lifetime") if point is None else point[0] / point[1]
        return None if not lifetime else self._frame.parameter(lifetime, positive=True)

    def _capacitance(self) -> Capacitance | None:
        """Capacitance of one diode at 0 V in F, built-in voltage in V, exponent; None where it has none."""
        point = self._part.given("junction_capacitance")
        if point is None or point[0] == 0.0:
            return None
        built_in, exponent = self._part.given("built_in_voltage"), self._part.given("capacitance_exponent")
        at_rest = point[0] * (1.0 + point[1] / built_in) ** exponent
        numbers = [self._frame.parameter(number, positive=True) for number in (at_rest, built_in, exponent)]
        return numbers[0], numbers[1], numbers[2]

    def _charged(self, lifetime: Value | None, capacitance: Capacitance | None) -> Law:
        """i = law + dq/dt, q = lifetime * forward current + depletion charge (charge control: Pierret, Semiconductor
        Device Fundamentals, 1996, ch. 8, from memory)."""

        def law(voltage: Value, before: Value) -> tuple[Value, Value, dict[str, Value]]:
            charge = self._frame.graph.zero
            if lifetime is not None:
                charge = lifetime * self._law(voltage)
            if capacitance is not None:
                charge = charge + self.parallel * depletion_charge(voltage / self.series, *capacitance)
            return self._law(voltage) + (charge - before) / self._frame.step, charge, {}

        return law

    def _rises(self, lifetime: Value | None, capacitance: Capacitance | None) -> Callable[[Value, Value], Value]:
        """The slope of the charged law, written so that it is known not to fall."""

        def slope(voltage: Value, before: Value) -> Value:
            rise = derivative(self._law(voltage), voltage)
            if lifetime is not None:
                rise = rise * (1.0 + lifetime / self._frame.step)
            if capacitance is not None:
                layer = depletion_capacitance(voltage / self.series, *capacitance)
                rise = rise + self.parallel / self.series * layer / self._frame.step
            return rise

        return slope

    def _small(self, lifetime: Value | None, capacitance: Capacitance | None) -> Value:
        small = self._frame.graph.zero
        if lifetime is not None:
            small = lifetime * larger(self._frame.small_current, SMALL_CURRENT)
        if capacitance is not None:
            small = small + capacitance[0] * self._frame.small_voltage
        return small

    # --- breakdown ---

    def _breakdown(self, anode: Hashable, cathode: Hashable) -> None:
        """A reverse current that grows e-fold each V_T about the breakdown voltage, behind the slope resistance."""
        frame, part = self._frame, self._part
        point = part.given("breakdown_voltage")
        if point is None:
            return
        scale, onset = self._thermal * self.series, ONSET * self.parallel
        current = frame.parameter((BREAKDOWN_CURRENT if point[1] is None else point[1]) / ONSET, positive=True)
        offset = frame.parameter(point[0], positive=True) * self.series - scale * log(current)
        slope = part.value("breakdown_resistance") * self.series / self.parallel
        start = cathode
        if slope.constant != 0.0:
            start = f"{part.name}.breakdown"
            frame.series(part, {cathode: 1.0, start: -1.0}, resistance=slope)
        frame.nonlinear(
            part,
            {start: 1.0, anode: -1.0},
            lambda voltage: onset * exp(voltage / scale),
            scale=scale,
            critical=scale * log(1.0 + scale / (math.sqrt(2.0) * onset)),
            offset=offset,
        )


def describe(given: dict[str, object]) -> list[str]:
    """For `look`: the law that was fitted and what it misses."""
    points = given.get("forward")
    if not isinstance(points, tuple):
        return []
    law = law_of(given)
    return [
        f"fitted: saturation_current = {show(law.saturation_current, AMPERE)}, ideality_factor = "
        f"{law.ideality_factor:.4g}, series_resistance = {show(law.series_resistance, OHM)}",
        *(_missed(law, points, index) for index in range(len(points))),
    ]


def warn(given: dict[str, object]) -> list[str]:
    """The worst point of a poor fit."""
    points = given.get("forward")
    if not isinstance(points, tuple):
        return []
    law = law_of(given)
    worst = poor(law, points)
    if worst is None:
        return []
    share = abs(law.misses[worst]) / points[worst][0]
    return [f"the law fits the forward points poorly: {_missed(law, points, worst)}, {100.0 * share:.2g} % of it"]


def _missed(law: ForwardLaw, points: Sequence[tuple[float, float]], index: int) -> str:
    voltage, current = points[index]
    way = "above" if law.misses[index] > 0.0 else "below"
    return f"{show(abs(law.misses[index]), VOLT, 3)} {way} {show(voltage, VOLT)} @ {show(current, AMPERE)}"
