"""From a machine and the name of a stance to the machine standing on its two feet."""

from __future__ import annotations

from math import atan2, hypot

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError
from balance.base.words import did_you_mean, listed
from balance.machine.legs import Feet
from balance.machine.machine import Machine, StancePlan
from balance.maths.contact_line import line_axes
from balance.maths.inertia import about_line
from balance.maths.rotations import turned
from balance.stance.bench import bench_of, refuse_unphysical
from balance.stance.bodies import Body, join, placed
from balance.stance.ground import check_feet, contact_line, lifted_places, touch_down
from balance.stance.lumped import lumped_stance
from balance.stance.measured import corrected, correction, measured_stance
from balance.stance.parts import trunk_bodies
from balance.stance.problems import problem
from balance.stance.record import Stance
from balance.stance.rotors import check_rotors, stabiliser_bodies
from balance.stance.standing import stand_legs

Array = NDArray[np.float64]


def build_stance(machine: Machine, name: str) -> Stance:
    """Return the machine on the two feet of the stance `name`, rotors locked and gimbals at angle zero.

    Raises
    ------
    InputError
        No such stance; feet in one place or one above the other; a foot without a leg or a leg without a
        place; a leg that cannot reach its foot or must bend past a joint limit; a lifted foot below the
        ground.
    """
    if name not in machine.stance_names():
        names = machine.stance_names()
        raise InputError([problem(machine, "stances", name, listed(names), did_you_mean(name, names))])
    check_rotors(machine)
    if machine.lumped is not None:
        return lumped_stance(machine, machine.lumped)
    return stand_as_built(machine, name, (machine.stances or {})[name])


def stand_as_built(machine: Machine, name: str, plan: StancePlan) -> Stance:
    """Return the machine standing as `plan` says, with what the bench measured of it in place of CAD."""
    stance = stand(machine, name, plan)
    if machine.measured is None:
        return stance
    cad = stand(machine, machine.measured.pose, (machine.stances or {})[machine.measured.pose])
    bench = bench_of(machine, machine.measured, cad)
    real = corrected(stance, correction(cad, measured_stance(cad, bench)))
    refuse_unphysical(machine, real)
    return real


def stand(machine: Machine, name: str, plan: StancePlan) -> Stance:
    """Return the machine standing as `plan` says, by its parts alone (errors as `build_stance`)."""
    check_feet(machine, name, plan)
    R_WT, p_WT = turned(*plan.trunk.turn), np.array(plan.trunk.at)
    a, b = contact_line(plan)
    p_a, p_b = np.array(plan.down[a]), np.array(plan.down[b])
    e, u, w = line_axes(p_a, p_b)
    lifted = lifted_places(machine, name, plan, p_a, u, w)
    legs = stand_legs(machine, name, plan, R_WT, p_WT)
    bodies_T = trunk_bodies(machine.body) + [body for leg in legs.values() for body in leg.bodies]
    for unit_name, unit_ in machine.stabilisers.items():
        bodies_T += stabiliser_bodies(unit_name, unit_, machine.motors, R_WT.T @ e)
    mass, com, I_com = join([placed(body, R_WT, p_WT) for body in bodies_T])
    feet = machine.feet or Feet()
    return Stance(
        name=name, foot_from=a, foot_to=b, p_a_W=p_a, p_b_W=p_b, e_W=e, u_W=u, w_W=w, R_WT=R_WT, p_WT=p_WT,
        slope=atan2(e[2], hypot(e[0], e[1])), gravity=machine.gravity, mass=mass,
        height=float((com - p_a) @ u), offset=float((com - p_a) @ w),
        inertia_locked=about_line(I_com, mass, com - p_a, e), com_W=com, I_com_W=I_com, drag=0.0,
        foot_radius=feet.radius, friction=feet.friction, lifted=lifted, touch_down_lean=touch_down(lifted),
        outward_touch_down=touch_down(lifted, 1.0),
        joints={leg_name: leg.joints for leg_name, leg in legs.items()},
        points_W=_points(bodies_T, {n: leg.points for n, leg in legs.items()}, R_WT, p_WT),
    )


def _points(bodies_T: list[Body], legs: dict[str, Array], R_WT: Array, p_WT: Array) -> dict[str, Array]:
    """Return what the drawing needs: centres by body name (links left out); hip, knee and end by leg name."""
    points: dict[str, list[Array]] = {}
    links = {link for leg in legs for link in (leg, f"{leg} upper", f"{leg} lower")}
    for body in bodies_T:
        if body.name not in links:
            points.setdefault(body.name, []).append(body.centre)
    found_T = {name: np.array(rows) for name, rows in points.items()} | legs
    return {name: rows @ R_WT.T + p_WT for name, rows in found_T.items()}
