"""The quick start: a body given by mass, height and inertia about its line."""

from __future__ import annotations

import numpy as np

from balance.base.errors import InputError
from balance.machine.legs import Feet
from balance.machine.machine import Lumped, Machine
from balance.maths.contact_line import line_axes
from balance.stance.problems import problem
from balance.stance.record import Stance
from balance.stance.rotors import spin_about_line

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
    spin = spin_about_line(machine, E_T)
    com = lumped.height * u + lumped.offset * w
    feet = machine.feet or Feet()
    return Stance(
        name="line", foot_from="a", foot_to="b", p_a_W=p_a, p_b_W=p_b, e_W=e, u_W=u, w_W=w, R_WT=np.eye(3),
        p_WT=np.zeros(3), slope=0.0, gravity=machine.gravity, mass=lumped.mass, height=lumped.height,
        offset=lumped.offset, inertia_locked=lumped.inertia + spin, com_W=com,
        I_com_W=(lumped.inertia - steiner + spin) * np.eye(3), drag=lumped.drag,
        foot_radius=feet.radius, friction=feet.friction, lifted={}, touch_down_lean=None, outward_touch_down=None, joints={},
        points_W={name: np.array([unit_.at]) for name, unit_ in machine.stabilisers.items()},
    )
