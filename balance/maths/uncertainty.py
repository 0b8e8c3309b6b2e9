"""First-order propagation of measurement uncertainty (JCGM 100, "GUM", section 5.1; from memory)."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def propagated(formula: Callable[[Array], Array], values: Array, uncertainties: Array) -> tuple[Array, Array]:
    """Return `formula(values)` (m,) and its covariance (m, m) for independent inputs (n,).

    Σ = D diag(σ²) Dᵀ with D by central differences over ±σ, so the curvature inside the uncertainty is
    averaged rather than ignored.  An input with σ = 0 is exact.
    """
    found = np.asarray(formula(values), dtype=np.float64)
    spread = np.zeros((found.size, found.size))
    for i, sigma in enumerate(uncertainties):
        if sigma > 0.0:
            step = np.zeros(len(values))
            step[i] = sigma
            effect = (np.asarray(formula(values + step)) - np.asarray(formula(values - step))) / 2.0   # (m,)
            spread += np.outer(effect, effect)
    return found, spread
