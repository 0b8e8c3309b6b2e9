"""Legs that give: between the contact line and the trunk a hinge of stated height, stiffness and damping.

Point feet pass no torque about the line, so what gives stands above them. The legs are taken as massless up to the hinge
and all mass as the trunk's. Coordinates: ψ the trunk's lean (X[0], so that units, sensors and verdicts stay what they
are), χ the legs' lean. They are eliminated from the body's row exactly as a wheel is.
Lagrange's equations with Δ = ψ − χ, hinge at L, centre of mass c = h − L above it and δ outward::

    [J − 2 m h L + m L²] ψ̈ + m L (c cos Δ − δ sin Δ) χ̈ + m L (c sin Δ + δ cos Δ) χ̇² =
        m g (c sin ψ + δ cos ψ) − k Δ − d Δ̇ + torque on the trunk
    m L² χ̈ + m L (c cos Δ − δ sin Δ) ψ̈ − m L (c sin Δ + δ cos Δ) ψ̇² = m g L sin χ + k Δ + d Δ̇ − b χ̇ + torque on the legs

(derived anew in tests/kernel/test_legs.py).  Below k = m g c L/(L + c) both ways of falling are unstable.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined
from balance.kernel.layout import (
    BODY_DRAG,
    GRAVITY,
    HEIGHT,
    HINGE,
    HINGE_DAMPING,
    HINGE_STIFFNESS,
    KIND,
    LEGS,
    MASS,
    OFFSET,
    ROLE,
    WHEEL,
)

Array = NDArray[np.float64]


@inlined
def legs_row(units: Array) -> int:
    """Return the row of legs that give: the last, or the one before the supply's; -1: the legs are stiff."""
    count = units.shape[0]
    for i in range(max(count - 2, 0), count):
        if units[i, KIND] == WHEEL and units[i, ROLE] == LEGS:
            return i
    return -1


@inlined
def legs_mass(flex: float, mass: float, height: float, offset: float, hinge: float) -> tuple[float, float, float]:
    """Return (what J gains in the trunk's row, what couples the rows, the legs' own) in kg·m² at Δ = `flex` rad."""
    across = (height - hinge) * np.cos(flex) - offset * np.sin(flex)
    return mass * hinge * (hinge - 2.0 * height), mass * hinge * across, mass * hinge * hinge


@inlined
def legs_terms(X: Array, i: int, body: Array, units: Array) -> tuple[float, float, float, float, float]:
    """Return (added inertia, torque on the trunk, coupling, own inertia, torque on the legs) of the legs in row i."""
    psi, chi, psi_dot, chi_dot = X[0], X[3 + 2 * i], X[1], X[2 + 2 * i]
    sp, cp, sc, cc = np.sin(psi), np.cos(psi), np.sin(chi), np.cos(chi)
    sine, cosine = sp * cc - cp * sc, cp * cc + sp * sc                # of Δ: the functions are the dear part
    h, d, L = body[HEIGHT] - units[i, HINGE], body[OFFSET], units[i, HINGE]
    mL = body[MASS] * L
    whirl = mL * (h * sine + d * cosine)
    spring = units[i, HINGE_STIFFNESS] * (psi - chi) + units[i, HINGE_DAMPING] * (psi_dot - chi_dot)
    on_trunk = -mL * body[GRAVITY] * sp - spring - whirl * chi_dot**2 + body[BODY_DRAG] * psi_dot
    on_legs = mL * body[GRAVITY] * sc + spring + whirl * psi_dot**2 - body[BODY_DRAG] * chi_dot
    return mL * (L - 2.0 * body[HEIGHT]), on_trunk, mL * (h * cosine - d * sine), mL * L, on_legs


@inlined
def hinge_moves(X: Array, dX: Array, units: Array) -> tuple[float, float, float, float]:
    """Return what the hinge does beyond turning with the trunk: (across, up) in m and (across, up) in m/s², world."""
    i = legs_row(units)
    if i < 0:
        return 0.0, 0.0, 0.0, 0.0
    L, psi, chi = units[i, HINGE], X[0], X[3 + 2 * i]
    sp, cp, sc, cc = np.sin(psi), np.cos(psi), np.sin(chi), np.cos(chi)
    psi_2, chi_2 = X[1] ** 2, X[2 + 2 * i] ** 2
    across = dX[2 + 2 * i] * cc - chi_2 * sc - dX[1] * cp + psi_2 * sp
    up = -dX[2 + 2 * i] * sc - chi_2 * cc + dX[1] * sp + psi_2 * cp
    return L * (sc - sp), L * (cc - cp), L * across, L * up


@inlined
def on_legs_of(lever: float, units: Array) -> float:
    """Return which share of a force's moment about the line acts on the legs: F L of F ℓ, all of it below the hinge.

    `lever` ℓ in m, inf for a couple on the trunk.
    """
    i = legs_row(units)
    return min(units[i, HINGE] / lever, 1.0) if i >= 0 else 0.0
