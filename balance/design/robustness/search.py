"""The lowest value of several functions over one box, found without derivatives and without chance.

Every corner (up to 128), the middle of every face and seeded points inside; then from the lowest points of each function a
pattern search that tries one step along every coordinate and halves the step where none helps (Hooke & Jeeves 1961, from
memory).  A search proves nothing about what it did not try: the answer is an upper bound of the true lowest value.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import product

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

SEED = 20
"""Of the points inside: always the same ones."""
CORNERS = 128
INSIDE = 12
"""Points inside per coordinate."""
STARTS = 2
"""Local searches per function."""
FIRST, LAST = 0.5, 0.01
"""Step of the local search, in half widths of the box."""
CORNERED = 0.1
"""Last step of a search that stands in a corner: what is lowest there is lowest by its slope, not by a bottom."""
ROUNDS = 40


@dataclass(frozen=True)
class Pool:
    """All that was tried: points (N, p) in −1 … 1 and their values (N, k)."""

    points: Array
    values: Array

    def lowest(self, column: int) -> Array:
        """Return the point (p,) at which one function is lowest; the first tried where several are."""
        at: Array = self.points[int(np.argmin(self.values[:, column]))]
        return at


def search(values_of: Callable[[Array], Array], size: int) -> Pool:
    """Search the box −1 … 1 of `size` coordinates; `values_of` takes points (N, size) and returns values (N, k)."""
    points = first_points(size)
    pool = Pool(points, values_of(points))
    ways = _starts(pool)
    known = {_key(x): y for x, y in zip(pool.points, pool.values, strict=True)}
    for _ in range(ROUNDS):
        ways = [way for way in ways if way.step >= (LAST if np.any(np.abs(way.at) < 1.0) else CORNERED)]
        tried = {_key(x): x for way in ways for x in way.around()}
        new = np.array([x for key, x in tried.items() if key not in known])
        if len(new):
            found = values_of(new)
            known |= {_key(x): y for x, y in zip(new, found, strict=True)}
            pool = Pool(np.vstack([pool.points, new]), np.vstack([pool.values, found]))
        ways = [way.moved(known) for way in ways]
        if not ways:
            break
    return pool


@dataclass(frozen=True)
class _Way:
    """One local search: of which function, where it stands, its step."""

    column: int
    at: Array
    step: float

    def around(self) -> list[Array]:
        """Return the points one step away along each coordinate, inside the box."""
        found = []
        for i, side in product(range(len(self.at)), (-1.0, 1.0)):
            x = self.at.copy()
            x[i] = np.clip(x[i] + side * self.step, -1.0, 1.0)
            if x[i] != self.at[i]:
                found.append(x)
        return found

    def moved(self, known: dict[tuple[float, ...], Array]) -> _Way:
        """Return the way from the best neighbour, or with half the step where none is lower."""
        around = self.around()
        lowest = min(around, key=lambda x: float(known[_key(x)][self.column]), default=self.at)
        if known[_key(lowest)][self.column] < known[_key(self.at)][self.column]:
            return _Way(self.column, lowest, self.step)
        return _Way(self.column, self.at, 0.5 * self.step)


def first_points(size: int) -> Array:
    """Return the points (N, size) that are tried whatever comes: the middle first, faces, corners, seeded ones inside."""
    rng = np.random.default_rng(SEED)
    faces = np.concatenate([np.eye(size), -np.eye(size)])
    if 2**size <= CORNERS:
        corners = np.array(list(product((-1.0, 1.0), repeat=size)))
    else:
        corners = rng.choice((-1.0, 1.0), (CORNERS, size))
    inside = rng.uniform(-1.0, 1.0, (INSIDE * size, size))
    return np.vstack([np.zeros((1, size)), faces, corners, inside])


def _starts(pool: Pool) -> list[_Way]:
    """Return the local searches: per function from its lowest points, no two of them closer than half a side."""
    ways = []
    for column in range(pool.values.shape[1]):
        chosen: list[Array] = []
        for i in np.argsort(pool.values[:, column], kind="stable"):
            x = pool.points[i]
            if all(np.abs(x - other).max() >= FIRST for other in chosen):
                chosen.append(x)
            if len(chosen) == STARTS:
                break
        ways += [_Way(column, x, FIRST) for x in chosen]
    return ways


def _key(x: Array) -> tuple[float, ...]:
    return tuple(float(v) for v in np.round(x, 12))
