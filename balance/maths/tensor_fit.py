"""An inertia tensor brought into agreement with a few measured moments."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def fitted_tensor(I_com: Array, directions: Array, moments: Array) -> Array:
    """Return the tensor nearest to `I_com` (3, 3) with measured moments nᵀ I n, `directions` n (k, 3) unit.

    Nearest in the Frobenius norm, so moments that were not measured keep their CAD values; more measurements
    than a tensor has numbers, or repeated ones, meet by least squares.
    """
    n = directions
    root = np.sqrt(2.0)       # an off-diagonal number stands twice in the Frobenius norm
    rows = np.column_stack([n[:, 0] ** 2, n[:, 1] ** 2, n[:, 2] ** 2, root * n[:, 0] * n[:, 1],
                            root * n[:, 0] * n[:, 2], root * n[:, 1] * n[:, 2]])            # (k, 6)
    missing = moments - np.einsum("ki,ij,kj->k", n, I_com, n)                                # (k,)
    xx, yy, zz, xy, xz, yz = np.linalg.pinv(rows, rcond=1e-9) @ missing
    off = np.array([[0.0, xy, xz], [xy, 0.0, yz], [xz, yz, 0.0]]) / root
    return np.asarray(I_com + np.diag([xx, yy, zz]) + off)
