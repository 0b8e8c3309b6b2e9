"""A root between two points of opposite sign, and the largest value between two points: without a library's start-up time.

The commands that answer at once spend most of their time on imports; a general optimiser is a quarter of a second of it.
"""

from __future__ import annotations

import math
from collections.abc import Callable

MOST = 200
"""Steps; bisection alone needs 53 for a double's whole precision."""
GOLDEN = 0.5 * (3.0 - math.sqrt(5.0))


def root_between(f: Callable[[float], float], a: float, b: float, xtol: float) -> float:
    """Return x with f(x) = 0 to within `xtol`, f(a) and f(b) of opposite sign (or one of them 0).

    Inverse quadratic interpolation where it is safe, else bisection: Chandrupatla, Adv. Eng. Software 28, 1997 (from
    memory; the tests hold it to known roots and to its own bracket).
    """
    fa, fb = f(a), f(b)
    if fa == 0.0 or fb == 0.0:
        return a if fa == 0.0 else b
    c, fc, share, best = a, fa, 0.5, a
    for _ in range(MOST):
        x = a + share * (b - a)
        fx = f(x)
        if (fx > 0.0) == (fa > 0.0):
            c, fc = a, fa
        else:
            c, b, fc, fb = b, a, fb, fa
        a, fa = x, fx
        best, smallest = (a, fa) if abs(fa) < abs(fb) else (b, fb)
        width = abs(b - a)
        near = 0.5 * (xtol + 4.0 * math.ulp(best))
        if smallest == 0.0 or width <= 2.0 * near:
            return best
        xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
        share = 0.5
        if phi * phi < xi and (1.0 - phi) ** 2 < 1.0 - xi:
            share = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
        share = min(max(share, near / width), 1.0 - near / width)
    return best


def largest_between(f: Callable[[float], float], low: float, high: float, xtol: float) -> float:
    """Return the largest f found between `low` and `high` by golden section, to `xtol` in its argument; f has one hump."""
    left, right = low + GOLDEN * (high - low), high - GOLDEN * (high - low)
    at_left, at_right = f(left), f(right)
    while high - low > xtol:
        if at_left >= at_right:
            high, right, at_right = right, left, at_left
            left = low + GOLDEN * (high - low)
            at_left = f(left)
        else:
            low, left, at_left = left, right, at_right
            right = high - GOLDEN * (high - low)
            at_right = f(right)
    return max(at_left, at_right)
