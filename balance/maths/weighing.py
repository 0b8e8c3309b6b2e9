"""Mass and centre of mass from the loads under the feet, level and tilted."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def weighed_centre(contacts_T: Array, turns_WT: Array, loads: Array) -> tuple[float, Array]:
    """Return the total load, averaged over the weighings, and the centre of mass (3,) in the trunk's axes.

    `contacts_T` (n, 3) are the feet in the trunk's axes, the same in every weighing; `turns_WT` (k, 3, 3) how
    the machine with its feet was tilted; `loads` (k, n) the vertical forces, or the masses the scales show.
    Each weighing gives the two horizontal places of the centre, Σ F x/Σ F; together they are solved by least
    squares.  One level weighing says nothing about the height, which is then NaN: tilt once more about any
    horizontal axis.  The scales must pass no horizontal force (rollers or slick pads): where tilted feet
    stand at different heights it would turn the machine.
    """
    rows, sides = [], []
    for R, load in zip(turns_WT, loads, strict=True):
        rows.append(R[:2])
        sides.append((load / load.sum()) @ (contacts_T @ R[:2].T))
    matrix, side = np.concatenate(rows), np.concatenate(sides)              # (2k, 3), (2k,)
    centre, _, rank, _ = np.linalg.lstsq(matrix, side, rcond=1e-9)
    if rank < 3:
        _, _, basis = np.linalg.svd(matrix)
        blind = np.abs(basis[2]) > 1e-6          # (3,): what the weighings do not see
        centre = np.where(blind, np.nan, centre)
    return float(loads.sum(axis=1).mean()), np.asarray(centre)
