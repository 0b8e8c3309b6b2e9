"""Turntables: the turn about the trunk's z that faces a stabiliser to the contact line."""

from __future__ import annotations

from math import atan2, hypot

import numpy as np
from numpy.typing import NDArray

from balance.machine.stabilisers import GimballedFlywheel, Mount, ReactionWheel
from balance.maths.rotations import about, unit

Array = NDArray[np.float64]


def facing_turn(spin_axis: Array, gimbal_axis: Array, e_T: Array) -> float:
    """Return the turn ψ (rad) about the trunk's z that brings e·(g × s₀) as near to +1 as it can be.

    `spin_axis` s₀ (3,), `gimbal_axis` g (3,) and the line's direction `e_T` (3,) in the trunk's axes.  Only
    the parts square to z can be turned; where either has none the turn is zero.
    """
    return turn_onto(np.cross(gimbal_axis, spin_axis), e_T)


def turn_onto(acting: Array, e_T: Array) -> float:
    """Return the turn (rad) about the trunk's z that brings e·acting as near to +1 as it can be (both (3,))."""
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
    R = about([0.0, 0.0, 1.0], facing_turn(s_T, g_T, e_T)) if table_rate(unit_.mount) > 0.0 else np.eye(3)
    return R @ s_T, R @ g_T, R


def faced_wheel(wheel: ReactionWheel, e_T: Array) -> Array:
    """Return a reaction wheel's axis (3,) as it stands over the line; on a turntable it is turned along it."""
    axis = unit(wheel.axis)
    return about([0.0, 0.0, 1.0], turn_onto(axis, e_T)) @ axis if table_rate(wheel.mount) > 0.0 else axis


def table_rate(mount: Mount | None) -> float:
    """Return the turntable's rate limit in rad/s; 0 for a fixed mount."""
    return mount.turntable.rate_limit if mount is not None and mount.turntable is not None else 0.0
