"""Rigid parts: a mass with a solid's shape or a stated tensor, at a place and turn in the trunk frame."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import Shape, choice, place, quantity, section, variant, vector
from balance.machine.materials import STOCK

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Tensor:
    """Inertia about the part's own centre; products follow xy = −∫xy dm."""

    xx: float = quantity("inertia", least=0)
    yy: float = quantity("inertia", least=0)
    zz: float = quantity("inertia", least=0)
    xy: float = quantity("inertia", default=0.0)
    xz: float = quantity("inertia", default=0.0)
    yz: float = quantity("inertia", default=0.0)


@dataclass(frozen=True)
class Box:
    """A box; the file writes `box: [x, y, z]`."""

    box: Vector = place(Shape("list", items=Shape("quantity", "length", above=0), length=3))


@dataclass(frozen=True)
class RoundSize:
    """A full cylinder, disc, or rod."""

    length: float = quantity("length", above=0)
    diameter: float = quantity("length", above=0)
    along: str = choice(["x", "y", "z"], default="z")


@dataclass(frozen=True)
class TubeSize:
    """A tube or ring."""

    length: float = quantity("length", above=0)
    outer: float = quantity("length", above=0, says="outer diameter")
    inner: float = quantity("length", above=0, says="inner diameter")
    along: str = choice(["x", "y", "z"], default="z")


@dataclass(frozen=True)
class RimWebSize:
    """A flywheel of a rim and a web (a thin disc from bore to rim), one density."""

    outer: float = quantity("length", above=0, says="outer diameter of the rim")
    inner: float = quantity("length", above=0, says="inner diameter of the rim")
    length: float = quantity("length", above=0, says="axial length of the rim")
    web: float = quantity("length", above=0, says="thickness of the web")
    bore: float = quantity("length", least=0, default=0.0, says="diameter of the bore")
    along: str = choice(["x", "y", "z"], default="z")


@dataclass(frozen=True)
class RodSize:
    """A thin rod."""

    length: float = quantity("length", above=0)
    along: str = choice(["x", "y", "z"], default="z")


@dataclass(frozen=True)
class Cylinder:
    """`cylinder: {length, diameter, along}`."""

    cylinder: RoundSize = section(RoundSize)


@dataclass(frozen=True)
class Disc:
    """`disc: {length, diameter, along}`: a flat cylinder."""

    disc: RoundSize = section(RoundSize)


@dataclass(frozen=True)
class Tube:
    """`tube: {length, outer, inner, along}`."""

    tube: TubeSize = section(TubeSize)


@dataclass(frozen=True)
class Ring:
    """`ring: {length, outer, inner, along}`: a short tube."""

    ring: TubeSize = section(TubeSize)


@dataclass(frozen=True)
class RimAndWeb:
    """`rim_and_web: {...}`."""

    rim_and_web: RimWebSize = section(RimWebSize)


@dataclass(frozen=True)
class Sphere:
    """`sphere: DIAMETER`."""

    sphere: float = quantity("length", above=0, says="diameter")


@dataclass(frozen=True)
class Rod:
    """`rod: {length, along}`."""

    rod: RodSize = section(RodSize)


@dataclass(frozen=True)
class PointMass:
    """`point: 0 mm`: no size."""

    point: float = quantity("length", least=0, most=0, default=0.0)


SOLIDS: dict[str, type] = {
    "box": Box, "cylinder": Cylinder, "disc": Disc, "tube": Tube, "ring": Ring, "rim_and_web": RimAndWeb,
    "sphere": Sphere, "rod": Rod, "point": PointMass,
}
Solid = Box | Cylinder | Disc | Tube | Ring | RimAndWeb | Sphere | Rod | PointMass


@dataclass(frozen=True)
class Part:
    """A rigid part of the trunk. Exactly one of `solid` and `inertia`; `mass`, or `density` or `material` with a solid."""

    mass: float | None = quantity("mass", above=0, default=None)
    density: float | None = quantity("density", above=0, default=None)
    solid: Solid | None = variant(SOLIDS, by="", default=None)
    inertia: Tensor | None = section(Tensor, default=None)
    at: Vector = vector("length", default=(0.0, 0.0, 0.0))
    turn: Vector = vector("angle", default=(0.0, 0.0, 0.0))
    material: str | None = choice(list(STOCK), default=None, says="in place of a density")
