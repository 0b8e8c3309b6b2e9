"""How far a law's memory can be taken: what fixed-point scaling must leave room for."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law

Array = NDArray[np.float64]

LONGEST = 400_000
"""Samples summed one by one; what is left after them is bounded by the slowest pole."""


def settling_samples(law: Law) -> int:
    """Return after how many samples of a held machine (commands zero) what the memory began with is 1 % of itself.

    ln 0.01 / ln |z| of the slowest pole of A; at least 1, 0 where A alone does not decay.
    """
    slowest = float(np.abs(np.linalg.eigvals(law.A)).max()) if len(law.memory) else 0.0
    if slowest >= 1.0 - 1e-9:
        return 0
    return max(int(np.ceil(np.log(0.01) / np.log(slowest))), 1) if slowest > 0.0 else 1


def memory_reach(law: Law, readings: Array) -> Array:
    """Return the largest magnitude (k,) of each memory under any readings within ± `readings` (m,) and any limited command.

    x⁺ = A x + B y + E v' with |y| and |v'| bounded: |x_i| ≤ Σₙ |(Aⁿ [B E])_i| · bounds, the sum of the impulse responses'
    magnitudes (the l1 norm: bounded input, bounded output). inf where A alone does not decay.
    """
    k = len(law.memory)
    if k == 0:
        return np.zeros(0)
    slowest = float(np.abs(np.linalg.eigvals(law.A)).max())
    if slowest >= 1.0 - 1e-9:
        return np.full(k, np.inf)
    G = np.column_stack([law.B, law.E]) * np.append(readings, law.output_limit)  # (k, m + 1)
    total = np.zeros(k)
    for _ in range(LONGEST):
        size = np.abs(G).sum(axis=1)
        total += size
        if size.max() <= 1e-9 * total.max():
            return total
        G = law.A @ G
    rest = np.full(k, np.abs(G).sum(axis=1).max() / (1.0 - slowest))
    return np.asarray(total + rest)
