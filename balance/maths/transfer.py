"""Frequency response of a state-space triple at many points, through one complex Schur form. No polynomials."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import schur

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]
Triangle = tuple[Complex, Complex, Complex]


def triangular(A: Array, b: Array, C: Array) -> Triangle:
    """Return T (n, n) upper triangular, Zᴴb (n,) and C Z (p, n), A = Z T Zᴴ (unitary, so nothing is amplified)."""
    T, Z = schur(np.asarray(A, dtype=np.complex128), output="complex")
    return T, Z.conj().T @ b, np.atleast_2d(C) @ Z


def respond_each(forms: Sequence[Triangle], points: Complex) -> Complex:
    """Return c (zI − A)⁻¹ b of many triples of one size with one output each: (len(forms), points), as `respond`."""
    T, b, C = (np.stack([form[k] for form in forms]) for k in range(3))     # (N, n, n), (N, n), (N, 1, n)
    n = b.shape[1]
    X = np.zeros((len(forms), n, len(points)), dtype=np.complex128)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for i in range(n - 1, -1, -1):
            rest = T[:, i, None, i + 1:] @ X[:, i + 1:]                      # (N, 1, points)
            X[:, i] = (b[:, i, None] + rest[:, 0]) / (points - T[:, i, i, None])
        answer: Complex = (C @ X)[:, 0]
    return answer


def respond(form: Triangle, points: Complex) -> Complex:
    """Return C (zI − A)⁻¹ b at each point z: (points, p). Back-substitution, n² / 2 multiplications a point.

    A point exactly on a pole gives inf or nan, without a warning: the caller knows what a pole there means.
    """
    T, b, C = form
    n = len(b)
    X = np.zeros((n, len(points)), dtype=np.complex128)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for i in range(n - 1, -1, -1):
            X[i] = (b[i] + T[i, i + 1:] @ X[i + 1:]) / (points - T[i, i])
        answer: Complex = (C @ X).T
    return answer
