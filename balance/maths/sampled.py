"""Exact discretisation of a linear system whose inputs are held and arrive late by any fraction of a sample."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm

Array = NDArray[np.float64]

_SAME_INSTANT = 1e-9
"""Fraction of a sample below which a delay counts as a whole number of samples (rounding of rate and latency)."""


def hold(A: Array, B: Array, time: float) -> tuple[Array, Array]:
    """Return e^{A t} (n, n) and ∫₀ᵗ e^{A s} ds B (n, m): the input held for `time` (s).

    One matrix exponential of the block [[A, B], [0, 0]] gives both (Van Loan, IEEE TAC 23, 1978, from memory), also where A
    is singular.
    """
    n, m = B.shape
    block = np.zeros((n + m, n + m))
    block[:n, :n] = A * time
    block[:n, n:] = B * time
    whole = np.asarray(expm(block), dtype=np.float64)
    return whole[:n, :n], whole[:n, n:]


def whole_samples(delay: float, sample_time: float) -> tuple[int, float]:
    """Split a delay (s) into whole samples and the rest (s, 0 ≤ rest < sample time)."""
    ratio = delay / sample_time
    whole = math.floor(ratio + _SAME_INSTANT)
    rest = ratio - whole
    return whole, 0.0 if rest < _SAME_INSTANT else rest * sample_time


def hold_late(A: Array, B: Array, sample_time: float, rest: float) -> tuple[Array, Array, Array]:
    """Discretise with an input that changes `rest` (s, 0 ≤ rest < sample time) after the sampling instant.

    Returns Φ(h) (n, n), Γ0 = Γ(h − rest) for the newer command and Γ1 = Φ(h − rest) Γ(rest) for the older one, both (n, m);
    x⁺ = Φ x + Γ0 u_new + Γ1 u_old (Åström & Wittenmark, "Computer-Controlled Systems", from memory).
    """
    late, gamma_new = hold(A, B, sample_time - rest)
    early, gamma = hold(A, B, rest)
    return late @ early, gamma_new, late @ gamma


def with_commands_ago(phi: Array, gamma_new: Array, gamma_old: Array, whole: int) -> tuple[Array, Array]:
    """Append past commands as states: the newer command of the interval was given `whole` samples ago.

    States [x, u_{k-1}, …, u_{k-c}], each of m entries, c = whole + 1 (`whole` where `gamma_old` is zero).  Returns the
    augmented A (n + c m, n + c m) and B (n + c m, m).
    """
    n, m = gamma_new.shape
    count = whole + (1 if np.any(gamma_old) else 0)
    size = n + count * m
    A = np.zeros((size, size))
    B = np.zeros((size, m))
    A[:n, :n] = phi
    if whole == 0:
        B[:n] = gamma_new
    else:
        A[:n, n + (whole - 1) * m:n + whole * m] = gamma_new
    if count > whole:
        A[:n, n + whole * m:n + (whole + 1) * m] = gamma_old
    for ago in range(count):
        rows = slice(n + ago * m, n + (ago + 1) * m)
        if ago == 0:
            B[rows] = np.eye(m)
        else:
            A[rows, n + (ago - 1) * m:n + ago * m] = np.eye(m)
    return A, B
