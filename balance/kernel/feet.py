"""What the ground must give the feet while the machine moves about the line."""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from balance.kernel.layout import GRAVITY, HEIGHT, MASS, OFFSET

Array = NDArray[np.float64]


@njit(cache=True, error_model="numpy", forceinline=True)
def foot_forces(X: Array, dX: Array, body: Array) -> tuple[float, float]:
    """Return (force across the line along w, sum of the normal forces) on the whole machine in N, point feet.

    F = m(θ̈ z_c − θ̇² y_c), N = m(g cos β − θ̈ y_c − θ̇² z_c), with the centre of mass at y_c = h sin θ + δ cos θ across
    and z_c = h cos θ − δ sin θ above the line.
    """
    s, c = np.sin(X[0]), np.cos(X[0])
    y = body[HEIGHT] * s + body[OFFSET] * c
    z = body[HEIGHT] * c - body[OFFSET] * s
    across = body[MASS] * (dX[1] * z - X[1] ** 2 * y)
    return across, body[MASS] * (body[GRAVITY] - dX[1] * y - X[1] ** 2 * z)
