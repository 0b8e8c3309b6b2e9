"""Where the machine can stand still under a constant torque: no stabiliser can give torque for ever."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import entry
from balance.kernel.equations import derivative
from balance.kernel.layout import BALANCED

Array = NDArray[np.float64]


def standing_lean(body: Array, units: Array, torque: float) -> float:
    """Return the lean θ - θ_b in rad at which gravity balances `torque` (N·m about the line); NaN: nowhere.

    With dq/dt = 0 the balance is M(θ) + d = 0, whatever the law. Newton's rule on θ̈(θ) with a central
    difference, from the balanced lean; it stays within a quarter turn or gives up.
    """
    n, rows = 2 + 2 * units.shape[0], units.shape[0]
    return float(find_balance(body, units, float(torque), np.zeros(n), np.zeros(rows), np.zeros(n), np.zeros(3)))


@entry
def find_balance(body: Array, units: Array, torque: float, X: Array, inputs: Array, out: Array, around: Array) -> float:
    """Answer `standing_lean`; the arrays after `torque` are given as zeros, since compiled code here makes none."""
    theta = body[BALANCED]
    for _ in range(50):
        for k in range(3):                                 # one place that calls, since three would be compiled
            X[0] = theta + 1e-6 * ((k + 1) % 3 - 1)
            derivative(X, inputs, torque, body, units, out)
            around[k] = out[1]
        step = around[0] * 2e-6 / (around[1] - around[2])
        theta -= step
        if abs(theta) > 1.5 or not np.isfinite(theta):
            return np.nan
        if abs(step) < 1e-12:
            return float(theta - body[BALANCED])
    return np.nan
