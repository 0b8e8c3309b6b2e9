"""What the machine does off its line and only the feet feel: products of inertia, axes square to the line."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.machine.machine import Machine
from balance.machine.stabilisers import ReactionWheel
from balance.plant.record import Unit
from balance.stance.record import Stance
from balance.stance.rotors import wheel_drive

Array = NDArray[np.float64]


def add_units(machine: Machine, stance: Stance, units: tuple[Unit, ...], rows: Array) -> None:
    """Write each unit's axes along u and w at θ = 0 into its row of `rows` (k, UNIT_SIZE)."""
    axes_T = np.column_stack([stance.R_WT.T @ stance.u_W, stance.R_WT.T @ stance.w_W])       # (3, 2)
    for row, unit, stabiliser in zip(rows, units, machine.stabilisers.values(), strict=True):
        if isinstance(stabiliser, ReactionWheel):
            coupled = wheel_drive(stabiliser, machine.motors).coupled
            row[[at.COUPLING_U, at.COUPLING_W]] = coupled * unit.axis_T @ axes_T
        elif unit.gimbal_axis_T is not None:
            row[[at.S0_U, at.S0_W]] = unit.axis_T @ axes_T
            row[[at.GXS0_U, at.GXS0_W]] = np.cross(unit.gimbal_axis_T, unit.axis_T) @ axes_T
            row[[at.AXIS_U, at.AXIS_W]] = unit.gimbal_axis_T @ axes_T


def add_body(stance: Stance, rows: Array, body: Array) -> None:
    """Write the products of inertia and the feet's places into `body` (BODY_SIZE,).

    The kernel adds I_t e − D σ s per gimballed rotor itself, D = I_t − what is held; the spin about s is never added.
    """
    products = np.array([stance.u_W, stance.w_W]) @ stance.I_com_W @ stance.e_W                # (2,)
    for row in rows:
        if row[at.KIND] != at.WHEEL:
            held = row[at.SPIN] - row[at.TRANSVERSE] + row[at.SPIN_HELD]
            products -= row[at.COUNT] * held * row[at.E_S0] * row[[at.S0_U, at.S0_W]]
    body[[at.PRODUCT_U, at.PRODUCT_W]] = products
    body[at.COM_ALONG] = (stance.com_W - stance.p_a_W) @ stance.e_W
    body[at.LENGTH] = stance.length if stance.joints else 0.0        # three numbers say nothing of the feet
    body[at.GRAVITY_ALONG] = -stance.gravity * stance.e_W[2]
