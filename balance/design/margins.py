"""Margins of one broken loop: stable or not first, by eigenvalues; then from its frequency response, crossings refined.

Works for sampled and continuous loops alike, never on polynomials: those lose fast-sampled loops altogether.
Conventions: negative feedback (1 + L); phase margin in (−π, π]; balanced disk α = 1/max|½(1 − L)/(1 + L)|
(Seiler, Packard, Gahinet, "An introduction to disk margins", IEEE CSM 40(5), 2020).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Crossing, Margins
from balance.maths.search import largest_between, root_between

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

GRID = 3000
"""Points of the base grid, evenly spaced in log frequency."""

_NAN = float("nan")
UNSTABLE = Margins(False, _NAN, _NAN, _NAN, _NAN, _NAN, _NAN, _NAN, _NAN, _NAN, _NAN, ())


@dataclass(frozen=True)
class BrokenView:
    """What the margins need to know of a loop cut at one place.

    `response` gives L at frequencies in rad/s; `growth` tells, for a gain factor and an added delay (s), how far the
    closed loop is from the edge of stability (negative: stable); `lowest`, `highest` in rad/s; `ends`: the exact real
    values of L at DC and at the top of the range that count as candidates (None where L has none there).
    """

    response: Callable[[Array], Complex]
    growth: Callable[[float, float], float]
    lowest: float
    highest: float
    ends: tuple[float | None, float | None]
    marks: tuple[float, ...] = ()      # rad/s of poles near the axis: the grid is refined around them


def margins_of(loop: BrokenView) -> Margins:
    """Return all margins; NaN everywhere when the closed loop is not stable."""
    if loop.growth(1.0, 0.0) >= 0.0:
        return UNSTABLE
    w = _grid(loop)
    L = loop.response(w)
    good = np.isfinite(L)
    w, L = w[good], L[good]
    gains, phases = _gain_crossings(loop, w, L), _phase_crossings(loop, w, L)
    lower, upper = _gain_limits(loop, gains)
    at = min(phases, key=lambda c: abs(c.value), default=None)
    delay = _delay_margin(loop, phases)
    modulus = 1.0 / _peak(loop, w, lambda z: 1.0 / np.abs(1.0 + z))
    return Margins(
        stable=True, gain_lower=lower, gain_upper=upper, phase=abs(at.value) if at else np.pi,
        phase_crossover=at.frequency if at else float("nan"), delay=delay, delay_estimate=_estimate(phases),
        modulus=modulus, disk=1.0 / _peak(loop, w, lambda z: 0.5 * np.abs((1.0 - z) / (1.0 + z))),
        peak_sensitivity=1.0 / modulus, peak_complementary=_peak(loop, w, lambda z: np.abs(z / (1.0 + z))),
        crossings=tuple(sorted(gains + phases, key=lambda c: c.frequency)))


def _grid(loop: BrokenView) -> Array:
    base = np.geomspace(loop.lowest, loop.highest, GRID)
    near = [m * (1.0 + s * d) for m in loop.marks for d in np.geomspace(1e-4, 0.3, 25) for s in (-1.0, 1.0)]
    extra = [x for x in near if loop.lowest < x < loop.highest]
    return np.unique(np.concatenate([base, extra]))


def _refined(loop: BrokenView, w: Array, values: Array, of: Callable[[Complex], Array]) -> list[float]:
    """Return the frequencies where `of`(L) changes sign, refined from the grid."""
    out = []
    for i in np.flatnonzero(np.signbit(values[:-1]) != np.signbit(values[1:])):
        out.append(root_between(lambda x: float(of(loop.response(np.array([x])))[0]), float(w[i]), float(w[i + 1]),
                                1e-12 * float(w[i])))
    return out


def _gain_crossings(loop: BrokenView, w: Array, L: Complex) -> list[Crossing]:
    """Return where L is real and negative, with the factor k = −1/L that puts a closed-loop pole there."""
    found = []
    for x in _refined(loop, w, L.imag, lambda z: z.imag):
        real = float(loop.response(np.array([x]))[0].real)
        if real < 0.0 and abs(real) < 1e12:
            found.append(Crossing("gain", x, -1.0 / real))
    for frequency, value in zip((0.0, loop.highest), loop.ends, strict=True):
        if value is not None and value < 0.0:
            found.append(Crossing("gain", frequency, -1.0 / value))
    return found


def _phase_crossings(loop: BrokenView, w: Array, L: Complex) -> list[Crossing]:
    """Return where |L| = 1, with the phase margin there."""
    found = []
    for x in _refined(loop, w, np.log(np.abs(L)), lambda z: np.log(np.abs(z))):
        margin = float(np.angle(-loop.response(np.array([x]))[0]))
        found.append(Crossing("phase", x, margin))
    return found


def _gain_limits(loop: BrokenView, crossings: list[Crossing]) -> tuple[float, float]:
    """Return the factors at which stability is lost, going down and up from 1; each proved by eigenvalues beyond it."""
    lower, upper = 0.0, np.inf
    for k in sorted((c.value for c in crossings if c.value < 1.0), reverse=True):
        if loop.growth(k * (1.0 - 1e-5), 0.0) > 0.0:
            lower = k
            break
    for k in sorted(c.value for c in crossings if c.value > 1.0):
        if loop.growth(k * (1.0 + 1e-5), 0.0) > 0.0:
            upper = k
            break
    return lower, float(upper)


def _estimate(phases: list[Crossing]) -> float:
    """Return the textbook delay margin, phase / ω, smallest over the crossings, in s."""
    return min(((c.value % (2.0 * np.pi)) / c.frequency for c in phases), default=float("inf"))


def _delay_margin(loop: BrokenView, phases: list[Crossing]) -> float:
    """Return the smallest added delay (s) that puts an eigenvalue on the edge of stability.

    The estimate only says where to look: a sampled loop re-discretised with a fractional delay differs from it.
    """
    guess = _estimate(phases)
    if not np.isfinite(guess):
        return float("inf")
    step, low = guess / 16.0, 0.0
    for _ in range(64):
        high = low + step
        if loop.growth(1.0, high) > 0.0:
            return root_between(lambda d: float(loop.growth(1.0, d)), low, high, 1e-9 * guess)
        low = high
    return float("inf")


def _peak(loop: BrokenView, w: Array, of: Callable[[Complex], Array]) -> float:
    """Return the largest value of `of`(L) over frequency, refined around the largest grid point."""
    values = of(loop.response(w))
    i = int(np.argmax(values))
    best = float(values[i])
    low, high = float(np.log(w[max(i - 1, 0)])), float(np.log(w[min(i + 1, len(w) - 1)]))
    found = largest_between(lambda x: float(of(loop.response(np.array([np.exp(x)])))[0]), low, high, 1e-8)
    ends = [float(of(np.array([complex(v)]))[0]) for v in loop.ends if v is not None]
    return max(best, found, *ends)
