"""What must hold of any machine's stance: mirror, order of the file, motion of the world, choice of units."""

from __future__ import annotations

from dataclasses import replace
from math import pi

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.machine.machine import Machine, Pose, StancePlan
from balance.machine.solids import Part, Tensor, Vector
from balance.machine.stabilisers import Mount, ReactionWheel, Stabiliser, Turntable
from balance.maths.rotations import about, unit
from balance.stance.build import build_stance
from balance.stance.record import Stance
from balance.stance.rotors import stabiliser_bodies
from balance.stance.stiffness import balanced_lean
from tests.property.machines import random_machine
from tests.property.units import Units, rescaled

Array = NDArray[np.float64]

ROUNDING = 1e-11
"""Relative to the largest number of a kind: sums over some twenty bodies, and joints by acos near a straight leg."""

SEEDS = range(40)


def numbers(s: Stance) -> Array:
    """Return what the contact line sees."""
    return np.array([s.mass, s.height, s.offset, s.inertia_locked, s.slope, s.length, s.touch_down_lean or 0.0])


def close(a: Array, b: Array) -> bool:
    return bool(np.all(np.abs(a - b) < ROUNDING * np.maximum(1.0, np.abs(a))))


def mirrored_point(p: Vector) -> Vector:
    return p[0], -p[1], p[2]


def mirrored_turn(turn: Vector) -> Vector:
    """A mirror in the x-z plane keeps pitch and reverses roll and yaw."""
    return -turn[0], turn[1], -turn[2]


def mirrored_part(part: Part) -> Part:
    """Solids are their own mirror images; a stated tensor's products with y change sign."""
    inertia = part.inertia
    if inertia is not None:
        inertia = Tensor(inertia.xx, inertia.yy, inertia.zz, -inertia.xy, inertia.xz, -inertia.yz)
    return replace(part, at=mirrored_point(part.at), turn=mirrored_turn(part.turn), inertia=inertia)


def mirrored_unit(unit_: Stabiliser) -> Stabiliser:
    at = mirrored_point(unit_.at)
    if isinstance(unit_, ReactionWheel):
        return replace(unit_, at=at, axis=mirrored_point(unit_.axis))
    # the spin's image is −M s, so g × s and the table that turns it are mirrored too
    return replace(unit_, at=at, spin_axis=mirrored_point(unit_.spin_axis), gimbal_axis=mirrored_point(unit_.gimbal_axis))


def mirrored_plan(plan: StancePlan) -> StancePlan:
    """Written in the other order: a mirror turns a right-handed e, u, w into a left-handed one."""
    lifted = {foot: mirrored_point(at) for foot, at in (plan.lifted or {}).items()}
    down = {foot: mirrored_point(plan.down[foot]) for foot in reversed(plan.down)}
    return StancePlan(down=down, lifted=lifted, trunk=Pose(mirrored_point(plan.trunk.at), mirrored_turn(plan.trunk.turn)))


def mirrored(machine: Machine) -> Machine:
    assert machine.body is not None
    assert machine.legs is not None
    assert machine.stances is not None
    return replace(machine, body={n: mirrored_part(p) for n, p in machine.body.items()},
                   legs={n: replace(leg, hip=mirrored_point(leg.hip)) for n, leg in machine.legs.items()},
                   stabilisers={n: mirrored_unit(u) for n, u in machine.stabilisers.items()},
                   stances={n: mirrored_plan(p) for n, p in machine.stances.items()})


@pytest.mark.parametrize("seed", SEEDS)
def test_mirror_image_stands_alike(seed: int) -> None:
    machine = random_machine(np.random.default_rng(seed))
    s, t = build_stance(machine, "s"), build_stance(mirrored(machine), "s")
    M = np.diag([1.0, -1.0, 1.0])
    one_side = replace(t, slope=-t.slope)              # the line runs the other way, so its slope has the other sign
    assert close(numbers(s), numbers(one_side))
    assert close(s.com_W, M @ t.com_W)
    assert not close(s.com_W, t.com_W)
    assert close(s.w_W, M @ t.w_W)
    assert close(s.I_com_W, M @ t.I_com_W @ M)
    for leg, (swing, *bends) in s.joints.items():
        assert close(np.array([-swing, *bends]), np.array(t.joints[leg]))


@pytest.mark.parametrize("seed", SEEDS)
def test_order_of_the_file_does_not_matter(seed: int) -> None:
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    s = build_stance(machine, "s")
    shuffled = {}
    for table in ("body", "legs", "stabilisers"):
        entries = list(getattr(machine, table).items())
        shuffled[table] = dict(entries[i] for i in rng.permutation(len(entries)))
    t = build_stance(replace(machine, **shuffled), "s")
    assert close(numbers(s), numbers(t))
    assert close(s.I_com_W, t.I_com_W)
    less = replace(machine, stabilisers=dict(list(machine.stabilisers.items())[1:]))
    assert not close(numbers(s), numbers(build_stance(less, "s")))


