"""How much several loops bear at once: the structured norm of a matrix under independent factors, bounded from above.

μ(M) ≤ min over positive diagonal D of σ_max(D M D⁻¹); exact for up to three channels (Packard & Doyle, Automatica 29, 1993,
from memory). ln σ_max(e^X M e^−X) is convex in the diagonal X, so that a descent finds the lowest there is.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

TURNS = 30
"""Of Osborne's balancing: each makes one row as heavy as its column, and they settle within a few."""
FIRST, LAST = 0.5, 1e-7
"""Steps of the descent in nepers of scaling: the norm is flat at its lowest, so the last is worth some 1e-14 of it."""

WIDEST = 20.0
"""Nepers of scaling: e^±40 between two channels leaves nothing of what couples them."""


def scaled_norm(M: Complex, x: Array) -> Array:
    """Return σ_max(e^x M e^−x) of matrices M (…, m, m) under logarithmic scalings x (…, m)."""
    scaled = M * np.exp(x[..., :, None] - x[..., None, :])
    norms: Array = np.linalg.norm(scaled, ord=2, axis=(-2, -1))
    return norms


def balanced(M: Complex) -> Array:
    """Return x (…, m) that balances rows against columns of M (…, m, m): Osborne's start, an upper bound in one pass."""
    weight = np.abs(M) ** 2
    m = M.shape[-1]
    weight = weight * (1.0 - np.eye(m))
    x = np.zeros(M.shape[:-1])
    for turn in range(TURNS * m):
        i = turn % m
        now = weight * np.exp(2.0 * (x[..., :, None] - x[..., None, :]))
        row, column = now[..., i, :].sum(axis=-1), now[..., :, i].sum(axis=-1)
        x[..., i] += 0.25 * np.log(np.maximum(column, 1e-300) / np.maximum(row, 1e-300))
        x[..., i] = np.clip(x[..., i], -WIDEST, WIDEST)         # a channel that hears or tells nothing scales without end
    return x - x[..., :1]


def structured_bound(M: Complex) -> float:
    """Return the least σ_max(D M D⁻¹) of one matrix (m, m) over positive diagonal D: an upper bound of μ(M)."""
    x = balanced(M)
    best, m = float(scaled_norm(M, x)), len(M)
    ways = np.vstack([np.eye(m)[1:], -np.eye(m)[1:], _pairs(m)]) if m > 1 else np.zeros((0, m))
    step = FIRST
    while step > LAST and len(ways):
        found = scaled_norm(np.broadcast_to(M, (len(ways), m, m)), x + step * ways)
        at = int(np.argmin(found))
        if found[at] < best * (1.0 - 1e-13):
            best, x = float(found[at]), x + step * ways[at]
        else:
            step *= 0.5
    return best


def _pairs(m: int) -> Array:
    """Return steps along two or more channels at once: where two singular values meet the norm has a kink in a valley."""
    rng = np.random.default_rng(7)
    steps = rng.normal(size=(8 * m, m))
    steps[:, 0] = 0.0
    return np.asarray(steps / np.linalg.norm(steps, axis=1, keepdims=True), dtype=np.float64)
