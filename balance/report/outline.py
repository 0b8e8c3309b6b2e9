"""The machine flattened into the two views that are drawn, in millimetres.

Top view: world x to the right, y up, z toward the reader.  Side view: along the contact line, with w (outward) to the
right and u (up) upward, so the line is the one point the machine topples about.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.machine.machine import Machine
from balance.plant.record import Plant, Unit
from balance.report.shapes import hull, part_points, rotor_points
from balance.stance.record import Stance
from balance.stance.statics import statics_of

Array = NDArray[np.float64]
MM = 1e3


@dataclass(frozen=True)
class Axle:
    """A stabiliser's axis through `at` (2,) mm; `along` (2,): its unit vector flattened, short where it faces the reader."""

    name: str
    kind: str          # "spin" | "gimbal"
    at: Array
    along: Array


@dataclass(frozen=True)
class Leg:
    """A leg from hip to foot, (k, 2) mm."""

    name: str
    lifted: bool
    joints: Array


@dataclass(frozen=True)
class View:
    """One view of one stance; outlines (k, 2) and points (2,) in mm."""

    parts: tuple[Array, ...]
    rotors: tuple[Array, ...]
    legs: tuple[Leg, ...]
    feet: tuple[tuple[str, bool, Array], ...]  # name, lifted, place
    polygon: Array                             # (k, 2) where the feet stand when all are down; k < 3: nothing to draw
    line: Array                                # (2, 2) foot to foot
    centre: Array                              # (2,) of mass
    balanced: Array                            # (2,) the same after turning to the balanced lean
    axles: tuple[Axle, ...]


@dataclass(frozen=True)
class Drawing:
    """Both views of one stance and the numbers written into them."""

    machine: str
    stance: str
    acts: bool
    top: View
    side: View
    outward: Array          # (2,) w in the top view
    balanced_lean: float    # degrees
    height: float           # mm
    offset: float           # mm
    hinge: float            # mm above the line where the legs give; NaN: they are stiff
    margin: float           # mm inside the nearest edge with all feet down; NaN: no edge, or a foot cannot be set down
    shift: float            # mm outward by which the trunk must move to stand in balance; NaN: it cannot, or nobody asked


@dataclass(frozen=True)
class Flat:
    """A way to flatten the world: `axes` (2, 3) are the view's directions, `origin` (3,) its zero."""

    origin: Array
    axes: Array

    def points(self, points_W: Array) -> Array:
        """(k, 3) m in the world to (k, 2) mm in the view."""
        flat: Array = MM * (np.atleast_2d(points_W) - self.origin) @ self.axes.T
        return flat


def lifted_feet(machine: Machine, stance: Stance) -> dict[str, Array]:
    """Where the lifted feet hang, world frame."""
    plan = (machine.stances or {}).get(stance.name)
    told = dict(plan.lifted or {}) if plan else {}
    feet = {}
    for name in stance.lifted:
        if name in told:
            feet[name] = np.asarray(told[name], dtype=float)
        elif name in stance.points_W:
            feet[name] = np.atleast_2d(stance.points_W[name])[-1]
    return feet


def turned(stance: Stance, lean: float) -> Array:
    """Centre of mass after turning the machine about the line by `lean`, world frame (3,)."""
    c, s = math.cos(lean), math.sin(lean)
    up, out = stance.height * c - stance.offset * s, stance.height * s + stance.offset * c
    return along_line(stance) + up * stance.u_W + out * stance.w_W


def along_line(stance: Stance) -> Array:
    """The point of the contact line next to the centre of mass, world frame (3,)."""
    foot: Array = stance.p_a_W + float((stance.com_W - stance.p_a_W) @ stance.e_W) * stance.e_W
    return foot


