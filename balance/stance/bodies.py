"""Rigid bodies as the stance room collects them: mass, centre and tensor in the trunk's axes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.maths.inertia import joined, rotated

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Body:
    """One rigid body. `I_com` is about its own centre of mass, in the axes `centre` is given in."""

    name: str
    mass: float      # kg
    centre: Array    # (3,) m
    I_com: Array     # (3, 3) kg·m²


def join(bodies: Sequence[Body]) -> tuple[float, Array, Array]:
    """Return mass, centre of mass (3,) and tensor about it (3, 3) of rigidly joined bodies (at least one)."""
    return joined(np.array([b.mass for b in bodies]), np.array([b.centre for b in bodies]),
                  np.array([b.I_com for b in bodies]))


def placed(body: Body, R_WT: Array, p_WT: Array) -> Body:
    """Return a body given in the trunk's axes in the world's."""
    return Body(body.name, body.mass, p_WT + R_WT @ body.centre, rotated(body.I_com, R_WT))
