"""All legs of a stance placed, or every reason why they cannot be."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError, Problem
from balance.machine.legs import Feet
from balance.machine.machine import Machine, StancePlan
from balance.stance.placing import SLACK, OutOfReach, PlacedLeg, beyond_limits, place_leg, pose_leg
from balance.stance.problems import degrees, millimetres, problem

Array = NDArray[np.float64]


def stand_legs(machine: Machine, name: str, plan: StancePlan, R_WT: Array,
               p_WT: Array) -> dict[str, PlacedLeg]:
    """Return every leg in the trunk's axes, in file order.

    A leg ends in the middle of its foot's ball, which is one radius above the contact.  Raises InputError
    with all legs that cannot reach their feet or must bend past a limit.
    """
    radius = (machine.feet or Feet()).radius
    contacts = {**plan.down, **(plan.lifted or {})}
    legs: dict[str, PlacedLeg] = {}
    found: list[Problem] = []
    for leg_name, leg in (machine.legs or {}).items():
        end_W = np.array(contacts[leg_name]) + np.array([0.0, 0.0, radius])
        end_T, pose = R_WT.T @ (end_W - p_WT), (plan.poses or {}).get(leg_name)
        placed = place_leg(leg_name, leg, end_T) if pose is None else pose_leg(leg_name, leg, pose)
        key = f"stances.{name}.{'down' if leg_name in plan.down else 'lifted'}.{leg_name}"
        if isinstance(placed, OutOfReach):
            found.append(_unreachable(machine, key, placed))
            continue
        if pose is not None and isinstance(placed, PlacedLeg):
            found += _missed(machine, name, leg_name, placed, end_T, R_WT, p_WT, radius)
        legs[leg_name] = placed
        found += [problem(machine, key, f"{joint} at {degrees(angle)}", f"{joint} within ±{degrees(limit)}",
                          f"move the foot or the trunk, or widen legs.{leg_name}.limits.{joint}")
                  for joint, angle, limit in beyond_limits(leg, placed.joints)]
    if found:
        raise InputError(found)
    return legs


def _missed(machine: Machine, name: str, leg: str, placed: PlacedLeg, end_T: Array, R_WT: Array, p_WT: Array,
            radius: float) -> list[Problem]:
    """Return a problem where stated joint angles do not put the leg's end where its foot is said to be."""
    away = float(np.linalg.norm(placed.points[-1] - end_T))
    length = sum(float(np.linalg.norm(b - a)) for a, b in pairwise(placed.points))
    if away <= SLACK * length:
        return []
    foot = R_WT @ placed.points[-1] + p_WT - np.array([0.0, 0.0, radius])
    there = ", ".join(millimetres(float(x)) for x in foot)
    return [problem(machine, f"stances.{name}.poses.{leg}", f"angles that end {millimetres(away)} from the foot",
                    f"angles that end within {millimetres(SLACK * length)} of it",
                    f"they put the foot at [{there}]; leave the pose out and the angles are found")]


def _unreachable(machine: Machine, key: str, gap: OutOfReach) -> Problem:
    if gap.least == gap.most:
        allowed = f"the one link's length, {millimetres(gap.most)}"
    else:
        allowed = f"{millimetres(gap.least)} to {millimetres(gap.most)}, the reach of its two links"
    return problem(machine, key, f"{millimetres(gap.distance)} from hip to foot", allowed,
                   "move the foot or the trunk, or change the links")
