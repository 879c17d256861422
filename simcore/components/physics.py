"""Constants and laws that several kinds share."""

from __future__ import annotations

from simcore.equations.values import Value, exp, larger, log

BOLTZMANN_OVER_CHARGE = 1.380649e-23 / 1.602176634e-19
"""k / q in V/K (SI, exact since 2019)."""

_KNEE = 0.5


def depletion_charge(voltage: Value, capacitance: Value, built_in: Value, exponent: Value) -> Value:
    """Charge of a junction's depletion layer, in C, from its capacitance at 0 V.

    C = C_0 / (1 - v / phi)^m, Q = C_0 phi / (1 - m) (1 - (1 - v / phi)^(1 - m)); above phi / 2 the capacitance goes on
    along its tangent. Source: Sze, Ng, Physics of Semiconductor Devices, 2007 (from memory); the continuation: common
    practice, no source.
    """
    share = larger(1.0 - voltage / built_in, _KNEE)
    below = capacitance * built_in / (1.0 - exponent) * (1.0 - exp((1.0 - exponent) * log(share)))
    beyond = larger(voltage - _KNEE * built_in, 0.0)
    knee = capacitance * exp(-(exponent * log(capacitance.graph.constant(_KNEE))))
    return below + knee * beyond * (1.0 + exponent * beyond / built_in)


def depletion_capacitance(voltage: Value, capacitance: Value, built_in: Value, exponent: Value) -> Value:
    """What a depletion layer's charge grows by with the voltage, in F; see depletion_charge."""
    share = larger(1.0 - voltage / built_in, _KNEE)
    beyond = larger(voltage - _KNEE * built_in, 0.0)
    return capacitance * exp(-(exponent * log(share))) * (1.0 + 2.0 * exponent * beyond / built_in)
