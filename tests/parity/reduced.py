"""Any machine as a MuJoCo model with every rotor, gimbal and gear on a joint of its own, and its reduced equations.

Gears, linked gimbals and rolling feet are constraints v = P q̇ with a constant P, so that M and the bias forces of the
free multibody model give the constrained one exactly: (Pᵀ M P) q̈ = Pᵀ(applied − bias).  q̇ is the lean rate, then per
wheel (Ω), per gimballed unit (γ̇ and one spin per rotor).
"""

from __future__ import annotations

from dataclasses import dataclass

import mujoco
import numpy as np

from balance.machine.machine import Machine
from balance.machine.solids import PointMass, RimAndWeb, Rod, Sphere
from balance.machine.stabilisers import ReactionWheel, ScissoredPair
from balance.stance.facing import faced_axes
from balance.stance.record import Stance
from tests.parity.multibody import _along, _body, _frame, _link, _links, _part, _turn, _v, rotor_moments

NOTHING = 1e-14
"""kg or kg·m²: the engine wants every body to weigh something."""


@dataclass(frozen=True)
class Reduced:
    """The free model and the columns of P by name."""

    model: mujoco.MjModel
    columns: dict[str, dict[str, float]]      # reduced coordinate -> joint -> rate

    def place(self, joint: str) -> int:
        return int(self.model.joint(joint).dofadr[0])

    def equations(self, angles: dict[str, float], rates: dict[str, float]):
        """Return (mass matrix, bias) in the reduced coordinates, at joint angles that obey the constraints."""
        P, M, bias = self.free(angles, rates)
        return P.T @ M @ P, P.T @ bias

    def held(self, angles: dict[str, float], rates: dict[str, float], a: dict[str, float]) -> dict[str, float]:
        """Return what must hold the trunk (forces, then moments about the foot ball's centre) while it accelerates so."""
        P, M, bias = self.free(angles, rates)
        needed = M @ P @ [a[name] for name in self.columns] + bias
        return {joint: float(needed[self.place(joint)]) for joint in ("along", "roll", "up", "yaw", "swerve")}

    def free(self, angles: dict[str, float], rates: dict[str, float]):
        """Return (P, mass matrix, bias) of the free model."""
        data = mujoco.MjData(self.model)
        P = np.zeros((self.model.nv, len(self.columns)))
        for j, column in enumerate(self.columns.values()):
            for joint, rate in column.items():
                P[self.place(joint), j] = rate
        data.qpos[:] = P @ [angles.get(name, 0.0) for name in self.columns]
        data.qvel[:] = P @ [rates[name] for name in self.columns]
        mujoco.mj_forward(self.model, data)
        M = np.zeros((self.model.nv, self.model.nv))
        mujoco.mj_fullM(self.model, data, M)
        return P, M, data.qfrc_bias


def reduced(machine: Machine, stance: Stance) -> Reduced:
    """Return the model of a machine standing on two feet; legs that give are a massless body under a hinge of its own.

    The kernel counts both leans from upright, the engine's hinge between them turns by their difference.
    """
    e_T = stance.R_WT.T @ stance.e_W
    radius, give = stance.foot_radius, machine.leg_compliance
    columns: dict[str, dict[str, float]] = {"line": {"roll": radius, "line": 1.0}}
    if give is not None:
        columns = {"line": {"hinge": 1.0}, "legs": {"line": 1.0, "hinge": -1.0}}
    bodies = [_any_part(name, part) for name, part in (machine.body or {}).items()]
    bodies += [_link(name, link, a, b) for name, link, a, b in _links(machine, stance)]
    for name, unit in machine.stabilisers.items():
        add = _wheel if isinstance(unit, ReactionWheel) else _gimballed
        text, own = add(machine, name, unit, e_T)
        bodies.append(text)
        columns |= own
    R = stance.R_WT
    ball = R.T @ (stance.p_a_W + radius * stance.u_W - stance.p_WT)
    model = mujoco.MjModel.from_xml_string(f"""
    <mujoco><option gravity="0 0 -{machine.gravity!r}"/><compiler angle="radian" inertiafromgeom="false"/>
    <worldbody><body name="trunk" pos="{_v(stance.p_WT)}" quat="{_quaternion(R)}">
    <joint name="along" type="slide" axis="{_v(e_T)}"/>
    <joint name="roll" type="slide" axis="{_v(R.T @ stance.w_W)}"/>
    <joint name="up" type="slide" axis="{_v(R.T @ stance.u_W)}"/>
    <joint name="line" type="hinge" pos="{_v(ball)}" axis="{_v(e_T)}"/>
    <joint name="yaw" type="hinge" pos="{_v(ball)}" axis="{_v(R.T @ stance.u_W)}"/>
    <joint name="swerve" type="hinge" pos="{_v(ball)}" axis="{_v(R.T @ stance.w_W)}"/>
    <inertial mass="{NOTHING}" pos="0 0 0" diaginertia="{NOTHING} {NOTHING} {NOTHING}"/>
    {_hinged(bodies, ball, e_T, R.T @ stance.u_W, give)}</body></worldbody></mujoco>""")
    return Reduced(model, columns)


