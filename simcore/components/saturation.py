"""A core that saturates: its current as a polynomial of its flux, which inductors and transformers share.

Knows frames and parts, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping

from simcore.components.frame import Frame
from simcore.components.part import Part
from simcore.equations.values import Value

GAPPED, CLOSED = 3, 9
"""Power of the flux: a gapped or powder core saturates softly, a closed one of laminations hard (common practice, no
source)."""

FALLEN = 0.3
"""Share that the inductance has fallen by at the saturation current (common practice, no source)."""


class Saturation:
    """i = flux / L (1 + c / m (flux / flux_s)^(m-1)), whose inductance L / (1 + c (flux / flux_s)^(m-1)) has fallen by
    30 % at the saturation current.

    inductance: L in H; current: saturation current in A; power: m, odd. Source of the form: an odd polynomial of the
    flux, as in Duffing, Erzwungene Schwingungen bei veraenderlicher Eigenfrequenz, 1918 (from memory).
    """

    def __init__(self, frame: Frame, inductance: float, current: float, power: int):
        self._frame, self._power = frame, power
        self._excess = FALLEN / (1.0 - FALLEN)
        self._numbers = (inductance, current * inductance / (1.0 + self._excess / power))
        self.inductance, self._flux = (frame.parameter(number, positive=True) for number in self._numbers)

    def current(self, flux: Value) -> Value:
        """Current in A at a flux in V s."""
        return flux / self.inductance * (1.0 + self._excess / self._power * self._rise(flux))

    def rise(self, flux: Value) -> Value:
        """Current over flux, in A/(V s): one over the inductance left."""
        return (1.0 + self._excess * self._rise(flux)) / self.inductance

    def energy(self, flux: Value) -> Value:
        """Energy in J in the field, the integral of the current over the flux."""
        share = 2.0 * self._excess / (self._power * (self._power + 1.0))
        return flux * flux / (2.0 * self.inductance) * (1.0 + share * self._rise(flux))

    def _rise(self, flux: Value) -> Value:
        """(flux / flux_s)^(m-1), a product of squares."""
        ratio = flux / self._flux
        square, result = ratio * ratio, self._frame.graph.one
        for _ in range((self._power - 1) // 2):
            result = result * square
        return result

    def stamp(self, part: Part, weights: Mapping[Hashable, Value | float], start: float, port: str = "") -> None:
        """Add it to a frame; start: current in A at the start of a transient."""

        def law(voltage: Value, before: Value) -> tuple[Value, Value, dict[str, Value]]:
            flux = before + self._frame.step * voltage
            return self.current(flux), flux, {"energy": self.energy(flux)}

        def slope(voltage: Value, before: Value) -> Value:
            return self._frame.step * self.rise(before + self._frame.step * voltage)

        frame = self._frame
        small = self.inductance * frame.small_current
        initial = frame.parameter(self.flux_at(start))
        frame.carrying(
            part,
            weights,
            law,
            quantity="flux",
            small=small,
            initial=initial,
            scale=frame.small_voltage,
            slope=slope,
            port=port,
        )

    def flux_at(self, current: float) -> float:
        """The flux in V s at a current in A, by Newton from the side of the larger flux, where it converges."""
        inductance, knee = self._numbers
        flux = inductance * current
        for _ in range(200):
            rise = self._excess * (flux / knee) ** (self._power - 1)
            off = flux / inductance * (1.0 + rise / self._power) - current
            step = off * inductance / (1.0 + rise)
            flux -= step
            if abs(step) <= 1e-14 * abs(flux):
                break
        return flux
