"""What the ground must give the feet while the machine moves about the line."""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from balance.kernel.layout import FOOT_RADIUS, GRAVITY, HEIGHT, MASS, OFFSET

Array = NDArray[np.float64]


@njit(cache=True, error_model="numpy", forceinline=True)
def foot_forces(X: Array, dX: Array, body: Array) -> tuple[float, float]:
    """Return (force across the line along w, sum of the normal forces) on the whole machine in N.

    F = m(θ̈(r + z_c) − θ̇² y_c), N = m(g cos β − θ̈ y_c − θ̇² z_c), with the centre of mass at
    y_c = (h − r) sin θ + δ cos θ across and z_c = (h − r) cos θ − δ sin θ above the centres of the foot balls, which
    roll on by r θ. Wheels and gimballed rotors turn about their own centres of mass and carry no force.
    """
    s, c = np.sin(X[0]), np.cos(X[0])
    r = body[FOOT_RADIUS]
    h = body[HEIGHT] - r
    y = h * s + body[OFFSET] * c
    z = h * c - body[OFFSET] * s
    across = body[MASS] * (dX[1] * (r + z) - X[1] ** 2 * y)
    return across, body[MASS] * (body[GRAVITY] - dX[1] * y - X[1] ** 2 * z)