def view(machine: Machine, stance: Stance, plant: Plant | None, flat: Flat) -> View:
    """Flatten everything that is drawn; without a plant no stabiliser and no balanced lean is known."""
    lifted = lifted_feet(machine, stance)
    feet = [(stance.foot_from, False, stance.p_a_W), (stance.foot_to, False, stance.p_b_W)]
    feet += [(name, True, place) for name, place in lifted.items()]
    ground = np.array([place for _, _, place in feet])
    ground[2:] -= np.outer((ground[2:] - stance.p_a_W) @ stance.u_W, stance.u_W)
    legs = [(name, np.atleast_2d(stance.points_W[name])) for name in machine.legs or {} if name in stance.points_W]
    lean = plant.balanced_lean if plant else -math.atan2(stance.offset, stance.height)
    return View(
        parts=tuple(hull(flat.points(part_points(p) @ stance.R_WT.T + stance.p_WT)) for p in (machine.body or {}).values()),
        rotors=rotors(machine, stance, plant, flat),
        legs=tuple(Leg(name, name in stance.lifted, flat.points(joints)) for name, joints in legs if len(joints) > 1),
        feet=tuple((name, up, flat.points(place)[0]) for name, up, place in feet),
        polygon=hull(flat.points(ground)), line=flat.points(np.array([stance.p_a_W, stance.p_b_W])),
        centre=flat.points(turned(stance, 0.0))[0], balanced=flat.points(turned(stance, lean))[0],
        axles=axles(machine, stance, plant, flat))


def rotors(machine: Machine, stance: Stance, plant: Plant | None, flat: Flat) -> tuple[Array, ...]:
    """Outlines of all rotors."""
    found = []
    for unit in plant.units if plant else ():
        if unit.name in machine.stabilisers:
            for points in rotor_points(machine.stabilisers[unit.name], unit):
                found.append(hull(flat.points((points - unit.at_T) @ stance.R_WT.T + unit_place(machine, stance, unit))))
    return tuple(found)


def unit_place(machine: Machine, stance: Stance, unit: Unit) -> Array:
    """Where a unit's centre is, world frame (3,); a machine given by three numbers states no place: its centre of mass."""
    placed: Array = stance.p_WT + stance.R_WT @ unit.at_T
    return turned(stance, 0.0) if machine.lumped is not None and not np.any(unit.at_T) else placed


def axles(machine: Machine, stance: Stance, plant: Plant | None, flat: Flat) -> tuple[Axle, ...]:
    """Spin and gimbal axes of all units."""
    found = []
    for unit in plant.units if plant else ():
        at = flat.points(unit_place(machine, stance, unit))[0]
        found.append(Axle(unit.name, "spin", at, flat.axes @ stance.R_WT @ unit.axis_T))
        if unit.gimbal_axis_T is not None:
            found.append(Axle(unit.name, "gimbal", at, flat.axes @ stance.R_WT @ unit.gimbal_axis_T))
    return tuple(found)


def at_rest(machine: Machine, stance: Stance) -> tuple[float, float]:
    """Return the least margin with all feet down and the trunk's shift to balance, both in m; NaN where there is none."""
    if stance.name not in (machine.stances or {}):
        return math.nan, math.nan
    found = statics_of(machine, stance)
    return found.support.margin if found.support else math.nan, found.shift.distance if found.shift.reached else math.nan


def outline(machine: Machine, stance: Stance, plant: Plant | None) -> Drawing:
    """Flatten one stance into both views."""
    above = Flat(np.zeros(3), np.eye(3)[:2])
    along = Flat(stance.p_a_W, np.array([stance.w_W, stance.u_W]))
    lean = plant.balanced_lean if plant else -math.atan2(stance.offset, stance.height)
    margin, shift = at_rest(machine, stance)
    return Drawing(
        margin=MM * margin, shift=MM * shift, machine=machine.machine, stance=stance.name, acts=plant is None or plant.acts,
        top=view(machine, stance, plant, above), side=view(machine, stance, plant, along),
        outward=np.asarray(stance.w_W)[:2], balanced_lean=math.degrees(lean),
        height=MM * stance.height, offset=MM * stance.offset,
        hinge=MM * machine.leg_compliance.height if machine.leg_compliance else math.nan)
