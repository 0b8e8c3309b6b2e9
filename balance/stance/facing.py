"""Turntables: the turn about the trunk's z that faces a gimballed flywheel to the contact line."""

from __future__ import annotations

from math import atan2, hypot

import numpy as np
from numpy.typing import NDArray

from balance.machine.stabilisers import GimballedFlywheel
from balance.maths.rotations import about, unit

Array = NDArray[np.float64]


def facing_turn(spin_axis: Array, gimbal_axis: Array, e_T: Array) -> float:
    """Return the turn ψ (rad) about the trunk's z that brings e·(g × s₀) as near to +1 as it can be.

    `spin_axis` s₀ (3,), `gimbal_axis` g (3,) and the line's direction `e_T` (3,) in the trunk's axes.  Only
    the parts square to z can be turned; where either has none the turn is zero.
    """
    acting = np.cross(gimbal_axis, spin_axis)                                # (3,)
    least = 1e-12
    if hypot(acting[0], acting[1]) < least or hypot(e_T[0], e_T[1]) < least:
        return 0.0
    return atan2(acting[0] * e_T[1] - acting[1] * e_T[0], acting[0] * e_T[0] + acting[1] * e_T[1])


def faced_axes(unit_: GimballedFlywheel, e_T: Array) -> tuple[Array, Array, Array]:
    """Return spin axis s₀ (3,), gimbal axis g (3,) as they stand over the line, and the mount's turn (3, 3).

    A fixed mount has the turn of the file (none); a turntable turns about the trunk's z through the unit's
    own centre.
    """
    s_T, g_T = unit(unit_.spin_axis), unit(unit_.gimbal_axis)
    on_table = unit_.mount is not None and unit_.mount.turntable is not None
    R = about([0.0, 0.0, 1.0], facing_turn(s_T, g_T, e_T)) if on_table else np.eye(3)
    return R @ s_T, R @ g_T, R
