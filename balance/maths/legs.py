"""Closed-form inverse kinematics of a leg whose hip swings sideways and bends in the swung plane.

Leg axes at the hip: r outward (horizontal, from the trunk's middle to the hip), t = z × r sideways, z up.
The hip swings by `swing` about r, then bends by `hip` from straight down toward r; the knee bends by `knee`
from straight.
"""

from __future__ import annotations

from math import acos, atan2, cos, hypot, pi, sin

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def leg_axes(hip: Array) -> Array:
    """Return r, t, z as the rows of a (3, 3) array; a hip on the trunk's own z axis has r along x."""
    length = hypot(hip[0], hip[1])
    r = np.array([hip[0] / length, hip[1] / length, 0.0]) if length > 0.0 else np.array([1.0, 0.0, 0.0])
    return np.array([r, [-r[1], r[0], 0.0], [0.0, 0.0, 1.0]])


def swing_angle(sideways: float, up: float) -> tuple[float, float]:
    """Return the sideways swing (rad, within ±π/2) and the foot's depth in the swung plane (m).

    A foot above the hip has negative depth.

    The smaller of the two possible swings is taken, so a foot lifted past the hip does not flip the knee
    over.
    """
    depth = hypot(sideways, up)
    if up <= 0.0 and depth > 0.0:
        return atan2(sideways, -up), depth
    return atan2(-sideways, up) + 0.0, -depth


def bend_angles(out: float, depth: float, upper: float, lower: float,
                side: float) -> tuple[float, float] | None:
    """Return (hip, knee) in rad for a foot at (out, depth) in the swung plane, or None out of reach.

    Law of cosines for the triangle of both links; `side` +1 puts the knee outward of the line from hip to
    foot, −1 inward.  The hip turns the upper link from straight down toward r; the lower link then points at
    hip + knee.
    """
    reach = hypot(out, depth)
    if reach > upper + lower or reach < abs(upper - lower) or reach == 0.0:
        return None
    at_hip = acos(min(1.0, max(-1.0, (upper**2 + reach**2 - lower**2) / (2.0 * upper * reach))))
    at_knee = acos(min(1.0, max(-1.0, (upper**2 + lower**2 - reach**2) / (2.0 * upper * lower))))
    return atan2(out, depth) + side * at_hip, side * (at_knee - pi)


def link_axes(axes: Array, swing: float, bend: float) -> Array:
    """Return a link's own axes as columns; `axes` from `leg_axes`.

    x runs along the link from its upper joint, y is its hinge (t at no swing), z = x × y (outward when
    hanging down).

    `bend` is the link's angle from straight down toward r, in the plane swung by `swing`.
    """
    r, t, z = axes
    down = -z * cos(swing) + t * sin(swing)
    x = down * cos(bend) + r * sin(bend)
    hinge = t * cos(swing) + z * sin(swing)
    return np.column_stack([x, hinge, np.cross(x, hinge)])


def reach_range(upper: float, lower: float) -> tuple[float, float]:
    """Return the least and the greatest distance between hip and foot."""
    return abs(upper - lower), upper + lower
