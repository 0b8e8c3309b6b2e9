"""The convex hull of a few points in the plane."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def hull_order(points: Array) -> list[int]:
    """Return the corners' rows of `points` (n, 2), counter-clockwise from the leftmost (Andrew's chain).

    Points inside or on an edge are left out; fewer than three corners mean that all stand in one line.
    """
    rows = sorted(range(len(points)), key=lambda i: (points[i, 0], points[i, 1]))
    lower, upper = _chain(points, rows), _chain(points, rows[::-1])
    return lower[:-1] + upper[:-1]


def _chain(points: Array, rows: list[int]) -> list[int]:
    chain: list[int] = []
    for row in rows:
        while len(chain) > 1 and _turn(points[chain[-2]], points[chain[-1]], points[row]) <= 0.0:
            chain.pop()
        chain.append(row)
    return chain


def _turn(a: Array, b: Array, c: Array) -> float:
    """Return twice the signed area of a triangle: positive where a, b, c turn left."""
    return float((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]))
