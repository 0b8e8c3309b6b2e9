"""A machine file as a MuJoCo model, built from its parts without our own mass properties or equations.

Only places are taken from the stance (hip, knee, foot, contact line); masses and inertias are computed here or by
MuJoCo from the shapes.  The trunk turns about the contact line; every rotor and gimbal has a joint of its own.
"""

from __future__ import annotations

from xml.sax.saxutils import quoteattr

import mujoco
import numpy as np

from balance.machine.machine import Machine
from balance.machine.solids import Box, Cylinder, Disc, RimAndWeb, Tube
from balance.machine.stabilisers import ReactionWheel
from balance.stance.facing import faced_axes
from balance.stance.record import Stance


def multibody(machine: Machine, stance: Stance) -> mujoco.MjModel:
    """Return the model; joints: `line`, then NAME (wheel) or NAME.gimbal.0, NAME.spin.0, NAME.gimbal.1, … ."""
    bodies = [_part(name, part) for name, part in (machine.body or {}).items()]
    bodies += [_link(name, link, a, b) for name, link, a, b in _links(machine, stance)]
    e_T = stance.R_WT.T @ stance.e_W
    for name, unit in machine.stabilisers.items():
        bodies.append(_wheel(machine, name, unit) if isinstance(unit, ReactionWheel) else _pair(name, unit, e_T))
    rotation, at = stance.R_WT, stance.p_WT
    line_T, foot_T = e_T, rotation.T @ (stance.p_a_W - at)
    return mujoco.MjModel.from_xml_string(f"""
    <mujoco><option gravity="0 0 -{machine.gravity}"/><compiler angle="radian" inertiafromgeom="false"/>
    <worldbody><body name="trunk" pos="{_v(at)}" quat="{_v(_quat(rotation))}">
    <joint name="line" type="hinge" pos="{_v(foot_T)}" axis="{_v(line_T)}"/>
    <inertial mass="1e-12" pos="0 0 0" diaginertia="1e-14 1e-14 1e-14"/>
    {''.join(bodies)}</body></worldbody></mujoco>""")


def _v(values: object) -> str:
    return " ".join(repr(float(x)) for x in np.ravel(values))


def _quat(R: np.ndarray) -> np.ndarray:
    q = np.zeros(4)
    mujoco.mju_mat2Quat(q, np.ascontiguousarray(R).ravel())
    return q


def _body(name: str, at: object, R: np.ndarray, mass: float, principal: object, inside: str = "") -> str:
    return (f'<body name={quoteattr(name)} pos="{_v(at)}" quat="{_v(_quat(R))}">{inside}'
            f'<inertial mass="{mass!r}" pos="0 0 0" diaginertia="{_v(principal)}"/></body>')


def _turn(roll: float, pitch: float, yaw: float) -> np.ndarray:
    q = np.array([1.0, 0, 0, 0])
    for axis, angle in (((0, 0, 1), yaw), ((0, 1, 0), pitch), ((1, 0, 0), roll)):     # Rz·Ry·Rx
        step, out = np.zeros(4), np.zeros(4)
        mujoco.mju_axisAngle2Quat(step, np.array(axis, float), angle)
        mujoco.mju_mulQuat(out, q, step)
        q = out
    R = np.zeros(9)
    mujoco.mju_quat2Mat(R, q)
    return R.reshape(3, 3)


def _along(R: np.ndarray, along: str) -> np.ndarray:
    """Turn so that the solid's own z lies along the named axis."""
    return R @ {"x": np.array([[0, 0, 1.0], [1, 0, 0], [0, 1, 0]]), "y": np.array([[0, 1.0, 0], [0, 0, 1], [1, 0, 0]]),
                "z": np.eye(3)}[along]


def _annulus(mass: float, outer: float, inner: float, length: float) -> list[float]:
    """Principal moments (x, y, z) of a hollow cylinder by diameters: standard tables."""
    a, b = outer / 2, inner / 2
    across = mass * (3 * (a * a + b * b) + length**2) / 12
    return [across, across, mass * (a * a + b * b) / 2]


