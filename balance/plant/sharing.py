"""How several units share one command about the line, and how their speeds are kept level without moving it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.plant.record import Unit

Array = NDArray[np.float64]

LEVELLING_TIME = 0.5
"""s: time constant in which wheels come back to one another; slow against any loop that holds the machine up."""


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
    """Return N (k, n): inputs += −N x moves no torque about the line and levels the wheels.

    Wheel speeds driven by the common command grow along d = w/e; what is off that direction is brought back with
    `LEVELLING_TIME`: N = diag(e)(I − d cᵀ/(cᵀd))/T, and cᵀ e⁻¹ N = 0 by construction (c coupling, e own inertia).
    """
    N = np.zeros((len(rows), width))
    wheels = [i for i, row in enumerate(rows) if row[at.KIND] == at.WHEEL]
    if len(rows) < 2 or not wheels:
        return N
    e, c = rows[wheels, at.OWN_INERTIA], rows[wheels, at.COUPLING]
    d = shares[wheels] / e
    along = np.outer(d, c) / (c @ d) if c @ d != 0.0 else np.zeros((len(wheels), len(wheels)))
    off = e[:, None] * (np.eye(len(wheels)) - along) / LEVELLING_TIME
    for a, i in enumerate(wheels):
        for b, j in enumerate(wheels):
            N[i, first[j]] = off[a, b]
    return N


def momentum_row(rows: Array, first: list[int], width: int) -> Array:
    """Return r (n,): stored momentum about the line q = r·x, linear; dq/dt is the torque taken from the body.

    Wheel: c Ω + c²/e θ̇ (α I (Ω + α θ̇) without gears); gimballed: count H e·(g × s₀) γ.
    """
    r = np.zeros(width)
    for row, x in zip(rows, first, strict=True):
        if row[at.KIND] == at.WHEEL:
            r[x] = row[at.COUPLING]
            r[1] += row[at.COUPLING] ** 2 / row[at.OWN_INERTIA]
        else:
            r[x] = row[at.COUNT] * row[at.MOMENTUM] * row[at.E_GXS0]
    return r
