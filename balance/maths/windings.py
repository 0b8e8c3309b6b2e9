"""Heat of a winding: root-mean-square torque, rise over the ambient with copper's own coefficient, time at overload."""

from __future__ import annotations

from collections.abc import Sequence
from math import inf, log, sqrt

COPPER = 0.00393
"""1/K: growth of copper's resistance, from its value at the ambient (standard tables; IEC 60034-1 uses 1/(235 + t))."""


def rms(spells: Sequence[tuple[float, float]]) -> float:
    """Return the root mean square of (duration in s, value) pairs."""
    time = sum(duration for duration, _ in spells)
    return sqrt(sum(duration * value * value for duration, value in spells) / time)


def rise(current: float, resistance: float, thermal: float, coefficient: float = 0.0) -> float:
    """Return the steady rise of the winding in K; inf where it runs away.

    current: RMS in A; resistance in ohm at the ambient; thermal: winding to ambient in K/W.  With copper's
    `coefficient` k (1/K) the heat grows with the rise: ΔT = P R_th/(1 − k P R_th).
    """
    cold = current * current * resistance * thermal
    left = 1.0 - coefficient * cold
    return cold / left if left > 0.0 else inf


def overload_time(times: float, constant: float) -> float:
    """Return how long `times` the nominal current is borne from cold in s: τ ln(n²/(n² − 1)); inf up to nominal."""
    square = times * times
    return constant * log(square / (square - 1.0)) if square > 1.0 else inf
