"""Volumes and inertia tensors of uniform solids, per unit of mass, about their centres (standard tables).

Each function returns (volume in m³, tensor ÷ mass in m², shape (3, 3)).  Solids of revolution have z as their
axis; `laid` lays them along x or y.  Thin rods and points have no volume.
"""

from __future__ import annotations

from math import pi

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Solid = tuple[float, Array]


def box(x: float, y: float, z: float) -> Solid:
    """Return a box with sides x, y, z (m)."""
    return x * y * z, np.diag([y * y + z * z, x * x + z * z, x * x + y * y]) / 12.0


def tube(outer: float, inner: float, length: float) -> Solid:
    """Return a tube by outer and inner diameter and axial length (m); inner 0 is a full cylinder."""
    squares = (outer * outer + inner * inner) / 4.0
    across = squares / 4.0 + length * length / 12.0
    return pi * (outer * outer - inner * inner) / 4.0 * length, np.diag([across, across, squares / 2.0])


def rim_and_web(outer: float, inner: float, length: float, web: float, bore: float) -> Solid:
    """Return a rim (a tube) and a web (a disc from bore to rim) of one density, both centred (m)."""
    rim_volume, rim = tube(outer, inner, length)
    web_volume, disc = tube(inner, bore, web)
    volume = rim_volume + web_volume
    return volume, (rim_volume * rim + web_volume * disc) / volume


def sphere(diameter: float) -> Solid:
    """Return a full ball."""
    return pi * diameter**3 / 6.0, np.eye(3) * (0.1 * diameter * diameter)


def rod(length: float) -> Solid:
    """Return a thin rod along z."""
    across = length * length / 12.0
    return 0.0, np.diag([across, across, 0.0])


def point() -> Solid:
    """Return a point mass."""
    return 0.0, np.zeros((3, 3))


def laid(solid: Solid, along: str) -> Solid:
    """Return a solid of revolution with its axis along "x", "y" or "z"."""
    volume, unit_tensor = solid
    across, axial = float(unit_tensor[0, 0]), float(unit_tensor[2, 2])
    return volume, np.diag([axial if name == along else across for name in "xyz"])
