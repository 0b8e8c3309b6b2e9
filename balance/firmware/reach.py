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

    ln 0.01 / ln |z| of the slowest pole of A; at least 1, 0 where A alone does not decay. What a law keeps on purpose
    while held (a pole at one of `held_A`) is not counted.
    """
    radii = np.abs(np.linalg.eigvals(law.A if law.held_A is None else law.held_A)) if len(law.memory) else np.zeros(0)
    if law.held_A is not None:
        radii = radii[radii < 1.0 - 1e-9]
    slowest = float(radii.max(initial=0.0))
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
            return total + _after_holding(law, readings, total)
        G = law.A @ G
    rest = np.full(k, np.abs(G).sum(axis=1).max() / (1.0 - slowest))
    return np.asarray(total + rest + _after_holding(law, readings, total + rest))


def _after_holding(law: Law, readings: Array, free: Array) -> Array:
    """Return what a held machine's memory adds (k,): where holding can take it, carried on by A; 0 where held is as free.

    Held, each row follows the sensors on its own (`held_B`) or keeps what it had: the largest it reaches is bounded row by
    row. Then sup over n of |Aⁿ| times that.
    """
    if law.held_A is None or law.held_B is None:
        return np.zeros(len(free))
    own = np.abs(np.diag(law.held_A))
    across = np.abs(law.held_A) - np.diag(own)
    sensed = np.abs(law.held_B) @ readings
    start = free + across @ free + sensed / np.where(own < 1.0, 1.0 - own, 1.0)
    power, most = np.eye(len(free)), np.zeros(len(free))
    for _ in range(LONGEST):
        carried = np.abs(power) @ start
        most = np.maximum(most, carried)
        if carried.max() <= 1e-3 * most.max():
            break
        power = law.A @ power
    return np.asarray(most)
