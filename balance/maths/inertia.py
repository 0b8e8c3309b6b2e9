"""Inertia tensors as (3, 3) arrays, xy = −∫xy dm, each about a stated point and in stated axes."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def tensor(xx: float, yy: float, zz: float, xy: float = 0.0, xz: float = 0.0, yz: float = 0.0) -> Array:
    """Return the symmetric tensor (3, 3) of six numbers; products are already −∫ (kg·m²)."""
    return np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]], dtype=np.float64)


def axial(spin: float, transverse: float, axis: Array) -> Array:
    """Return the tensor (3, 3) of a body of revolution about the unit `axis` (3,)."""
    return np.asarray(transverse * np.eye(3) + (spin - transverse) * np.outer(axis, axis))


def rotated(I_A: Array, R_BA: Array) -> Array:
    """Return I_B = R I_A Rᵀ, the same tensor in axes B."""
    return np.asarray(R_BA @ I_A @ R_BA.T)


def shifted(I_com: Array, mass: float, arm: Array) -> Array:
    """Return the tensor about a point `arm` (3,) from the centre of mass (parallel-axis theorem)."""
    return np.asarray(I_com + mass * (arm @ arm * np.eye(3) - np.outer(arm, arm)))


def joined(masses: Array, centres: Array, tensors: Array) -> tuple[float, Array, Array]:
    """Return mass, centre of mass (3,) and tensor (3, 3) about it of rigidly joined bodies.

    `masses` (n,), `centres` (n, 3) and `tensors` (n, 3, 3), each about its own centre, in common axes.  A
    total mass of zero has its centre at the origin.
    """
    mass = float(masses.sum())
    centre = masses @ centres / mass if mass > 0.0 else np.zeros(3)
    arms = centres - centre                                                  # (n, 3)
    squares = np.einsum("ni,ni->n", arms, arms)                              # (n,)
    steiner = np.eye(3) * (masses @ squares) - np.einsum("n,ni,nj->ij", masses, arms, arms)
    return mass, np.asarray(centre), np.asarray(tensors.sum(axis=0) + steiner)


def about_line(I_com: Array, mass: float, arm: Array, direction: Array) -> float:
    """Return the inertia about a line of unit `direction` through a point `arm` from the centre of mass."""
    return float(direction @ shifted(I_com, mass, arm) @ direction)
