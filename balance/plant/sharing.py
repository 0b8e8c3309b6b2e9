"""How several units share one command about the line, and how what they store is kept level without moving it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.plant.record import Unit

Array = NDArray[np.float64]

LEVELLING_TIME = 0.5
"""s: time constant in which units come back to one another; slow against any loop that holds the machine up."""


def line_torque_per_input(units: Array) -> Array:
    """Return each unit's torque about the line per unit of its own input, gimbals at angle zero, (k,).

    A torque-driven gimbal makes no torque at once; it counts as 0 and can only be commanded alone.
    """
    gains = np.zeros(len(units))
    for i, row in enumerate(units):
        if row[at.KIND] == at.WHEEL:
            gains[i] = row[at.COUPLING] / row[at.OWN_INERTIA]
        elif row[at.KIND] == at.GIMBAL_SERVO:
            gains[i] = row[at.COUNT] * row[at.MOMENTUM] * row[at.E_GXS0]
    return gains


def allotment(units: tuple[Unit, ...], gains: Array) -> Array:
    """Return w (k,): inputs = w v, with v the torque about the line; one unit alone takes v as its own input.

    Shares are in proportion to what each unit can give about this line, so that all are limited together.
    """
    if len(units) == 1:
        return np.ones(1)
    able = np.array([u.torque_limit if g != 0.0 else 0.0 for u, g in zip(units, gains, strict=True)])
    if able.sum() == 0.0:
        return np.zeros(len(units))
    shares: Array = np.divide(able / able.sum(), gains, out=np.zeros(len(units)), where=gains != 0.0)
    return shares


def levelling(rows: Array, shares: Array, first: list[int], width: int) -> Array:
    """Return N (k, n): inputs += −N x moves no torque about the line and levels what the units store.

    Each levelled unit's own state (wheel speed Ω, servo's gimbal angle γ) grows by b per input: 1/e for wheels (e own
    inertia), 1 for servos.  Under the common command all grow along d = b w; what is off that direction is brought back
    with `LEVELLING_TIME`: N = diag(1/b)(I − d rᵀ/(rᵀd))/T, r the momentum per state, so rᵀ diag(b) N = 0 by construction.
    Torque-driven gimbals are left out: they can only be commanded alone.
    """
    N = np.zeros((len(rows), width))
    kept = [i for i, row in enumerate(rows) if row[at.KIND] != at.GIMBAL_TORQUE]
    if len(rows) < 2 or not kept:
        return N
    b = np.array([1.0 / rows[i, at.OWN_INERTIA] if rows[i, at.KIND] == at.WHEEL else 1.0 for i in kept])
    r = np.array([_per_state(rows[i]) for i in kept])
    d = b * shares[kept]
    along = np.outer(d, r) / (r @ d) if r @ d != 0.0 else np.zeros((len(kept), len(kept)))
    off = (np.eye(len(kept)) - along) / b[:, None] / LEVELLING_TIME
    for k, i in enumerate(kept):
        N[i, [first[j] for j in kept]] = off[k]
    return N


def _per_state(row: Array) -> float:
    """Return the momentum about the line per wheel speed (kg·m²) or per gimbal angle at zero (N·m·s/rad)."""
    return float(row[at.COUPLING] if row[at.KIND] == at.WHEEL else row[at.COUNT] * row[at.MOMENTUM] * row[at.E_GXS0])


def momentum_row(rows: Array, first: list[int], width: int) -> Array:
    """Return r (n,): stored momentum about the line q = r·x, linear; dq/dt is the torque taken from the body.

    Wheel: c Ω + c²/e θ̇ (α I (Ω + α θ̇) without gears); gimballed: count H e·(g × s₀) γ.
    """
    r = np.zeros(width)
    for row, x in zip(rows, first, strict=True):
        r[x] = _per_state(row)
        if row[at.KIND] == at.WHEEL:
            r[1] += row[at.COUPLING] ** 2 / row[at.OWN_INERTIA]
    return r
