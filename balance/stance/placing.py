"""Legs from hip to foot: joint angles, links as bodies, and what is out of reach."""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot

import numpy as np
from numpy.typing import NDArray

from balance.machine.legs import Leg, LegPose, Link
from balance.maths.inertia import rotated
from balance.maths.legs import bend_angles, leg_axes, link_axes, reach_range, swing_angle
from balance.stance.bodies import Body
from balance.stance.parts import stated_tensor

Array = NDArray[np.float64]

SLACK = 5e-3
"""How far a one-link leg may miss the distance from hip to foot, as a share of its length.

Coordinates are written to a millimetre or so; the link is laid along the true line."""


@dataclass(frozen=True)
class PlacedLeg:
    """A leg in the trunk's axes."""

    joints: tuple[float, ...]      # rad: swing, hip and, with two links, knee
    bodies: tuple[Body, ...]
    points: Array                  # (2 or 3, 3) m: hip, knee, end of the leg


@dataclass(frozen=True)
class OutOfReach:
    """Why a leg cannot be placed: the distance asked for and what the links can span."""

    distance: float
    least: float
    most: float


def place_leg(name: str, leg: Leg, end: Array) -> PlacedLeg | OutOfReach:
    """Return a leg whose end stands at `end` (3,), in the trunk's axes.

    Closed form: the sideways swing from the foot's place across the leg, then the triangle of the two links
    by the law of cosines.
    """
    hip = np.array(leg.hip)
    axes = leg_axes(hip)
    out, sideways, up = (float(x) for x in axes @ (end - hip))
    swing, depth = swing_angle(sideways, up)
    if leg.lower is None:
        return _one_link(name, leg, hip, end, swing, float(np.arctan2(out, depth)))
    side = 1.0 if leg.knee == "outward" else -1.0
    found = bend_angles(out, depth, leg.upper.length, leg.lower.length, side)
    if found is None:
        return OutOfReach(hypot(out, depth), *reach_range(leg.upper.length, leg.lower.length))
    bend, knee_angle = found
    R_upper, R_lower = link_axes(axes, swing, bend), link_axes(axes, swing, bend + knee_angle)
    knee = hip + leg.upper.length * R_upper[:, 0]
    bodies = (_link(f"{name} upper", leg.upper, hip, R_upper, leg.upper.length),
              _link(f"{name} lower", leg.lower, knee, R_lower, leg.lower.length))
    return PlacedLeg((swing, bend, knee_angle), bodies, np.array([hip, knee, end]))


def pose_leg(name: str, leg: Leg, pose: LegPose) -> PlacedLeg:
    """Return a leg laid by stated joint angles, in the trunk's axes; its end is wherever they put it."""
    hip, axes = np.array(leg.hip), leg_axes(np.array(leg.hip))
    R_upper = link_axes(axes, pose.swing, pose.hip)
    knee = hip + leg.upper.length * R_upper[:, 0]
    upper = _link(f"{name} upper" if leg.lower else name, leg.upper, hip, R_upper, leg.upper.length)
    if leg.lower is None:
        return PlacedLeg((pose.swing, pose.hip), (upper,), np.array([hip, knee]))
    R_lower = link_axes(axes, pose.swing, pose.hip + pose.knee)
    end = knee + leg.lower.length * R_lower[:, 0]
    lower = _link(f"{name} lower", leg.lower, knee, R_lower, leg.lower.length)
    return PlacedLeg((pose.swing, pose.hip, pose.knee), (upper, lower), np.array([hip, knee, end]))


def _one_link(name: str, leg: Leg, hip: Array, end: Array, swing: float,
              bend: float) -> PlacedLeg | OutOfReach:
    length, span = leg.upper.length, float(np.linalg.norm(end - hip))
    if abs(span - length) > SLACK * length:
        return OutOfReach(span, length, length)
    body = _link(name, leg.upper, hip, link_axes(leg_axes(hip), swing, bend), span)
    return PlacedLeg((swing, bend), (body,), np.array([hip, end]))


def _link(name: str, link: Link, joint: Array, R: Array, span: float) -> Body:
    """Return a link as a body: a thin rod about its stated centre unless its tensor is stated."""
    across = link.mass * span**2 / 12.0
    I_own = stated_tensor(link.inertia) if link.inertia is not None else np.diag([0.0, across, across])
    return Body(name, link.mass, joint + link.centre * span * R[:, 0], rotated(I_own, R))


def beyond_limits(leg: Leg, joints: tuple[float, ...]) -> list[tuple[str, float, float]]:
    """Return (joint, angle, limit) in rad for every joint bent further than its limit allows."""
    if leg.limits is None:
        return []
    limits = (("swing", leg.limits.swing), ("hip", leg.limits.hip), ("knee", leg.limits.knee))
    return [(name, angle, limit) for (name, limit), angle in zip(limits, joints, strict=False)
            if abs(angle) > limit]
