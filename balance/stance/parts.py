"""Parts of the trunk: a solid or a stated tensor, turned and placed."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from balance.machine.materials import density_of
from balance.machine.solids import (
    Box,
    Cylinder,
    Disc,
    Part,
    PointMass,
    RimAndWeb,
    Ring,
    Rod,
    Solid,
    Sphere,
    Tensor,
    Tube,
)
from balance.maths.inertia import rotated, tensor
from balance.maths.rotations import turned
from balance.maths.solids import box, laid, point, rim_and_web, rod, sphere, tube
from balance.stance.bodies import Body

Array = NDArray[np.float64]


def solid_shape(solid: Solid) -> tuple[float, Array]:  # noqa: PLR0911 - one return per kind
    """Return volume (m³; 0 for rods and points) and tensor per unit of mass (m², (3, 3)) about its centre."""
    match solid:
        case Box(sides):
            return box(*sides)
        case Cylinder(size) | Disc(size):
            return laid(tube(size.diameter, 0.0, size.length), size.along)
        case Tube(size) | Ring(size):
            return laid(tube(size.outer, size.inner, size.length), size.along)
        case RimAndWeb(size):
            return laid(rim_and_web(size.outer, size.inner, size.length, size.web, size.bore), size.along)
        case Sphere(diameter):
            return sphere(diameter)
        case Rod(size):
            return laid(rod(size.length), size.along)
        case PointMass():
            return point()


def solid_mass(solid: Solid | None, mass: float | None, density: float | None) -> tuple[float, Array]:
    """Return mass (kg) and tensor (kg·m², (3, 3)) of a solid given by mass or density; no solid: a point."""
    volume, unit_tensor = solid_shape(solid) if solid is not None else point()
    found = mass if mass is not None else (density or 0.0) * volume
    return found, found * unit_tensor


def stated_tensor(stated: Tensor) -> Array:
    """Return a file's tensor as an array (3, 3); its products already follow xy = −∫xy dm."""
    return tensor(stated.xx, stated.yy, stated.zz, stated.xy, stated.xz, stated.yz)


def part_body(name: str, part: Part) -> Body:
    """Return one part in the trunk's axes."""
    mass, I_own = solid_mass(part.solid, part.mass, density_of(part.density, part.material))
    if part.inertia is not None:
        I_own = stated_tensor(part.inertia)
    return Body(name, mass, np.array(part.at), rotated(I_own, turned(*part.turn)))


def trunk_bodies(parts: Mapping[str, Part] | None) -> list[Body]:
    """Return all parts in the trunk's axes, in file order."""
    return [part_body(name, part) for name, part in (parts or {}).items()]