def _part(name: str, part: object) -> str:
    R, solid, m = _turn(*part.turn), part.solid, part.mass
    if part.inertia is not None:
        t = part.inertia
        values, vectors = np.linalg.eigh([[t.xx, t.xy, t.xz], [t.xy, t.yy, t.yz], [t.xz, t.yz, t.zz]])
        vectors[:, 2] *= np.sign(np.linalg.det(vectors))
        return _body(name, part.at, R @ vectors, m, values)
    if isinstance(solid, Box):
        x, y, z = solid.box
        return _body(name, part.at, R, m, [m * (y * y + z * z) / 12, m * (x * x + z * z) / 12, m * (x * x + y * y) / 12])
    if isinstance(solid, Cylinder | Disc):
        size = solid.cylinder if isinstance(solid, Cylinder) else solid.disc
        return _body(name, part.at, _along(R, size.along), m, _annulus(m, size.diameter, 0.0, size.length))
    assert isinstance(solid, Tube)
    size = solid.tube
    return _body(name, part.at, _along(R, size.along), m, _annulus(m, size.outer, size.inner, size.length))


def _links(machine: Machine, stance: Stance):
    """Yield (name, link, upper joint, lower joint) in the trunk's frame."""
    for name, leg in (machine.legs or {}).items():
        points = [stance.R_WT.T @ (p - stance.p_WT) for p in stance.points_W[name]]
        yield f"{name}.upper", leg.upper, points[0], points[1]
        yield f"{name}.lower", leg.lower, points[1], points[2]


def _link(name: str, link: object, a: np.ndarray, b: np.ndarray) -> str:
    """Return a thin rod between two joints, its own centre where the file says."""
    assert abs(np.linalg.norm(b - a) - link.length) < 1e-9        # the inverse kinematics closes: places are consistent
    z = (b - a) / link.length
    x = np.cross(z, [0.3, 0.5, 0.81])
    x /= np.linalg.norm(x)
    R = np.column_stack([x, np.cross(z, x), z])
    across = link.mass * link.length**2 / 12
    return _body(name, a + link.centre * (b - a), R, link.mass, [across, across, 1e-12 * across])


def _frame(axis: object) -> np.ndarray:
    z = np.array(axis, float) / np.linalg.norm(axis)
    x = np.cross(z, [0.3, 0.5, 0.81])
    x /= np.linalg.norm(x)
    return np.column_stack([x, np.cross(z, x), z])


def rotor_moments(rotor: object) -> tuple[float, float]:
    """Return (spin, transverse) inertia of a rotor's solid in kg·m², from annuli of one density."""
    solid = rotor.solid
    if not isinstance(solid, RimAndWeb):
        raise TypeError(solid)
    size = solid.rim_and_web
    areas = [(size.outer, size.inner, size.length), (size.inner, size.bore, size.web)]
    volumes = [(a * a - b * b) * length for a, b, length in areas]
    moments = [_annulus(rotor.mass * v / sum(volumes), a, b, length)
               for v, (a, b, length) in zip(volumes, areas, strict=True)]
    return sum(m[2] for m in moments), sum(m[0] for m in moments)


def _wheel(machine: Machine, name: str, wheel: ReactionWheel) -> str:
    spin, across = rotor_moments(wheel.rotor)
    rotor = machine.motors[wheel.motor].rotor_inertia            # direct drive: a thin disc that turns with the wheel
    spin, across = spin + rotor, across + rotor / 2
    joint = f'<joint name={quoteattr(name)} type="hinge" axis="0 0 1"/>'
    return _body(name, wheel.at, _frame(wheel.axis), wheel.rotor.mass, [across, across, spin], joint)


def _pair(name: str, pair: object, e_T: np.ndarray) -> str:
    s, g, _ = faced_axes(pair, e_T)
    spin, across = rotor_moments(pair.rotor)
    out = []
    for k, side in enumerate((-1.0, 1.0)):
        joint = f'<joint name="{name}.spin.{k}" type="hinge" axis="0 0 1"/>'
        rotor = _body(f"{name}.rotor.{k}", [0, 0, 0], _frame(s), pair.rotor.mass, [across, across, spin], joint)
        gimbal = f'<joint name="{name}.gimbal.{k}" type="hinge" axis="{_v(g)}"/>'
        at = np.array(pair.at) + side * pair.spacing / 2 * g
        frame = [pair.gimbal.inertia] * 3
        out.append(_body(f"{name}.frame.{k}", at, np.eye(3), pair.frame_mass, frame, gimbal + rotor))
    return "".join(out)
