"""The machine file as one record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from balance.files.fields import Shape, place, quantity, section, table, text, vector
from balance.machine.legs import Feet, Leg, LegCompliance, LegPose
from balance.machine.measured import Measured
from balance.machine.motors import Motor, Supply
from balance.machine.solids import Part, Vector
from balance.machine.stabilisers import STABILISERS, Stabiliser
from balance.machine.tolerances import Tolerances

STANDARD_GRAVITY = 9.80665
"""m/s², standard gravity (CGPM 1901)."""

Marks = Mapping[str, tuple[int, int]]


@dataclass(frozen=True)
class Lumped:
    """The quick start: the body by three numbers about the contact line (e = trunk x, up = trunk z).

    `inertia` leaves out the wheel's own spin inertia but holds the wheel's mass, as `mass` and `height` do.
    """

    mass: float = quantity("mass", above=0)
    height: float = quantity("length", above=0)
    inertia: float = quantity("inertia", above=0, says="about the line, wheel free to spin")
    offset: float = quantity("length", default=0.0)
    drag: float = quantity("angular damping", least=0, default=0.0, says="of the bearings, about the line")


@dataclass(frozen=True)
class Imu:
    """Inertial measurement unit."""

    at: Vector = vector("length", default=(0.0, 0.0, 0.0))
    rate: float = quantity("frequency", above=0, default=1000.0)
    gyro_noise: float = quantity("gyro noise", least=0, default=0.0, says="density, rad/s/√Hz")
    gyro_bias: float = quantity("angular speed", default=0.0)
    accel_noise: float = quantity("acceleration noise", least=0, default=0.0, says="density, m/s²/√Hz")
    tilt_bias: float = quantity("angle", default=0.0)
    gyro_range: float = quantity("angular speed", above=0, default=float("inf"))
    accel_range: float = quantity("acceleration", above=0, default=float("inf"))
    gyro_resolution: float = quantity("angular speed", least=0, default=0.0, says="one count")
    accel_resolution: float = quantity("acceleration", least=0, default=0.0, says="one count")


@dataclass(frozen=True)
class Pose:
    """Where the trunk is, world frame."""

    at: Vector = vector("length")
    turn: Vector = vector("angle", default=(0.0, 0.0, 0.0))


_POINT = Shape("list", items=Shape("quantity", "length"), length=3)


@dataclass(frozen=True)
class StancePlan:
    """Two feet down and the rest lifted to stated places: foot name -> contact point in the world.

    A leg under `poses` is placed by its stated joint angles, and must end at its foot.
    """

    down: dict[str, Vector] = place(Shape("table", items=_POINT))
    trunk: Pose = section(Pose)
    lifted: dict[str, Vector] = place(Shape("table", items=_POINT), None)
    poses: dict[str, LegPose] | None = table(LegPose, default=None)


@dataclass(frozen=True)
class Machine:
    """A whole machine file. Exactly one of `lumped` and (`body`, `stances`)."""

    format: int = place(Shape("whole", least=1, most=1, says="1"))
    machine: str = text(says="the machine's name")
    stabilisers: dict[str, Stabiliser] = place(
        Shape("table", items=Shape("variant", variants=tuple(STABILISERS.items()), by="kind")))
    gravity: float = quantity("acceleration", above=0, default=STANDARD_GRAVITY)
    lumped: Lumped | None = section(Lumped, default=None)
    body: dict[str, Part] | None = table(Part, default=None)
    legs: dict[str, Leg] | None = table(Leg, default=None)
    feet: Feet | None = section(Feet, default=None)
    leg_compliance: LegCompliance | None = section(LegCompliance, default=None)
    motors: dict[str, Motor] | None = table(Motor, default=None)
    supply: Supply | None = section(Supply, default=None)
    imu: Imu | None = section(Imu, default=None)
    stances: dict[str, StancePlan] | None = table(StancePlan, default=None)
    tolerances: Tolerances | None = section(Tolerances, default=None)
    measured: Measured | None = section(Measured, default=None)
    # neither is a key of the file: its path, and dotted key -> (line, column) in it
    source: str = field(default="", metadata={"shape": None})
    marks: Marks = field(default_factory=dict, metadata={"shape": None}, compare=False)

    def stance_names(self) -> tuple[str, ...]:
        """Names of the stances in file order; a lumped machine has the one stance `line`."""
        return tuple(self.stances) if self.stances else ("line",)
