"""The quick start: a body given by mass, height and inertia about its line."""

from __future__ import annotations

import numpy as np

from balance.base.errors import InputError
from balance.machine.legs import Feet
from balance.machine.machine import Lumped, Machine
from balance.machine.stabilisers import ReactionWheel, ScissoredPair
from balance.maths.contact_line import line_axes
from balance.maths.rotations import unit
from balance.stance.facing import faced_axes
from balance.stance.problems import problem
from balance.stance.record import Stance
from balance.stance.rotors import rotor_mass, wheel_drive

E_T = np.array([1.0, 0.0, 0.0])


def lumped_stance(machine: Machine, lumped: Lumped) -> Stance:
    """Return the stance of a lumped machine: line along the trunk's x, up its z, so outward w = e × u is −y.

    The trunk's origin lies on the line.  The feet are drawn half a height to either side, and the tensor
    about the centre of mass is taken alike about all axes: three numbers say nothing about the other two.
    Raises InputError where the inertia is less than m(h² + δ²), which no mass distribution can be.
    """
    steiner = lumped.mass * (lumped.height**2 + lumped.offset**2)
    rounding = 1e-9 * steiner
    if lumped.inertia < steiner - rounding:
        raise InputError([problem(
            machine, "lumped.inertia", f"{lumped.inertia:.6g} kg*m^2",
            f"at least mass × (height² + offset²) = {steiner:.6g} kg*m^2",
            "inertia is about the line through the feet, not about the centre of mass")])
    p_a, p_b = -0.5 * lumped.height * E_T, 0.5 * lumped.height * E_T
    e, u, w = line_axes(p_a, p_b)
    com = lumped.height * u + lumped.offset * w
    feet = machine.feet or Feet()
    return Stance(
        name="line", foot_from="a", foot_to="b", p_a_W=p_a, p_b_W=p_b, e_W=e, u_W=u, w_W=w, R_WT=np.eye(3),
        p_WT=np.zeros(3), slope=0.0, gravity=machine.gravity, mass=lumped.mass, height=lumped.height,
        offset=lumped.offset, inertia_locked=lumped.inertia + spin_about_line(machine), com_W=com,
        I_com_W=(lumped.inertia - steiner + spin_about_line(machine)) * np.eye(3), drag=lumped.drag,
        foot_radius=feet.radius, friction=feet.friction, lifted={}, touch_down_lean=None, joints={},
        points_W={name: np.array([unit_.at]) for name, unit_ in machine.stabilisers.items()},
    )


def spin_about_line(machine: Machine) -> float:
    """Return what locking the rotors adds to an inertia measured with them free to spin (kg·m²).

    A wheel α²(I + sN J_r)²/(I + N² J_r) — Σ I α² where nothing is geared — and I_s σ² per gimballed rotor.
    """
    added = 0.0
    for unit_ in machine.stabilisers.values():
        if isinstance(unit_, ReactionWheel):
            drive = wheel_drive(unit_, machine.motors)
            added += float(unit(unit_.axis) @ E_T) ** 2 * drive.coupled**2 / drive.own
        else:
            s_T, _, _ = faced_axes(unit_, E_T)
            count = 2 if isinstance(unit_, ScissoredPair) else 1
            added += count * rotor_mass(unit_.rotor).spin * float(s_T @ E_T) ** 2
    return added
