"""Bode's sensitivity integral of a sampled loop: what is gained at one frequency is paid for at another, exactly.

For a stable closed loop with a strictly proper L(z) of unstable poles p_i::

    (1/π) ∫₀^π ln |S(e^{jω})| dω = Σ ln |p_i|

(Sung & Hara, "Properties of sensitivity and complementary sensitivity functions in single-input single-output digital
control systems", Int. J. Control 48, 1988; from memory). No law changes what the plant puts on the right side. The left
side, by quadrature of the response the margins are read from, is a check of that response against the eigenvalues.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.design.loop import BrokenLoop
from balance.design.records import BodeIntegral

Array = NDArray[np.float64]

PANELS = 60
"""Intervals of eight Gauss points between two marks."""


def bode_integral(loop: BrokenLoop) -> BodeIntegral:
    """Return both sides of the integral for a loop whose closed loop is stable."""
    poles = np.linalg.eigvals(loop.A)
    due = float(np.sum(np.log(np.abs(poles[np.abs(poles) > 1.0 + 1e-9]))))
    closed = np.linalg.eigvals(loop.closed())
    angles = np.abs(np.angle(np.concatenate([poles, closed])))
    depth = np.concatenate([np.abs(np.abs(poles) - 1.0), np.abs(np.abs(closed) - 1.0)])
    edges = _edges(angles, depth)
    nodes, weights = np.polynomial.legendre.leggauss(8)
    half = 0.5 * np.diff(edges)
    at = (edges[:-1] + half)[:, None] + half[:, None] * nodes             # (panels, 8) rad per sample
    L = loop.response(at.ravel() / loop.sample_time).reshape(at.shape)
    values = -np.log(np.abs(1.0 + L))
    return BodeIntegral(float(np.sum(half[:, None] * weights * values) / np.pi), due)


def _edges(angles: Array, depth: Array) -> Array:
    """Return panel edges on (0, π), crowded geometrically around every angle where |S| has a peak or a dip."""
    edges = [np.geomspace(1e-9, np.pi, 6 * PANELS), np.linspace(1e-9, np.pi, 2 * PANELS)]
    for angle, near in zip(angles, depth, strict=True):
        spread = np.geomspace(max(1e-2 * near, 1e-9), np.pi, PANELS)
        edges += [angle + spread, angle - spread, np.array([angle])]
    joined = np.unique(np.concatenate(edges))
    return np.asarray(joined[(joined >= 1e-9) & (joined <= np.pi)])
