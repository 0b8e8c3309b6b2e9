"""Small machines built in Python, for tests of the geometry."""

from __future__ import annotations

from math import cos, pi, sin

from balance.machine.legs import Feet, Leg, Link
from balance.machine.machine import Lumped, Machine, Pose, StancePlan
from balance.machine.motors import Motor
from balance.machine.solids import Box, Part, RimAndWeb, RimWebSize, Tube, TubeSize
from balance.machine.stabilisers import Gimbal, Mount, ReactionWheel, Rotor, ScissoredPair, Turntable

FEET = {"fore": 0.0, "left": 2.0 * pi / 3.0, "right": 4.0 * pi / 3.0}
"""Three feet 120° apart."""

ROTOR = Rotor(mass=0.42, solid=RimAndWeb(RimWebSize(outer=0.15, inner=0.12, length=0.014, web=0.003, bore=0.008)))
MOTOR = Motor(torque_constant=0.045, resistance=0.12, peak_current=30.0, continuous_current=9.0, rotor_inertia=8.5e-5)


def on_circle(radius: float, angle: float, up: float = 0.0) -> tuple[float, float, float]:
    """Return a point on a circle about z."""
    return radius * cos(angle), radius * sin(angle), up


def wheel(axis: tuple[float, float, float], at: tuple[float, float, float] = (0.0, 0.0, 0.1)) -> ReactionWheel:
    """Return a reaction wheel with a direct drive."""
    return ReactionWheel(rotor=ROTOR, motor="hub", axis=axis, at=at)


def pair(turntable: bool, at: tuple[float, float, float] = (0.0, 0.0, 0.12)) -> ScissoredPair:
    """Return a scissored pair, spin axis up, gimbal axis along the trunk's y until the table turns it."""
    return ScissoredPair(
        rotor=ROTOR, spin_speed=600.0, gimbal=Gimbal(angle_limit=1.0, rate_limit=4.0, torque_limit=5.0, inertia=1e-3),
        at=at, frame_mass=0.3, spacing=0.2, mount=Mount(Turntable(2.0)) if turntable else None)


def three_legged(radius: float = 0.25, trunk: tuple[float, float, float] = (0.0, 0.0, 0.32), foot_radius: float = 0.0,
                 stabilisers: dict[str, ReactionWheel | ScissoredPair] | None = None, order: int = 1) -> Machine:
    """Return a three-legged machine with a stance on each pair of feet; `order` −1 writes the pairs the other way."""
    legs = {name: Leg(hip=on_circle(0.11, angle), upper=Link(0.19, 0.21, 0.4), lower=Link(0.21, 0.14, 0.45))
            for name, angle in FEET.items()}
    stances = {}
    for lifted, angle in FEET.items():
        down = [name for name in FEET if name != lifted][::order]
        stances[f"without-{lifted}"] = StancePlan(
            down={name: on_circle(radius, FEET[name]) for name in down},
            lifted={lifted: on_circle(radius, angle, 0.04)}, trunk=Pose(trunk))
    body = {
        "deck": Part(mass=1.9, solid=Box((0.24, 0.2, 0.05)), turn=(0.1, -0.2, 0.3)),
        "mast": Part(mass=0.35, solid=Tube(TubeSize(0.3, 0.03, 0.026)), at=(0.0, 0.01, 0.175)),
    }
    return Machine(
        format=1, machine="three legs", body=body, legs=legs, feet=Feet(foot_radius, 0.7), motors={"hub": MOTOR},
        stabilisers={"long": wheel((1.0, 0.0, 0.0)), "side": wheel((0.0, 1.0, 0.0))} if stabilisers is None else stabilisers,
        stances=stances, source="three-legs.yaml", marks={"stances": (3, 1), "stances.without-fore.down.left": (7, 12)})


def rig(height: float = 0.28, offset: float = 0.0, inertia: float = 0.33,
        axis: tuple[float, float, float] = (1.0, 0.0, 0.0)) -> Machine:
    """Return a lumped machine with one wheel."""
    return Machine(format=1, machine="rig", stabilisers={"wheel": wheel(axis)}, motors={"hub": MOTOR},
                   lumped=Lumped(mass=3.2, height=height, inertia=inertia, offset=offset, drag=0.01))
