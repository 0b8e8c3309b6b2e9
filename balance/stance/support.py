"""Statics with all feet down: how far the centre of mass is from each edge of the support polygon."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.machine.machine import Machine, StancePlan
from balance.maths.hull import hull_order
from balance.stance.build import stand_as_built
from balance.stance.record import Stance

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Edge:
    """One edge of the support polygon; `margin` is the centre of mass's horizontal distance inside of it."""

    foot_from: str
    foot_to: str
    margin: float      # m, negative outside: the machine tips over this edge


@dataclass(frozen=True)
class Support:
    """The machine in a stance's pose with its lifted feet lowered straight down to the ground."""

    contacts_W: dict[str, Array]     # foot -> (3,) m
    com_W: Array                     # (3,) m
    edges: tuple[Edge, ...]          # counter-clockwise from above; none for two feet
    joints: dict[str, tuple[float, ...]]   # rad

    @property
    def margin(self) -> float:
        """The least margin in m; NaN without edges."""
        return min((edge.margin for edge in self.edges), default=float("nan"))


def all_down(machine: Machine, stance: Stance) -> Support:
    """Return the static support of `stance`'s pose with every foot on the ground.

    Lifted feet go straight down to the plane through the contact line and w.  Lumped machines have two feet
    and so no polygon.  Raises InputError where a leg cannot reach its lowered foot.
    """
    if machine.lumped is not None:
        contacts = {stance.foot_from: stance.p_a_W, stance.foot_to: stance.p_b_W}
        return Support(contacts, stance.com_W, (), {})
    plan = (machine.stances or {})[stance.name]
    lowered = lowered_feet(plan, stance)
    standing = stand_as_built(machine, stance.name, replace(plan, lifted=lowered))
    contacts = {foot: np.array(at) for foot, at in (plan.down | lowered).items()}
    return Support(contacts, standing.com_W, support_edges(contacts, standing.com_W), standing.joints)


def lowered_feet(plan: StancePlan, stance: Stance) -> dict[str, tuple[float, float, float]]:
    """Return the lifted feet's places straight below them on the ground."""
    lowered = {}
    for foot, (x, y, z) in (plan.lifted or {}).items():
        lowered[foot] = (x, y, z - stance.lifted[foot][1] / float(stance.u_W[2]))
    return lowered


def support_edges(contacts_W: Mapping[str, Array], com_W: Array) -> tuple[Edge, ...]:
    """Return the edges of the convex hull of the contacts, seen from above, with the margin to each."""
    names = list(contacts_W)
    points = np.array([contacts_W[name][:2] for name in names])              # (n, 2)
    corners = hull_order(points)
    if len(corners) < 3:
        return ()
    edges = []
    for i, j in zip(corners, corners[1:] + corners[:1], strict=True):
        along = (points[j] - points[i]) / np.linalg.norm(points[j] - points[i])
        arm = com_W[:2] - points[i]
        edges.append(Edge(names[i], names[j], float(along[0] * arm[1] - along[1] * arm[0])))
    return tuple(edges)
