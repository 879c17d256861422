"""An element as its kind's physics sees it. Knows declarations and frames, and nothing of text or solvers."""

from __future__ import annotations

from collections.abc import Hashable
from typing import Any

from simcore.components.frame import Frame
from simcore.components.kind import Kind
from simcore.design.circuit import Element, Port
from simcore.equations.values import Value


def temperature_of(element: Element, ambient: float) -> float:
    """What an element runs at, in K: its own temperature, else its ambient's, else that of the circuit (ambient)."""
    for key in ("temperature", "ambient"):
        if element.given.get(key) is not None:
            return float(element.given[key])
    return ambient


class Part:
    """One element as its kind's physics sees it: given values and defaults as numbers or as parameters of the frame."""

    def __init__(self, element: Element, kind: Kind, frame: Frame, ambient: float):
        self.name = element.name
        self.ports: tuple[Port, ...] = element.ports
        self._element = element
        self._kind = kind
        self._frame = frame
        self._ambient = ambient

    def given(self, key: str) -> Any:
        """The value of a key as the circuit holds it, else the kind's default, else None."""
        value = self._element.given.get(key)
        return self._kind.key[key].default if value is None else value

    @property
    def everything(self) -> dict[str, Any]:
        """All keys as the circuit holds them, without defaults."""
        return self._element.given

    @property
    def unit(self) -> str:
        """ "V" or "A": what a source is written in."""
        return self._element.unit

    def value(self, key: str, index: int | None = None) -> Value:
        """A key as a graph value, or one of a ratio's; zero where it is neither given nor has a default."""
        number = self.given(key)
        if index is not None and number is not None:
            number = number[index]
        declared = self._kind.key[key]
        positive = declared.low is not None and declared.low >= 0.0
        return self._frame.parameter(0.0 if number is None else number, positive)

    def temperature(self) -> float:
        """What the element runs at, in K; see temperature_of."""
        return temperature_of(self._element, self._ambient)

    @property
    def moment(self) -> float:
        """The time in the study, in s, from which the equations hold."""
        return self._frame.moment

    def across(self, port: Port) -> dict[Hashable, float]:
        """The weights of a port's voltage, a minus b."""
        return {port.a: 1.0, port.b: -1.0}
