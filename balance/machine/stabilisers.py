"""Stabilisers: reaction wheels and gimballed flywheels, as the machine file states them."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import choice, direction, flag, quantity, section, text, variant, vector
from balance.machine.materials import STOCK
from balance.machine.motors import Gear
from balance.machine.solids import SOLIDS, Solid, Tensor, Vector


@dataclass(frozen=True)
class Rotor:
    """The spinning part.  A solid with mass, density or material, or stated `spin` and `transverse` inertia with mass.

    A solid's own `along` must be z: the rotor's z is its spin axis.
    """

    mass: float | None = quantity("mass", above=0, default=None)
    density: float | None = quantity("density", above=0, default=None)
    solid: Solid | None = variant(SOLIDS, by="", default=None)
    spin: float | None = quantity("inertia", above=0, default=None, says="about the spin axis")
    transverse: float | None = quantity(
        "inertia", above=0, default=None, says="square to the spin axis, about the centre")
    material: str | None = choice(list(STOCK), default=None, says="in place of a density")


@dataclass(frozen=True)
class Drag:
    """Torque that slows a wheel: Coulomb part and viscous part."""

    coulomb: float = quantity("torque", least=0, default=0.0)
    viscous: float = quantity("angular damping", least=0, default=0.0)
    stiction: float = quantity("torque", least=0, default=0.0, says="what breaks a standing wheel loose, coulomb included")


@dataclass(frozen=True)
class Turntable:
    """A table that turns a wheel or a gimbal about the trunk's z to face the contact line."""

    rate_limit: float = quantity("angular speed", above=0)


@dataclass(frozen=True)
class Mount:
    """How the unit sits on the trunk: fixed (no turntable) or on a turntable."""

    turntable: Turntable | None = section(Turntable, default=None)


@dataclass(frozen=True)
class ReactionWheel:
    """`kind: reaction wheel`."""

    rotor: Rotor = section(Rotor)
    motor: str = text(says="a name under `motors`")
    axis: Vector = direction(default=(1.0, 0.0, 0.0), says="spin axis, trunk frame")
    at: Vector = vector("length", default=(0.0, 0.0, 0.0))
    gear: Gear | None = section(Gear, default=None)
    speed_limit: float = quantity("angular speed", above=0, default=float("inf"))
    torque_limit: float = quantity(
        "torque", above=0, default=float("inf"), says="at the wheel, on top of the motor's own")
    drag: Drag | None = section(Drag, default=None)
    bias_speed: float = quantity(
        "angular speed", default=0.0, says="the law keeps the wheel turning at this speed, away from stiction")
    mount: Mount | None = section(Mount, default=None)


@dataclass(frozen=True)
class Gimbal:
    """What turns the flywheel's frame.  `inertia` is the frame's own about the gimbal axis."""

    angle_limit: float = quantity("angle", above=0, below=1.5707963)
    rate_limit: float = quantity("angular speed", above=0)
    torque_limit: float = quantity("torque", above=0)
    drive: str = choice(["position servo", "torque motor"], default="position servo")
    bandwidth: float = quantity("frequency", above=0, default=20.0, says="of the servo's rate loop, in Hz")
    inertia: float = quantity("inertia", least=0, default=0.0)
    damping: float = quantity("angular damping", least=0, default=0.0)
    spring: float = quantity("angular stiffness", default=0.0)
    resolution: float = quantity("angle", least=0, default=0.0)
    dead_band: float = quantity("angle", least=0, default=0.0)


@dataclass(frozen=True)
class GimballedFlywheel:
    """`kind: gimballed flywheel`: a single one. Its off-line momentum goes to the feet."""

    rotor: Rotor = section(Rotor)
    spin_speed: float = quantity("angular speed", above=0)
    gimbal: Gimbal = section(Gimbal)
    spin_axis: Vector = direction(default=(0.0, 0.0, 1.0), says="at gimbal angle zero, trunk frame")
    gimbal_axis: Vector = direction(default=(0.0, 1.0, 0.0))
    at: Vector = vector("length", default=(0.0, 0.0, 0.0))
    mount: Mount | None = section(Mount, default=None)
    spin_motor: str | None = text(default=None, says="a name under `motors`: holds the flywheel's speed")
    frame_mass: float = quantity("mass", least=0, default=0.0)
    frame_inertia: Tensor | None = section(
        Tensor, default=None, says="of the frame about its centre, at angle zero, trunk axes")


@dataclass(frozen=True)
class ScissoredPair(GimballedFlywheel):
    """`kind: scissored pair`: two equal flywheels, opposite spin and opposite gimbal angle.

    Rotor, frame and gimbal inertia and the drive's torque limit are per flywheel; `at` is the pair's common
    centre and `spacing` the distance between the two rotor centres along the gimbal axis.
    """

    spacing: float = quantity("length", least=0, default=0.0)
    linked: bool = flag(default=False, says="the two gimbals are geared to each other")


Stabiliser = ReactionWheel | GimballedFlywheel | ScissoredPair
STABILISERS: dict[str, type] = {
    "reaction wheel": ReactionWheel, "gimballed flywheel": GimballedFlywheel, "scissored pair": ScissoredPair,
}
