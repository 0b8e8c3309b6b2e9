"""Outlines of rigid parts: enough points of a solid's surface that the hull of their projection is its outline."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from balance.machine.solids import (
    Box,
    Cylinder,
    Disc,
    Part,
    RimAndWeb,
    Ring,
    Rod,
    Solid,
    Sphere,
    Tube,
)
from balance.machine.stabilisers import GimballedFlywheel, ReactionWheel, Rotor, ScissoredPair
from balance.maths.rotations import turned
from balance.plant.record import Unit

Array = NDArray[np.float64]
AXES = {"x": (1, 2, 0), "y": (2, 0, 1), "z": (0, 1, 2)}
AROUND = np.linspace(0.0, math.tau, 49)[:-1]


def hull(points: Array) -> Array:
    """Convex hull of (k, 2) points, counter-clockwise, by the monotone chain (Andrew 1979, from memory)."""
    ordered = sorted({(round(float(a), 6), round(float(b), 6)) for a, b in points})
    if len(ordered) < 3:
        return np.array(ordered).reshape(-1, 2)
    chains = []
    for run in (ordered, ordered[::-1]):
        chain: list[tuple[float, float]] = []
        for p in run:
            while len(chain) > 1 and turn(chain[-2], chain[-1], p) <= 0.0:
                chain.pop()
            chain.append(p)
        chains.append(chain[:-1])
    return np.array(chains[0] + chains[1])


def turn(a: tuple[float, float], b: tuple[float, float], c: tuple[float, float]) -> float:
    """Twice the area of a, b, c: positive when they turn left."""
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def round_points(diameter: float, length: float, along: str) -> Array:
    """Rims of both ends of a cylinder about its centre, (2n, 3)."""
    a, b, c = AXES[along]
    points = np.zeros((2, AROUND.size, 3))
    points[:, :, a], points[:, :, b] = diameter / 2 * np.cos(AROUND), diameter / 2 * np.sin(AROUND)
    points[0, :, c], points[1, :, c] = -length / 2, length / 2
    return points.reshape(-1, 3)


def solid_points(solid: Solid) -> Array:  # noqa: PLR0911 - one return per kind
    """Points on a solid's surface about its own centre, (k, 3) m."""
    match solid:
        case Box():
            corners = np.array([[x, y, z] for x in (-1, 1) for y in (-1, 1) for z in (-1, 1)])
            half: Array = 0.5 * corners * np.asarray(solid.box)
            return half
        case Cylinder(size) | Disc(size):
            return round_points(size.diameter, size.length, size.along)
        case Tube(hollow) | Ring(hollow):
            return round_points(hollow.outer, hollow.length, hollow.along)
        case RimAndWeb(wheel):
            return round_points(wheel.outer, wheel.length, wheel.along)
        case Rod(thin):
            return round_points(0.0, thin.length, thin.along)
        case Sphere():
            rings = [round_points(solid.sphere * math.cos(a), solid.sphere * math.sin(a), "z")
                     for a in np.linspace(0.0, math.pi / 2, 9)]
            return np.concatenate(rings)
        case _:
            return np.zeros((1, 3))


def part_points(part: Part) -> Array:
    """A body part's surface in the trunk frame, (k, 3) m; one stated by its tensor alone is its centre."""
    own = solid_points(part.solid) if part.solid is not None else np.zeros((1, 3))
    placed: Array = own @ turned(*part.turn).T + np.asarray(part.at)
    return placed


def rotor_diameter(rotor: Rotor) -> float | None:
    """Outer diameter in m where the file shows it."""
    match rotor.solid:
        case Cylinder(size) | Disc(size):
            return size.diameter
        case Tube(hollow) | Ring(hollow):
            return hollow.outer
        case RimAndWeb(wheel):
            return wheel.outer
        case _:
            return None


def rotor_points(stabiliser: ReactionWheel | GimballedFlywheel, unit: Unit) -> list[Array]:
    """Surfaces of a unit's rotors in the trunk frame; one stated by numbers alone is drawn as a disc of its inertia."""
    rotor = stabiliser.rotor
    if rotor.solid is not None:
        own = solid_points(rotor.solid)
    elif rotor.mass:
        own = round_points(2.0 * math.sqrt(2.0 * unit.inertia / rotor.mass), 0.0, "z")
    else:
        return []
    across = np.linalg.svd(unit.axis_T.reshape(1, 3))[2][1:]                                      # (2, 3)
    placed = own @ np.vstack([across, unit.axis_T]) + unit.at_T
    if isinstance(stabiliser, ScissoredPair) and unit.gimbal_axis_T is not None:
        apart = stabiliser.spacing / 2 * unit.gimbal_axis_T
        return [placed - apart, placed + apart]
    return [placed]
