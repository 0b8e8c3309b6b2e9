"""Where the machine can stand still under a constant torque: no stabiliser can give torque for ever."""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from balance.kernel.equations import derivative
from balance.kernel.layout import BALANCED

Array = NDArray[np.float64]


@njit(cache=True, error_model="numpy")
def standing_lean(body: Array, units: Array, torque: float) -> float:
    """Return the lean θ - θ_b in rad at which gravity balances `torque` (N·m about the line); NaN: nowhere.

    With dq/dt = 0 the balance is M(θ) + d = 0, whatever the law. Newton's rule on θ̈(θ) with a central
    difference, from the balanced lean; it stays within a quarter turn or gives up.
    """
    X, out = np.zeros(2 + 2 * units.shape[0]), np.zeros(2 + 2 * units.shape[0])
    inputs = np.zeros(units.shape[0])
    X[0] = body[BALANCED]
    for _ in range(50):
        derivative(X, inputs, torque, body, units, out)
        here = out[1]
        theta = X[0]
        X[0] = theta + 1e-6
        derivative(X, inputs, torque, body, units, out)
        above = out[1]
        X[0] = theta - 1e-6
        derivative(X, inputs, torque, body, units, out)
        step = here * 2e-6 / (above - out[1])
        X[0] = theta - step
        if abs(X[0]) > 1.5 or not np.isfinite(X[0]):
            return np.nan
        if abs(step) < 1e-12:
            return float(X[0] - body[BALANCED])
    return np.nan
