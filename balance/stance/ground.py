"""Feet and ground: which feet make the contact line, which way is outward, and where a lifted foot lands."""

from __future__ import annotations

from math import atan2

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError, Problem
from balance.base.words import did_you_mean, listed
from balance.machine.machine import Machine, StancePlan
from balance.maths.contact_line import is_outward_reversed, line_axes
from balance.stance.problems import millimetres, problem

Array = NDArray[np.float64]

SAME_PLACE = 1e-6
"""Feet nearer to each other (or to one vertical) than this share of the machine's size stand in one place."""


def check_feet(machine: Machine, name: str, plan: StancePlan) -> None:
    """Raise InputError where feet and legs do not go together or the two feet make no line."""
    found = _names(machine, name, plan)
    if len(plan.down) != 2:
        found.append(problem(machine, f"stances.{name}.down", f"{len(plan.down)} feet", "exactly two feet",
                             "list the other feet under `lifted`"))
    else:
        found += _apart(machine, name, plan)
    if found:
        raise InputError(found)


def contact_line(plan: StancePlan) -> tuple[str, str]:
    """Return the two feet in the order that makes w = e × u point outward, away from the lifted feet.

    Feet lifted on both sides of the line, or none, leave the order of the file.
    """
    a, b = plan.down
    _, _, w = line_axes(np.array(plan.down[a]), np.array(plan.down[b]))
    lifted = np.array(list((plan.lifted or {}).values()), dtype=np.float64)
    # outward is away from the lifted feet, so they must lie on the −w side
    return (b, a) if is_outward_reversed(w, np.array(plan.down[a]), lifted) else (a, b)


def lifted_places(machine: Machine, name: str, plan: StancePlan, p_a: Array, u: Array,
                  w: Array) -> dict[str, tuple[float, float]]:
    """Return foot -> (signed distance from the line along w, clearance above the ground) in m.

    The ground is the plane through the line and w.  Raises InputError for a lifted foot below it.
    """
    places = {foot: (float((np.array(at) - p_a) @ w), float((np.array(at) - p_a) @ u))
              for foot, at in (plan.lifted or {}).items()}
    rounding = 1e-9 * _size(plan)
    below = [problem(machine, f"stances.{name}.lifted.{foot}", f"{millimetres(-clearance)} below the ground",
                     "a foot above the ground through the two feet that stand", "raise the foot")
             for foot, (_, clearance) in places.items() if clearance < -rounding]
    if below:
        raise InputError(below)
    return places


def touch_down(lifted: dict[str, tuple[float, float]], side: float = -1.0) -> float | None:
    """Return the turn (rad, positive) toward `side` (−1 inward, +1 outward) at which a foot lifted there lands; None: none.

    Exactly atan(clearance ÷ distance): a turn about the line carries the foot on a circle, and equal balls at
    all feet roll together.
    """
    angles = [atan2(max(clearance, 0.0), side * across) for across, clearance in lifted.values() if side * across > 0.0]
    return min(angles) if angles else None


def _size(plan: StancePlan) -> float:
    """Return the machine's size: the diagonal of the box around feet and trunk."""
    points = np.array([*plan.down.values(), *(plan.lifted or {}).values(), plan.trunk.at])
    return float(np.linalg.norm(np.ptp(points, axis=0)))


def _apart(machine: Machine, name: str, plan: StancePlan) -> list[Problem]:
    (a, at_a), (b, at_b) = plan.down.items()
    between = np.array(at_b) - np.array(at_a)
    least = SAME_PLACE * _size(plan)
    if np.linalg.norm(between) <= least:
        given, hint = f"{a} and {b} in one place", "two feet in one place make no contact line"
    elif np.hypot(between[0], between[1]) <= least:
        given, hint = f"{a} and {b} one above the other", "the contact line must not be vertical"
    else:
        return []
    return [problem(machine, f"stances.{name}.down.{b}", given, "feet a distance apart", hint)]


def _names(machine: Machine, name: str, plan: StancePlan) -> list[Problem]:
    """Return a problem for each foot without a leg, leg without a place and foot both down and lifted."""
    legs = machine.legs or {}
    lifted = plan.lifted or {}
    found = []
    for place, feet in (("down", plan.down), ("lifted", lifted)):
        for foot in feet:
            if legs and foot not in legs:
                hint = did_you_mean(foot, legs) or "every foot belongs to a leg of its name"
                found.append(problem(machine, f"stances.{name}.{place}.{foot}", foot, listed(legs), hint))
    found += [problem(machine, f"stances.{name}.lifted.{foot}", foot, "a foot that is not down",
                      "a foot stands or is lifted")
              for foot in lifted if foot in plan.down]
    found += [problem(machine, f"stances.{name}", f"no place for the leg {leg}", "a place for every leg",
                      f"put {leg} under `down` or `lifted`")
              for leg in legs if leg not in plan.down and leg not in lifted]
    return found
