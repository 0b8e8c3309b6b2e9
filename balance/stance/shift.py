"""How far the trunk must move across the contact line to stand in balance."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from balance.base.errors import InputError
from balance.machine.machine import Machine
from balance.stance.build import stand_as_built
from balance.stance.record import Stance

ROUNDS = 20
"""Secant steps allowed; the offset is nearly linear in the shift, four or five are needed."""


@dataclass(frozen=True)
class BalanceShift:
    """The trunk's horizontal move along w (positive outward) that brings the centre of mass over the line.

    The feet stay, the legs follow.  Where a leg cannot follow, `reached` is False, `distance` the
    straight-line estimate from the moves that could be made, and `reason` says which leg.
    """

    distance: float          # m
    reached: bool
    reason: str
    stance: Stance           # the balanced stance, or the one asked about where it cannot be reached


def shift_to_balance(machine: Machine, stance: Stance) -> BalanceShift:
    """Return the shift that makes the offset of `stance` zero (secant method on the true leg geometry)."""
    if machine.lumped is not None:
        return BalanceShift(0.0 - stance.offset, True, "", stance)
    least = 1e-12 * (stance.length + abs(stance.height))
    before, at = (0.0, stance.offset), stance
    slope = 1.0            # all mass moves with the trunk: a first guess that is somewhat short
    for _ in range(ROUNDS):
        if abs(at.offset) <= least:
            return BalanceShift(before[0], True, "", at)
        distance = before[0] - at.offset / slope
        try:
            at = _moved(machine, stance, distance)
        except InputError as gap:
            return BalanceShift(distance, False, str(gap.problems[0]), stance)
        slope = (at.offset - before[1]) / (distance - before[0])
        before = (distance, at.offset)
    return BalanceShift(before[0], False, "the legs' geometry admits no balanced place nearby", stance)


def _moved(machine: Machine, stance: Stance, distance: float) -> Stance:
    plan = (machine.stances or {})[stance.name]
    x, y, z = (float(c) for c in np.array(plan.trunk.at) + distance * stance.w_W)
    return stand_as_built(machine, stance.name, replace(plan, trunk=replace(plan.trunk, at=(x, y, z))))
