"""Legs: two links and a hip, placed by inverse kinematics from hip to foot (`stance` does the placing)."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import choice, number, quantity, section, vector
from balance.machine.solids import Tensor, Vector


@dataclass(frozen=True)
class Link:
    """One link: a thin rod unless centre and inertia are stated (x along the link from its upper joint)."""

    length: float = quantity("length", above=0)
    mass: float = quantity("mass", above=0)
    centre: float = number(least=0, most=1, default=0.5, says="of its mass, share of the length from above")
    inertia: Tensor | None = section(Tensor, default=None)


@dataclass(frozen=True)
class JointLimits:
    """Allowed joint angles: swing sideways, hip from straight down, knee from straight."""

    swing: float = quantity("angle", above=0, default=3.2)
    hip: float = quantity("angle", above=0, default=3.2)
    knee: float = quantity("angle", above=0, default=3.2)


@dataclass(frozen=True)
class LegPose:
    """Joint angles stated for one leg in one stance, in place of those that inverse kinematics would find."""

    hip: float = quantity("angle", says="from straight down, outward positive")
    swing: float = quantity("angle", default=0.0, says="sideways, before the hip bends")
    knee: float = quantity("angle", default=0.0, says="from straight, as the hip counts")


@dataclass(frozen=True)
class Leg:
    """One leg. Without `lower` it is a single link that must span hip to foot."""

    hip: Vector = vector("length")
    upper: Link = section(Link)
    lower: Link | None = section(Link, default=None)
    knee: str = choice(["outward", "inward"], default="outward")
    limits: JointLimits | None = section(JointLimits, default=None)


@dataclass(frozen=True)
class LegCompliance:
    """How the legs give across the contact line: a hinge between the line and the trunk, all mass above it.

    Point feet pass no torque about the line, so a spring there does nothing: what gives are links, joints and the hip.
    """

    height: float = quantity("length", above=0, says="of the hinge above the contact line")
    stiffness: float = quantity("angular stiffness", above=0)
    damping: float = quantity("angular damping", least=0, default=0.0)


@dataclass(frozen=True)
class Feet:
    """All feet alike: ball radius (0 = a point) and friction coefficient against the ground."""

    radius: float = quantity("length", least=0, default=0.0)
    friction: float = number(above=0, default=0.6)
