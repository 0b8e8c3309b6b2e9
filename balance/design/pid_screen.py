"""Margins of many candidate loops at once, on one frequency grid: coarse enough to search with, never to report.

What is reported comes from `design.margins` (refined crossings, eigenvalues); this screen only ranks candidates.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class Wanted:
    """The limits a candidate must keep; infinite or zero where nothing is asked."""

    peak_sensitivity: float     # at most
    phase: float                # rad, at least
    gain_lower: float           # at most
    gain_upper: float           # at least
    delay: float                # s, at least
    disk: float                 # at least
    noise: float                # N·m RMS about the line, at most


def violation(loop: Complex, frequency: Array, noise: Array, wanted: Wanted) -> Array:
    """Return (c,) the largest overshoot of any limit, as a fraction of it; ≤ 0 where all limits are kept.

    `loop` (c, f) is L at `frequency` (f,) in rad/s, ending at the Nyquist frequency; `noise` (c,) the RMS torque.
    """
    back = 1 + loop                                                       # (c, f)
    sensitivity = 1 / np.min(np.abs(back), axis=1)
    skew = np.max(np.abs(0.5 * (1 - loop) / back), axis=1)                # 1/α
    phase, delay = unit_crossings(loop, frequency)
    lower, upper = axis_crossings(loop)
    over = [sensitivity / wanted.peak_sensitivity, skew * wanted.disk, noise / wanted.noise,
            wanted.phase / np.maximum(phase, 1e-9), wanted.delay / np.maximum(delay, 1e-12),
            lower / wanted.gain_lower, wanted.gain_upper / upper]
    worst: Array = np.max(np.stack(over), axis=0) - 1.0
    return np.where(np.isfinite(worst), worst, 1e9)


def unit_crossings(loop: Complex, frequency: Array) -> tuple[Array, Array]:
    """Return (c,) smallest phase margin in rad and smallest phase/ω in s over all crossings of |L| = 1."""
    log = np.log(np.abs(loop))
    crossed = log[:, :-1] * log[:, 1:] < 0
    share = np.where(crossed, log[:, :-1] / np.where(crossed, log[:, :-1] - log[:, 1:], 1.0), 0.0)
    angle = np.angle(-loop)                                               # 0 at −1
    turn = np.angle(loop[:, 1:] / loop[:, :-1])
    at = angle[:, :-1] + share * turn
    omega = frequency[:-1] + share * np.diff(frequency)
    phase = np.where(crossed, np.abs((at + np.pi) % (2 * np.pi) - np.pi), np.inf).min(axis=1)
    delay = np.where(crossed, at % (2 * np.pi) / omega, np.inf).min(axis=1)
    return phase, delay


def axis_crossings(loop: Complex) -> tuple[Array, Array]:
    """Return (c,) largest gain factor below 1 and smallest above 1 at which L meets −1 (0 and inf where it never does)."""
    imag, real = loop.imag, loop.real
    crossed = imag[:, :-1] * imag[:, 1:] < 0
    share = np.where(crossed, imag[:, :-1] / np.where(crossed, imag[:, :-1] - imag[:, 1:], 1.0), 0.0)
    at = np.where(crossed, real[:, :-1] + share * np.diff(real, axis=1), 0.0)
    at = np.concatenate([at, real[:, -1:]], axis=1)                       # the Nyquist frequency: L is real there
    factor = np.where(at < 0, -1 / np.where(at < 0, at, -1.0), np.inf)    # (c, f)
    return np.where(factor < 1, factor, 0.0).max(axis=1), np.where(factor > 1, factor, np.inf).min(axis=1)
