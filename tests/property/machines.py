"""Random machines that can stand: any solids, leg shapes, trunk poses, feet at any height, wheels and pairs."""

from __future__ import annotations

from math import pi

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError
from balance.machine.legs import Feet, Leg, Link
from balance.machine.machine import Machine, Pose, StancePlan
from balance.machine.motors import Gear, Motor
from balance.machine.solids import (
    Box,
    Cylinder,
    Part,
    PointMass,
    RimAndWeb,
    RimWebSize,
    Rod,
    RodSize,
    RoundSize,
    Solid,
    Sphere,
    Tensor,
    Tube,
    TubeSize,
    Vector,
)
from balance.machine.stabilisers import (
    Gimbal,
    GimballedFlywheel,
    Mount,
    ReactionWheel,
    Rotor,
    ScissoredPair,
    Stabiliser,
    Turntable,
)
from balance.maths.rotations import turned, unit
from balance.stance.build import build_stance

Array = NDArray[np.float64]


def triple(values: Array) -> Vector:
    """Return three floats as the records keep them."""
    x, y, z = (float(v) for v in values)
    return x, y, z


def random_solid(rng: np.random.Generator) -> Solid:
    """Return any solid of some centimetres."""
    a, b, c = (float(v) for v in rng.uniform(0.03, 0.3, 3))
    along = str(rng.choice(["x", "y", "z"]))
    kinds: list[Solid] = [Box((a, b, c)), Cylinder(RoundSize(a, b, along)), Tube(TubeSize(a, b, 0.8 * b, along)),
                          RimAndWeb(RimWebSize(b, 0.7 * b, a, 0.3 * a, 0.1 * b, along)), Sphere(a), Rod(RodSize(c, along)),
                          PointMass()]
    return kinds[int(rng.integers(len(kinds)))]


def random_part(rng: np.random.Generator) -> Part:
    """Return a part with a solid or a stated tensor, somewhere in the trunk."""
    at, turn = triple(rng.uniform(-0.15, 0.15, 3)), triple(rng.uniform(-pi, pi, 3))
    mass = float(rng.uniform(0.1, 3.0))
    if rng.random() < 0.3:
        points = rng.normal(size=(8, 3)) * 0.05               # a tensor that some body has
        I = mass / 8.0 * (np.einsum("ni,ni->", points, points) * np.eye(3) - points.T @ points)  # noqa: E741
        return Part(mass=mass, at=at, turn=turn, inertia=Tensor(
            *(float(I[i, i]) for i in range(3)), float(I[0, 1]), float(I[0, 2]), float(I[1, 2])))
    return Part(mass=mass, solid=random_solid(rng), at=at, turn=turn)


def random_stabiliser(rng: np.random.Generator) -> Stabiliser:
    """Return a wheel on any axis, geared or not, a single gimballed flywheel or a scissored pair."""
    a, b = (float(v) for v in rng.uniform(0.05, 0.2, 2))
    rotor = Rotor(mass=float(rng.uniform(0.2, 2.0)), solid=RimAndWeb(RimWebSize(b, 0.8 * b, 0.2 * a, 0.05 * a, 0.1 * b)))
    at = triple(rng.uniform(-0.1, 0.1, 3))
    kind = int(rng.integers(3))
    if kind == 0:
        gear = Gear(float(rng.uniform(1.0, 6.0)), str(rng.choice(["same", "reversed"]))) if rng.random() < 0.5 else None
        return ReactionWheel(rotor=rotor, motor="hub", axis=triple(unit(rng.normal(size=3))), at=at, gear=gear)
    spin = unit(rng.normal(size=3))
    gimbal_axis = unit(np.cross(spin, rng.normal(size=3)))
    gimbal = Gimbal(angle_limit=1.0, rate_limit=4.0, torque_limit=5.0, inertia=float(rng.uniform(1e-4, 1e-3)))
    mount = Mount(Turntable(2.0)) if rng.random() < 0.5 else None
    common = {"rotor": rotor, "spin_speed": 600.0, "gimbal": gimbal, "spin_axis": triple(spin), "at": at, "mount": mount,
              "gimbal_axis": triple(gimbal_axis), "frame_mass": float(rng.uniform(0.0, 0.5))}
    return GimballedFlywheel(**common) if kind == 1 else ScissoredPair(spacing=a, **common)


def random_legs(rng: np.random.Generator, n: int) -> dict[str, Leg]:
    """Return n two-link legs around the trunk."""
    legs = {}
    for i, angle in enumerate(2.0 * pi * (np.arange(n) + rng.uniform(-0.2, 0.2, n)) / n):
        hip = 0.12 * np.array([np.cos(angle), np.sin(angle), 0.0]) + rng.uniform(-0.03, 0.03, 3)
        upper, lower = (Link(float(rng.uniform(0.17, 0.23)), float(rng.uniform(0.1, 0.3)), float(rng.uniform(0.3, 0.7)))
                        for _ in range(2))
        legs[f"leg{i}"] = Leg(hip=triple(hip), upper=upper, lower=lower, knee=str(rng.choice(["outward", "inward"])))
    return legs


def random_plan(rng: np.random.Generator, legs: dict[str, Leg]) -> StancePlan:
    """Return a stance with every foot where its leg can reach it, two down at different heights, the rest some way up."""
    roll, pitch = rng.uniform(-0.15, 0.15, 2)
    at = triple(rng.uniform([-0.1, -0.1, 0.2], [0.1, 0.1, 0.4]))
    pose = Pose(at, (float(roll), float(pitch), float(rng.uniform(-pi, pi))))
    R = turned(*pose.turn)
    feet = {}
    for name, leg in legs.items():
        out = np.array([leg.hip[0], leg.hip[1], 0.0]) * rng.uniform(0.5, 1.0)
        feet[name] = np.array(pose.at) + R @ (np.array(leg.hip) + out) - [0.0, 0.0, rng.uniform(0.26, 0.3)]
    down = list(rng.permutation(list(legs))[:2])
    lifted = {name: triple(at + np.array([0.0, 0.0, 0.1])) for name, at in feet.items() if name not in down}
    return StancePlan(down={name: triple(feet[name]) for name in down}, lifted=lifted, trunk=pose)


def random_machine(rng: np.random.Generator) -> Machine:
    """Return a machine whose one stance `s` can be built."""
    legs = random_legs(rng, int(rng.integers(2, 6)))
    motor = Motor(torque_constant=0.05, resistance=0.2, peak_current=20.0, continuous_current=8.0,
                  rotor_inertia=float(rng.uniform(1e-6, 1e-4)))
    machine = Machine(
        format=1, machine="random", motors={"hub": motor}, legs=legs,
        body={f"part{i}": random_part(rng) for i in range(int(rng.integers(1, 6)))},
        stabilisers={f"unit{i}": random_stabiliser(rng) for i in range(int(rng.integers(1, 4)))},
        feet=Feet(radius=float(rng.choice([0.0, 0.02]))), stances={"s": random_plan(rng, legs)}, source="random.yaml")
    try:
        build_stance(machine, "s")
    except InputError:          # a lifted foot below a steep line or out of reach: draw again
        return random_machine(rng)
    return machine
