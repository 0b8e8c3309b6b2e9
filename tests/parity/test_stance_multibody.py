"""Mass, centre of mass, tensor and feet of the shipped scout against MuJoCo, which walks the joints forward itself.

The model is written from the machine file, not from our stance: parts by MuJoCo's own solids where it has them, tubes and
rotors by their textbook inertia, legs as hinges turned by the joint angles our inverse kinematics reports.
"""

from __future__ import annotations

from math import degrees, hypot
from pathlib import Path

import mujoco
import numpy as np
import pytest
from numpy.typing import NDArray

from balance.machine.machine import Machine
from balance.machine.read import read_machine
from balance.machine.solids import Box, Cylinder, Part, Tube
from balance.machine.stabilisers import ReactionWheel
from balance.stance.build import build_stance
from balance.stance.record import Stance

Array = NDArray[np.float64]

SCOUT = str(Path(__file__).resolve().parents[2] / "plants" / "trellis-scout.yaml")
ALONG = {"x": "0 90 0", "y": "90 0 0", "z": "0 0 0"}

TIGHT = 1e-10
"""MuJoCo's numbers pass through a text file with 17 digits and quaternions: a few hundred roundings."""


def words(*numbers: float) -> str:
    return " ".join(repr(float(x)) for x in numbers)


def inertial(mass: float, at: tuple[float, ...], moments: tuple[float, float, float], turn: str = "0 0 0") -> str:
    """Return a rigid body's masses; one axis of a thin rod gets 1e-13 because MuJoCo asks for a positive number."""
    least = tuple(max(m, 1e-13) for m in moments)
    return (f'<body pos="{words(*at)}" euler="{turn}">'
            f'<inertial pos="0 0 0" mass="{mass!r}" diaginertia="{words(*least)}"/></body>')


def part(p: Part) -> str:
    assert p.mass is not None
    turn = words(*(degrees(a) for a in p.turn))
    match p.solid:
        case Box(sides):
            halves = words(*(x / 2 for x in sides))
            return f'<geom type="box" pos="{words(*p.at)}" euler="{turn}" mass="{p.mass!r}" size="{halves}"/>'
        case Cylinder(size):
            assert p.turn == (0.0, 0.0, 0.0)
            return (f'<geom type="cylinder" pos="{words(*p.at)}" euler="{ALONG[size.along]}" mass="{p.mass!r}" '
                    f'size="{words(size.diameter / 2, size.length / 2)}"/>')
        case Tube(size):
            assert p.turn == (0.0, 0.0, 0.0)
            squares = (size.outer**2 + size.inner**2) / 4.0
            across = p.mass * (3.0 * squares + size.length**2) / 12.0
            return inertial(p.mass, p.at, (across, across, p.mass * squares / 2.0), ALONG[size.along])
    assert p.inertia is not None
    return inertial(p.mass, p.at, (p.inertia.xx, p.inertia.yy, p.inertia.zz), turn)


def rim_and_web(unit: ReactionWheel, machine: Machine) -> tuple[float, float, float]:
    """Return mass, spin and transverse inertia of a rotor, by the textbook's annuli.

    The motor's rotor is known about its axis; a thin disc has half of that across.
    """
    size, mass = unit.rotor.solid.rim_and_web, unit.rotor.mass
    ro, ri, rb = size.outer / 2, size.inner / 2, size.bore / 2
    rim, web = (ro**2 - ri**2) * size.length, (ri**2 - rb**2) * size.web
    m_rim, m_web = mass * rim / (rim + web), mass * web / (rim + web)
    spin = m_rim * (ro**2 + ri**2) / 2 + m_web * (ri**2 + rb**2) / 2
    across = m_rim * (3 * (ro**2 + ri**2) + size.length**2) / 12 + m_web * (3 * (ri**2 + rb**2) + size.web**2) / 12
    J_r = machine.motors[unit.motor].rotor_inertia
    return mass, spin + J_r, across + J_r / 2


def rod(mass: float, length: float, centre: float) -> str:
    across = mass * length**2 / 12.0
    return inertial(mass, (0.0, 0.0, -centre * length), (across, across, 0.0))


