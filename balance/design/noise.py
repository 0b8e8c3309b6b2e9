"""Sensor noise in numbers: densities to per-sample figures, Allan deviation of a bench log, and what noise does to a loop.

Two conventions meet here and differ by √2.  A data sheet's density N (per √Hz) is one-sided: a sensor read at `rate`
shows a standard deviation N √(rate/2) per sample.  The angle random walk of the Allan tradition (IEEE Std 952) reads the
same N as the slope of a two-sided density: the angle's standard deviation is N √t.  Both are given, each under its name.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm, solve_discrete_lyapunov

Array = NDArray[np.float64]

BIAS_INSTABILITY = float(np.sqrt(2 * np.log(2) / np.pi))
"""Flat bottom of the Allan deviation over the bias-instability coefficient (IEEE Std 952, from memory)."""


def per_sample(density: float, rate: float) -> float:
    """Return the standard deviation of one sample of white noise of one-sided `density` read at `rate` Hz."""
    return float(density * np.sqrt(rate / 2))


def in_band(density: float, bandwidth: float, first_order: bool = False) -> float:
    """Return the RMS of white noise behind an ideal filter of `bandwidth` Hz, or behind a first-order one (× π/2)."""
    return float(density * np.sqrt(bandwidth * (np.pi / 2 if first_order else 1.0)))


def random_walk(density: float, time: float) -> float:
    """Return the standard deviation of the integral of white noise after `time` s (Allan convention)."""
    return float(density * np.sqrt(time))


def allan_deviation(samples: Array, averaging: int, overlapping: bool = False) -> float:
    """Return the Allan deviation of rate samples (n,) over windows of `averaging` samples.

    Half the mean square of the difference between one window's mean and the next window's; `overlapping` slides the
    windows by one sample.  Needs two whole windows, else NaN.  W.J. Riley, NIST SP 1065.
    """
    total = np.concatenate(([0.0], np.cumsum(samples)))
    step = 1 if overlapping else averaging
    means = ((total[averaging:] - total[:-averaging]) / averaging)[::step]
    shift = averaging if overlapping else 1
    if len(means) <= shift:
        return float("nan")
    return float(np.sqrt(0.5 * np.mean((means[shift:] - means[:-shift]) ** 2)))


def allan_model(white: float, walk: float, tau: float) -> float:
    """Return the Allan deviation at `tau` s of white noise N with a random walk K: √(N²/τ + K²τ/3)."""
    return float(np.sqrt(white**2 / tau + walk**2 * tau / 3))


def allan_crossing(white: float, walk: float) -> float:
    """Return the averaging time in s at which both terms of `allan_model` are equal: √3 N/K."""
    return float(np.sqrt(3) * white / walk)


def sampled_noise(A: Array, W: Array, sample_time: float) -> tuple[Array, Array]:
    """Return Φ = e^{AT} and the covariance (n, n) that white noise of two-sided density W (n, n) adds in one sample.

    Van Loan, IEEE TAC 23 (1978): one exponential of a 2n × 2n block matrix (from memory; tested against closed forms).
    """
    n = len(A)
    block = np.block([[-A, W], [np.zeros((n, n)), A.T]]) * sample_time   # (2n, 2n)
    flow = expm(block)
    transition = flow[n:, n:].T
    return transition, transition @ flow[:n, n:]


def stationary_covariance(A: Array, W: Array) -> Array:
    """Return X (n, n) with X = A X Aᵀ + W: the state's covariance under white noise of covariance W per sample.

    Infinite entries where A is not stable (an eigenvalue on or outside the unit circle).
    """
    if np.max(np.abs(np.linalg.eigvals(A))) >= 1.0:
        return np.full_like(W, np.inf)
    X = np.asarray(solve_discrete_lyapunov(A, W), dtype=np.float64)
    both: Array = (X + X.T) / 2
    return both


def output_rms(A: Array, N: Array, sigma: Array, C: Array, D: Array) -> Array:
    """Return the RMS (p,) of z = C x + D w where x⁺ = A x + N w and w is white per sample with deviations `sigma` (k,)."""
    W = N @ np.diag(sigma**2) @ N.T                                      # (n, n)
    X = stationary_covariance(A, W)
    if not np.all(np.isfinite(X)):
        return np.full(len(C), np.inf)
    variance = np.einsum("ij,jk,ik->i", C, X, C) + (D**2) @ (sigma**2)
    return np.asarray(np.sqrt(np.maximum(variance, 0.0)))
