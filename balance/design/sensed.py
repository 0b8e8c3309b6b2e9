"""The sampled plant as the law sees it: behind its sensors and its estimator, noise included."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class Sensed:
    """x⁺ = A x + B v + N w,  ŷ = C x + F w: from the line command v and sensor noise w to the states the law is given.

    `C` has the model's states as rows, in order, estimated or measured; w is white per sample with deviations `sigma`.
    `torque`, `momentum` and `lean` are rows on x: the true line torque, stored momentum and lean.
    """

    A: Array          # (N, N)
    B: Array          # (N,)
    C: Array          # (n, N)
    N: Array          # (N, k)
    F: Array          # (n, k)
    sigma: Array      # (k,)
    lean: Array       # (N,)
    momentum: Array   # (N,)
    sample_time: float

    def response(self, z: Complex) -> tuple[Complex, Complex]:
        """Return the response of ŷ to v (f, n) and to each noise (f, n, k) at the points `z` (f,)."""
        size = len(self.A)
        right = np.column_stack([self.B, self.N])                         # (N, 1 + k)
        swept = np.linalg.solve(z[:, None, None] * np.eye(size) - self.A, np.broadcast_to(right, (len(z), *right.shape)))
        out: Complex = (self.C @ swept).astype(np.complex128)                                              # (f, n, 1 + k)
        return out[:, :, 0], (out[:, :, 1:] + self.F).astype(np.complex128)

    def closed(self, law: Law) -> tuple[Array, Array]:
        """Return the closed loop's matrix (N + m, N + m) and its noise input (N + m, k); `law` acts on ŷ."""
        A_memory = law.A + np.outer(law.E, law.C)                         # the limit is not met: v' = v
        B_memory = law.B + np.outer(law.E, law.D)
        loop = np.block([[self.A + np.outer(self.B, law.D @ self.C), np.outer(self.B, law.C)],
                         [B_memory @ self.C, A_memory]])
        noise = np.vstack([self.N + np.outer(self.B, law.D @ self.F), B_memory @ self.F])
        return loop, noise
