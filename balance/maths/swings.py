"""Inertias from swing tests, in SI (Khurmi & Gupta, "Theory of Machines", ch. 4; small swings)."""

from __future__ import annotations

from math import pi


def pendulum_inertia(mass: float, gravity: float, arm: float, period: float) -> float:
    """Return the inertia about the centre of mass of a compound pendulum whose pivot is `arm` away from it.

    I = m g d T²/4π² − m d².
    """
    return mass * arm * (gravity * period**2 / (4.0 * pi**2) - arm)


def two_pivot_arm(between: float, gravity: float, period_1: float, period_2: float) -> float:
    """Return the arm from the first of two pivots, `between` apart, to the centre of mass between them.

    One body hung from either pivot has one inertia: A h₁ − h₁² = B h₂ − h₂² with A, B = g T²/4π².  Blind
    where both arms are alike (A + B = 2 × between).
    """
    first, second = (gravity * period**2 / (4.0 * pi**2) for period in (period_1, period_2))
    return between * (second - between) / (first + second - 2.0 * between)


def bifilar_inertia(mass: float, gravity: float, arm_1: float, arm_2: float, length: float,
                    period: float) -> float:
    """Return the inertia about the vertical through the centre of mass of a body on two equal parallel wires.

    I = m g a b T²/(4π² l), a and b the wires' distances from the centre of mass, which lies between them.
    """
    return mass * gravity * arm_1 * arm_2 * period**2 / (4.0 * pi**2 * length)


def trifilar_inertia(mass: float, gravity: float, radius: float, length: float, period: float) -> float:
    """Return the inertia about the vertical through the centre of mass, hung from three wires at `radius`.

    I = m g r² T²/(4π² l); a platform's own inertia must be subtracted, and its mass is part of `mass`.
    """
    return bifilar_inertia(mass, gravity, radius, radius, length, period)


def torsion_stiffness(inertia: float, period: float) -> float:
    """Return the stiffness (N·m/rad) of a torsion wire on which a known inertia swings with `period`."""
    return 4.0 * pi**2 * inertia / period**2


def torsion_inertia(stiffness: float, period: float) -> float:
    """Return the inertia that swings with `period` on a torsion wire of known stiffness (N·m/rad)."""
    return stiffness * period**2 / (4.0 * pi**2)
