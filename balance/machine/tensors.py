"""Is a stated inertia tensor one a body can have?  Plain Python: reading a file does not wait for numpy."""

from __future__ import annotations

import math
from collections.abc import Iterator

from balance.files.walk import Fault
from balance.machine.solids import Tensor

SLACK = 1e-6
"""Relative: what rounding a printed tensor may cost; a flat plate meets the triangle rule with equality."""

NOTHING = 1e-7
"""Share of the largest moment below which one is none: what the closed form of the moments can tell."""


def principal_moments(tensor: Tensor) -> tuple[float, float, float]:
    """Return the principal moments of inertia in kg·m², ascending.

    Closed form for a symmetric 3×3 matrix by the angle of its characteristic cubic (O. K. Smith, Comm. ACM
    4, 1961). Accurate to about 1e-8 of the largest, as every form that goes through the cubic.
    """
    mean = (tensor.xx + tensor.yy + tensor.zz) / 3.0
    off = tensor.xy**2 + tensor.xz**2 + tensor.yz**2
    square = (tensor.xx - mean)**2 + (tensor.yy - mean)**2 + (tensor.zz - mean)**2
    spread = math.sqrt((square + 2.0 * off) / 6.0)
    if spread == 0.0:
        return mean, mean, mean
    a, b, c = ((moment - mean) / spread for moment in (tensor.xx, tensor.yy, tensor.zz))
    d, e, f = (product / spread for product in (tensor.xy, tensor.xz, tensor.yz))
    half = (a * (b * c - f * f) - d * (d * c - f * e) + e * (d * f - b * e)) / 2.0
    angle = math.acos(min(1.0, max(-1.0, half))) / 3.0
    largest = mean + 2.0 * spread * math.cos(angle)
    smallest = mean + 2.0 * spread * math.cos(angle + 2.0 * math.pi / 3.0)
    return smallest, 3.0 * mean - largest - smallest, largest


def check_tensor(tensor: Tensor) -> Iterator[Fault]:
    """Refuse what no body can have, saying which rule failed and printing the moments.

    Principal moments are positive, and none is more than the sum of the other two (triangle inequality).
    """
    low, middle, high = principal_moments(tensor)
    given = f"principal moments {low:.4g}, {middle:.4g} and {high:.4g} kg*m^2"
    if high <= 0.0 or middle <= 0.0 or low < NOTHING * high:
        thin = high > 0.0 and abs(low) < NOTHING * high
        yield Fault("", given, "positive principal moments",
                    "a rod so thin is `solid: {rod: …}`; a body has some moment about every axis" if thin else
                    "check xy, xz and yz" if high > 0.0 else "a point mass is `solid: {point: 0 mm}`")
    elif high > (low + middle) * (1.0 + SLACK):
        yield Fault("", given, "a largest moment of at most the sum of the other two (triangle inequality)",
                    f"{high:.4g} is more than {low + middle:.4g}; is one moment about another point?")