def _hinged(bodies: list[str], foot: np.ndarray, e_T: np.ndarray, up: np.ndarray, give: object) -> str:
    """Return the parts, on a trunk that hinges on the legs where these give."""
    if give is None:
        return "".join(bodies)
    return f"""<body name="above"><joint name="hinge" type="hinge" pos="{_v(foot + give.height * up)}" axis="{_v(e_T)}"/>
    <inertial mass="{NOTHING}" pos="0 0 0" diaginertia="{NOTHING} {NOTHING} {NOTHING}"/>{''.join(bodies)}</body>"""


def _quaternion(R: np.ndarray) -> str:
    q = np.zeros(4)
    mujoco.mju_mat2Quat(q, np.ascontiguousarray(R).ravel())
    return _v(q)


def _any_part(name: str, part: object) -> str:
    """Return a part; the solids that the shipped machines do not use are added here (standard tables)."""
    solid, m, R = part.solid, part.mass, _turn(*part.turn)
    if isinstance(solid, RimAndWeb):
        spin, across = rotor_moments(part)
        return _body(name, part.at, _along(R, solid.rim_and_web.along), m, [across, across, spin])
    if isinstance(solid, Sphere):
        return _body(name, part.at, R, m, [m * solid.sphere**2 / 10] * 3)
    if isinstance(solid, Rod):
        across = m * solid.rod.length**2 / 12
        return _body(name, part.at, _along(R, solid.rod.along), m, [across, across, 1e-12 * across])
    if isinstance(solid, PointMass):
        return _body(name, part.at, R, m, [NOTHING] * 3)
    return _part(name, part)


def _wheel(machine: Machine, name: str, wheel: ReactionWheel, _: object) -> tuple[str, dict[str, dict[str, float]]]:
    """Return wheel and motor rotor, each on its own joint; the gear is in the column."""
    gear, (spin, across) = wheel.gear, rotor_moments(wheel.rotor)
    J, frame = machine.motors[wheel.motor].rotor_inertia, _frame(wheel.axis)
    joint = '<joint name="{}" type="hinge" axis="0 0 1"/>'
    if gear is not None and gear.includes_rotor:             # what was measured at the wheel is wheel and rotor together
        spin -= gear.ratio**2 * J
    thin = J / 2 * (1 + 1e-12)                               # a disc's own two are just half; rounding must not refuse it
    text = _body(f"{name}.wheel", wheel.at, frame, wheel.rotor.mass, [across, across, spin], joint.format(name))
    text += _body(f"{name}.rotor", wheel.at, frame, NOTHING, [thin, thin, J], joint.format(f"{name}.motor"))
    turns = 1.0 if gear is None else gear.ratio * (1.0 if gear.sense == "same" else -1.0)
    return text, {name: {name: 1.0, f"{name}.motor": turns}}


def _gimballed(_: object, name: str, unit: object, e_T: np.ndarray) -> tuple[str, dict[str, dict[str, float]]]:
    """Return one or two flywheels in their gimbals; the second of a pair stands at −γ."""
    s, g, turned = faced_axes(unit, e_T)
    spin, across = rotor_moments(unit.rotor)
    pair = isinstance(unit, ScissoredPair)
    text, columns = "", {f"{name}.gimbal": {}}
    for k, (side, way) in enumerate(((-1.0, 1.0), (1.0, -1.0))[:2 if pair else 1]):
        turn = f'<joint name="{name}.spin.{k}" type="hinge" axis="0 0 1"/>'
        rotor = _body(f"{name}.rotor.{k}", [0, 0, 0], _frame(s), unit.rotor.mass, [across, across, spin], turn)
        gimbal = f'<joint name="{name}.gimbal.{k}" type="hinge" axis="{_v(g)}"/>'
        at = np.array(unit.at) + (side * unit.spacing / 2 * g if pair else 0.0)
        inside = gimbal + rotor + _casing(f"{name}.casing.{k}", unit, turned)
        text += _body(f"{name}.frame.{k}", at, np.eye(3), NOTHING, [NOTHING] * 3, inside)
        columns[f"{name}.gimbal"][f"{name}.gimbal.{k}"] = way
        columns[f"{name}.spin.{k}"] = {f"{name}.spin.{k}": 1.0}
    return text, columns


def _casing(name: str, unit: object, turned: np.ndarray) -> str:
    """Return a gimbal's frame as a body of its own: alike about all axes, or by its stated tensor's principal axes."""
    t = unit.frame_inertia
    if t is None:
        return _body(name, [0, 0, 0], np.eye(3), unit.frame_mass, [unit.gimbal.inertia] * 3)
    F = turned @ np.array([[t.xx, t.xy, t.xz], [t.xy, t.yy, t.yz], [t.xz, t.yz, t.zz]]) @ turned.T
    values, vectors = np.linalg.eigh(F)
    vectors[:, 2] *= np.sign(np.linalg.det(vectors))
    return _body(name, [0, 0, 0], vectors, unit.frame_mass, values)
