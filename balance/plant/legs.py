"""Legs that give, as the plant has them: their row for the kernel, where they balance, and what they make of the modes.

What firmware can measure is the trunk, so a law feeds back what stiff legs have; poles, margins and trials are those of the
machine as it is.  Equations: `kernel.legs`.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import atan2, cos, inf, isfinite, isinf, log, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.machine.legs import LegCompliance

Array = NDArray[np.float64]


@dataclass(frozen=True)
class LegModes:
    """What the give of the legs does to one stance, from the eigenvalues of the linear model without any law."""

    hinge: float          # m above the line
    stiffness: float      # N·m/rad
    critical: float       # N·m/rad: m g c L/(L + c); below it there are two unstable poles
    unstable: Array       # rad/s, all poles in the right half plane, largest first
    mode: float           # rad/s: the slowest oscillation, |s|; inf where nothing oscillates
    damping: float        # its damping ratio


def legs_parameters(give: LegCompliance, body: Array, free: float) -> Array:
    """Return the legs' row of the kernel, (UNIT_SIZE,); `free`: J_rest in kg·m².

    HINGE_MODE is √(k J/(m L² I)) or d J/(m L² I), whichever is faster, with J = J_rest and I = J_rest − m h².
    """
    row = np.zeros(at.UNIT_SIZE)
    row[at.KIND], row[at.ROLE], row[at.OWN_INERTIA] = at.WHEEL, at.LEGS, 1.0
    row[at.HINGE], row[at.HINGE_STIFFNESS], row[at.HINGE_DAMPING] = give.height, give.stiffness, give.damping
    m, h = body[at.MASS], body[at.HEIGHT]
    yields = free / (m * give.height**2 * (free - m * h * h))               # rad/s² per N·m between the two
    row[at.HINGE_MODE] = max(sqrt(give.stiffness * yields), give.damping * yields)
    return row


def critical_stiffness(body: Array, legs: Array) -> float:
    """Return k_crit = m g c L/(L + c) in N·m/rad with c = h − L: upright, no offset; below it two poles are unstable."""
    h, L = body[at.HEIGHT], legs[at.HINGE]
    return float(body[at.MASS] * body[at.GRAVITY] * (h - L) * L / h)


def balance_on(body: Array, legs: Array, torque: float = 0.0, on_legs: float = 0.0) -> tuple[float, float]:
    """Return (ψ, χ) in rad at which gravity balances constant torques (N·m) on trunk and legs; NaN: nowhere near.

    m g (c sin ψ + δ cos ψ) − k(ψ − χ) + torque = 0,  m g L sin χ + k(ψ − χ) + torque on the legs = 0, by Newton's rule.
    """
    weight, L, k = body[at.MASS] * body[at.GRAVITY], legs[at.HINGE], legs[at.HINGE_STIFFNESS]
    c, d = body[at.HEIGHT] - L, body[at.OFFSET]
    psi = chi = -atan2(d, body[at.HEIGHT])
    for _ in range(60):
        miss = np.array([weight * (c * sin(psi) + d * cos(psi)) - k * (psi - chi) + torque,
                         weight * L * sin(chi) + k * (psi - chi) + on_legs])
        slope = np.array([[weight * (c * cos(psi) - d * sin(psi)) - k, k], [k, weight * L * cos(chi) - k]])
        step = np.linalg.solve(slope, miss)
        psi, chi = psi - float(step[0]), chi - float(step[1])
        if not max(abs(psi), abs(chi)) < 1.5:
            return float("nan"), float("nan")
        if np.abs(step).max() < 1e-13:
            break
    return psi, chi


def add_legs(body: Array, legs: Array, M: Array, F: Array) -> None:
    """Write the legs into mass matrix M (the last row and column are theirs) and slopes F, in place.

    Columns of F: lean, lean rate, …, legs' lean, legs' rate; linear about the balance, where all rates are zero.
    """
    m, weight, L = body[at.MASS], body[at.MASS] * body[at.GRAVITY], legs[at.HINGE]
    h, d, drag = body[at.HEIGHT], body[at.OFFSET], body[at.BODY_DRAG]
    k, damping = legs[at.HINGE_STIFFNESS], legs[at.HINGE_DAMPING]
    psi, chi = balance_on(body, legs)
    if not isfinite(psi):
        psi = chi = float(body[at.BALANCED])
    M[0, 0] += m * L * (L - 2.0 * h)
    M[0, -1] = M[-1, 0] = m * L * ((h - L) * cos(psi - chi) - d * sin(psi - chi))
    M[-1, -1] = m * L * L
    lean, rate, legs_lean, legs_rate = 0, 1, -2, -1
    F[0, lean] = weight * ((h - L) * cos(psi) - d * sin(psi)) - k
    F[0, legs_lean] = F[-1, lean] = k
    F[-1, legs_lean] = weight * L * cos(chi) - k
    F[0, rate], F[0, legs_rate], F[-1, rate], F[-1, legs_rate] = -damping, damping, damping, -damping - drag


def leg_modes(A: Array, body: Array, legs: Array) -> LegModes:
    """Return the modes of a machine on legs that give; A (n, n) is its linear model."""
    poles = np.linalg.eigvals(A).astype(np.complex128)
    unstable = np.sort(poles.real[poles.real > 1e-9])[::-1]
    swings = poles[poles.imag > 1e-6 * np.abs(poles).max()]
    slowest = swings[np.argmin(np.abs(swings))] if len(swings) else None
    mode = float(abs(slowest)) if slowest is not None else inf
    ratio = float(-slowest.real / mode) if slowest is not None and not isinf(mode) else 0.0
    return LegModes(float(legs[at.HINGE]), float(legs[at.HINGE_STIFFNESS]), critical_stiffness(body, legs), unstable, mode,
                    ratio)


def doubling(pole: float) -> float:
    """Return ln 2/p in s; inf without an unstable pole."""
    return log(2.0) / pole if pole > 0.0 else inf


def bound_scales(A: Array, trunk: Array, legs: Array, share: float, stiff: float) -> tuple[float, ...] | None:
    """Return (p, rad of lean, rad/s of lean rate, N·m·s of a push) per N·m·s of p-discounted torque; None: no such mode.

    Along an unstable mode with left eigenvector ℓ, ż = p z + ℓ·b T: what can be caught is |ℓ x₀| < |ℓ·b| ∫ e^{−ps} T ds,
    with b the column of a torque on the trunk, x₀ a machine that leans or turns as one stiff piece, or was just pushed with
    `share` of the moment on the legs.  The mode is the toppling: the real one nearest to the pole on stiff legs, `stiff`.
    A second unstable mode only makes it harder.
    """
    values, left = np.linalg.eig(A.T)
    real = np.flatnonzero((np.abs(values.imag) <= 1e-9 * np.abs(values)) & (values.real > 0.0))
    if not len(real):
        return None
    at_ = int(real[np.argmin(np.abs(np.log(values.real[real] / stiff)))])
    row = left[:, at_].real
    able = abs(float(row @ trunk))
    starts = (row[0] + row[-2], row[1] + row[-1], float(row @ ((1.0 - share) * trunk + share * legs)))
    return (float(values[at_].real), *(float(able / abs(x)) for x in starts))
