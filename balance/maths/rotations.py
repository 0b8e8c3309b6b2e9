"""Turns and directions in three dimensions."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def turned(roll: float, pitch: float, yaw: float) -> Array:
    """Return R = Rz(yaw)·Ry(pitch)·Rx(roll), (3, 3); angles in rad (ISO 8855 order)."""
    (cr, cp, cy), (sr, sp, sy) = np.cos([roll, pitch, yaw]), np.sin([roll, pitch, yaw])
    return np.array([
        [cy * cp, cy * sp * sr - sy * cr, cy * sp * cr + sy * sr],
        [sy * cp, sy * sp * sr + cy * cr, sy * sp * cr - cy * sr],
        [-sp, cp * sr, cp * cr],
    ])


def about(axis: Sequence[float] | Array, angle: float) -> Array:
    """Return the turn by `angle` (rad) about `axis` (3,), any length but zero (Rodrigues' formula)."""
    x, y, z = unit(axis)
    K = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    return np.asarray(np.eye(3) + np.sin(angle) * K + (1.0 - np.cos(angle)) * (K @ K))


def unit(vector: Sequence[float] | Array) -> Array:
    """Return the vector (3,) at length one; ValueError for a zero vector."""
    found = np.asarray(vector, dtype=np.float64)
    length = float(np.linalg.norm(found))
    if length == 0.0:
        raise ValueError("a zero vector has no direction")
    return np.asarray(found / length)
