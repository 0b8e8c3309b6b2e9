"""Residual unbalance of a rotor: ISO 21940-11 grades, the force they leave, what an accelerometer sees of it."""

from __future__ import annotations

from math import pi


def offset_allowed(grade: float, speed: float) -> float:
    """Return the permissible offset of the centre of mass from the axis in m: e = G/ω (ISO 21940-11).

    grade: e·ω in m/s (G6.3 is 6.3e-3); speed: ω in rad/s.
    """
    return grade / speed


def residual(grade: float, speed: float, mass: float) -> float:
    """Return the permissible residual unbalance in kg·m: U = e m."""
    return offset_allowed(grade, speed) * mass


def shaking_force(grade: float, speed: float, mass: float, at: float | None = None) -> float:
    """Return the turning force in N that a rotor balanced for `speed` makes at the speed `at` (rad/s): U ω²."""
    now = speed if at is None else at
    return residual(grade, speed, mass) * now * now


def aliased(speed: float, rate: float) -> float:
    """Return the frequency in Hz, 0 to rate/2, at which a turning of `speed` (rad/s) shows when sampled at `rate` (Hz)."""
    turns = speed / (2.0 * pi)
    return abs(turns - rate * round(turns / rate))