def leg(name: str, machine: Machine) -> str:
    link = machine.legs[name]
    r = np.array([link.hip[0], link.hip[1], 0.0]) / hypot(*link.hip[:2])
    t = np.array([-r[1], r[0], 0.0])
    return (f'<body pos="{words(*link.hip)}"><joint name="{name} swing" axis="{words(*r)}"/>'
            f'<joint name="{name} hip" axis="{words(*-t)}"/>{rod(link.upper.mass, link.upper.length, link.upper.centre)}'
            f'<body pos="0 0 {-link.upper.length!r}"><joint name="{name} knee" axis="{words(*-t)}"/>'
            f'{rod(link.lower.mass, link.lower.length, link.lower.centre)}'
            f'<site name="{name}" pos="0 0 {-link.lower.length!r}"/></body></body>')


def wheel(unit: ReactionWheel, machine: Machine) -> str:
    mass, spin, across = rim_and_web(unit, machine)
    turn = {(1.0, 0.0, 0.0): "0 90 0", (0.0, 1.0, 0.0): "90 0 0"}[tuple(unit.axis)]
    return inertial(mass, unit.at, (across, across, spin), turn)


def posed(machine: Machine, stance: Stance, joints: dict[str, tuple[float, ...]]) -> tuple[mujoco.MjModel, mujoco.MjData]:
    """Return the multibody model with the trunk at the file's pose and the legs at `joints`."""
    inside = "".join([*(part(p) for p in machine.body.values()), *(leg(name, machine) for name in machine.legs),
                      *(wheel(u, machine) for u in machine.stabilisers.values())])
    # bodies whose masses sit in welded children are refused unless these are fused into them
    model = mujoco.MjModel.from_xml_string(
        f'<mujoco><compiler angle="degree" eulerseq="xyz" fusestatic="true" inertiafromgeom="auto"/>'
        f'<worldbody><body name="trunk"><freejoint/>{inside}</body></worldbody></mujoco>')
    data = mujoco.MjData(model)
    plan = machine.stances[stance.name]
    assert plan.trunk.turn == (0.0, 0.0, 0.0)
    data.qpos[:7] = [*plan.trunk.at, 1.0, 0.0, 0.0, 0.0]
    for name, angles in joints.items():
        for joint, angle in zip(("swing", "hip", "knee"), angles, strict=True):
            data.joint(f"{name} {joint}").qpos[0] = angle
    mujoco.mj_forward(model, data)
    return model, data


def whole_body(model: mujoco.MjModel, data: mujoco.MjData) -> tuple[float, Array, Array]:
    """Return mass, centre of mass and tensor about it in world axes, from the free joint's block of the mass matrix."""
    M = np.zeros((model.nv, model.nv))
    mujoco.mj_fullM(model, data, M)
    mass, com = float(M[0, 0]), data.subtree_com[1].copy()
    arm = com - data.qpos[:3]
    return mass, com, M[3:6, 3:6] - mass * (arm @ arm * np.eye(3) - np.outer(arm, arm))


@pytest.mark.parametrize("name", ["on-left-right", "on-fore-right", "on-fore-left"])
def test_the_scout_stands_as_the_multibody_engine_says(name: str) -> None:
    machine = read_machine(SCOUT)
    stance = build_stance(machine, name)
    model, data = posed(machine, stance, stance.joints)
    mass, com, I_com = whole_body(model, data)
    assert stance.mass == pytest.approx(mass, rel=TIGHT)
    assert np.abs(stance.com_W - com).max() < TIGHT
    assert np.abs(stance.I_com_W - I_com).max() < TIGHT * I_com.max()
    plan = machine.stances[name]
    for foot, at in (plan.down | plan.lifted).items():
        assert np.abs(data.site(foot).xpos - [at[0], at[1], at[2] + stance.foot_radius]).max() < TIGHT
    # about the line, by the engine's own numbers
    arm = com - stance.p_a_W
    J = stance.e_W @ I_com @ stance.e_W + mass * (arm @ arm - (arm @ stance.e_W) ** 2)
    assert stance.inertia_locked == pytest.approx(J, rel=TIGHT)


def test_a_leg_bent_by_one_degree_is_noticed() -> None:
    machine = read_machine(SCOUT)
    stance = build_stance(machine, "on-left-right")
    swing, hip, knee = stance.joints["left"]
    model, data = posed(machine, stance, stance.joints | {"left": (swing, hip + 0.0175, knee)})
    assert np.abs(stance.com_W - whole_body(model, data)[1]).max() > 1e4 * TIGHT
    assert np.linalg.norm(data.site("left").xpos - stance.points_W["left"][-1]) > 1e-3
