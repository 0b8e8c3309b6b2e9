"""The tip-over axis through two feet and the plane square to it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.maths.rotations import unit

Array = NDArray[np.float64]

UP = np.array([0.0, 0.0, 1.0])


def line_axes(p_a: Array, p_b: Array) -> tuple[Array, Array, Array]:
    """Return e (from foot a to foot b), u (up, square to e) and w = e × u (horizontal), each (3,).

    A small turn +θ about e moves u toward w.  The two feet must not stand in one place or one above the
    other.
    """
    e = unit(p_b - p_a)
    u = unit(UP - e[2] * e)
    return e, u, np.cross(e, u)


def is_outward_reversed(w: Array, p_a: Array, lifted: Array) -> bool:
    """Return True when w points toward the lifted feet (n, 3) and the line must run the other way.

    All on one side decide; feet on both sides, on the line itself, or none lifted leave the order as it is.
    """
    if lifted.size == 0:
        return False
    across = (lifted - p_a) @ w                                              # (n,)
    rounding = 1e-12 * float(np.abs(np.concatenate([lifted.ravel(), p_a])).max())
    return bool(np.all(across >= -rounding) and np.any(across > rounding))