@pytest.mark.parametrize("seed", SEEDS)
def test_the_world_has_no_north_and_no_middle(seed: int) -> None:
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    s = build_stance(machine, "s")
    R, shift, yaw = np.eye(3), rng.uniform(-2.0, 2.0, 3), rng.uniform(-pi, pi)
    R = about([0.0, 0.0, 1.0], yaw)

    def moved(p: Vector) -> Vector:
        x, y, z = (float(v) for v in R @ p + shift)
        return x, y, z

    assert machine.stances is not None
    plan = machine.stances["s"]
    roll, pitch, own_yaw = plan.trunk.turn
    elsewhere = StancePlan(
        down={n: moved(p) for n, p in plan.down.items()}, lifted={n: moved(p) for n, p in (plan.lifted or {}).items()},
        trunk=Pose(moved(plan.trunk.at), (roll, pitch, own_yaw + yaw)))
    t = build_stance(replace(machine, stances={"s": elsewhere}), "s")
    assert close(numbers(s), numbers(t))
    assert close(R @ s.I_com_W @ R.T, t.I_com_W)
    assert close(R @ s.com_W + shift, t.com_W)
    tilted = replace(elsewhere, trunk=replace(elsewhere.trunk, turn=(roll + 1e-3, pitch, own_yaw + yaw)))
    assert not close(numbers(s), numbers(build_stance(replace(machine, stances={"s": tilted}), "s")))


STANCE_UNITS = {        # powers of kilogram, metre, second
    "gravity": (0, 1, -2), "mass": (1, 0, 0), "height": (0, 1, 0), "offset": (0, 1, 0), "inertia_locked": (1, 2, 0),
    "slope": (0, 0, 0), "length": (0, 1, 0), "foot_radius": (0, 1, 0), "drag": (1, 2, -1), "com_W": (0, 1, 0),
    "I_com_W": (1, 2, 0), "e_W": (0, 0, 0), "w_W": (0, 0, 0), "p_a_W": (0, 1, 0),
}


def disagreements(s: Stance, t: Stance, units: Units) -> list[str]:
    """Return the names of the numbers of `t` that are not those of `s` in other units."""
    found = []
    for name, powers in STANCE_UNITS.items():
        a, b = np.asarray(getattr(s, name)) * units.factor(*powers), np.asarray(getattr(t, name))
        scale = max(float(np.abs(a).max()), units.factor(*powers) * 1e-3)
        if np.abs(a - b).max() > ROUNDING * scale:
            found.append(name)
    found += [leg for leg in s.joints if not close(np.array(s.joints[leg]), np.array(t.joints[leg]))]
    if (s.touch_down_lean is None) != (t.touch_down_lean is None) or abs(balanced_lean(s) - balanced_lean(t)) > ROUNDING:
        found.append("angles")
    return found


@pytest.mark.parametrize("seed", SEEDS)
def test_numbers_scale_with_the_units(seed: int) -> None:
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    units = Units(*(float(x) for x in 10.0 ** rng.uniform(-3.0, 3.0, 4)))
    s = build_stance(machine, "s")
    t = build_stance(rescaled(machine, units), "s")
    assert disagreements(s, t, units) == []
    wrong = build_stance(replace(rescaled(machine, units), gravity=machine.gravity), "s")
    assert "gravity" in disagreements(s, wrong, units)


@pytest.mark.parametrize("seed", SEEDS)
def test_frames_and_signs(seed: int) -> None:
    machine = random_machine(np.random.default_rng(seed))
    s = build_stance(machine, "s")
    assert close(np.cross(s.e_W, s.u_W), s.w_W)
    assert s.u_W[2] > 0.0
    assert abs(s.w_W[2]) < 1e-15
    along = (s.com_W - s.p_a_W) @ s.e_W
    assert close(s.p_a_W + along * s.e_W + s.height * s.u_W + s.offset * s.w_W, s.com_W)
    sides = [across for across, _ in s.lifted.values()]
    if sides and (max(sides) < 0.0 or min(sides) > 0.0):
        assert max(sides) < 0.0                        # all on one side: that side is inward
    moments = np.linalg.eigvalsh(s.I_com_W)
    assert moments[0] > 0.0
    assert moments[2] <= (moments[0] + moments[1]) * (1.0 + 1e-12)     # a tensor a body can have


@pytest.mark.parametrize("seed", range(10))
def test_units_on_a_turntable_turn_with_the_line(seed: int) -> None:
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    for name, unit_ in machine.stabilisers.items():
        if isinstance(unit_, ReactionWheel):
            unit_ = replace(unit_, mount=Mount(Turntable(1.0)))                     # noqa: PLW2901 - none of these stands on one
        if unit_.mount is None:
            continue
        e_T, yaw = unit(rng.normal(size=3)), rng.uniform(-pi, pi)
        R = about([0.0, 0.0, 1.0], yaw)
        at = replace(unit_, at=(0.0, 0.0, 0.1))
        for one, other in zip(stabiliser_bodies(name, at, {}, e_T), stabiliser_bodies(name, at, {}, R @ e_T), strict=True):
            assert close(R @ one.centre, other.centre)
            assert close(R @ one.I_com @ R.T, other.I_com)
