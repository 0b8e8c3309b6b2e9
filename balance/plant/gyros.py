"""What a stabiliser asks of what is around it: its drive, its turntable and the feet, its spin motor, its link."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import hypot, inf, pi

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.plant.record import Plant, Unit

Array = NDArray[np.float64]

ANGLES = 181
"""Gimbal angles looked at from stop to stop: a couple is a sine of it, and half a degree is 4e-5 of its largest."""
SQUARE = 1e-6
"""Shares below this are rounding of the axes in a file."""


@dataclass(frozen=True)
class Turning:
    """The turntable of one unit on one stance, at its rate limit, the machine standing still."""

    rate: float            # rad/s
    level: float           # N·m: couple about a horizontal axis with the gimbals at angle zero, a wheel standing
    stops: float           # N·m: the largest with the gimbals anywhere between their stops, a wheel at top speed
    share: float           # what `stops` takes off the lighter foot, as a share of what it carries


def holds_lean_rate(row: Array) -> float:
    """Return the lean rate in rad/s whose push-back H σ' θ̇ is all the gimbal drive has; inf for a drive without limit.

    |σ'| is at most √((e·s₀)² + (e·(g × s₀))²); a wheel (no gimbal) holds any rate.
    """
    if row[at.KIND] == at.WHEEL:
        return inf
    most = row[at.MOMENTUM] * hypot(row[at.E_S0], row[at.E_GXS0])
    return float(row[at.DRIVE_TORQUE] / most) if most > 0.0 else inf


def turning(plant: Plant, i: int) -> Turning | None:
    """Return what turning unit i's table does to the feet; None where it stands on none.

    A table that turns at ψ̇ about the trunk's z makes the couple ψ̇ z × L, L the rotors' momentum: one flywheel H s(γ), a pair
    2 H sin γ (g × s₀), a wheel (I + s N J_r) Ω a.  About w it moves load from foot to foot by itself over their distance.
    The table's own acceleration is not stated, and left out.
    """
    unit, stance = plant.units[i], plant.stance
    if unit.turn_rate <= 0.0:
        return None
    L = _momenta(unit, plant.unit_parameters[i])                            # (ANGLES, 3)
    couple = np.hypot(L[:, 0], L[:, 1]) * unit.turn_rate                    # |z × L|
    share = inf
    if stance.length > 0.0:
        share_b = float((stance.com_W - stance.p_a_W) @ stance.e_W) / stance.length
        lighter = stance.mass * stance.gravity * min(share_b, 1.0 - share_b) * stance.length
        share = float(couple.max()) / lighter if lighter > 0.0 else inf
    return Turning(unit.turn_rate, float(couple[ANGLES // 2]), float(couple.max()), share)


def _momenta(unit: Unit, row: Array) -> Array:
    """Return the rotors' momentum in the trunk's axes, (ANGLES, 3): gimbals stop to stop, wheels at all speeds."""
    reach = np.linspace(-1.0, 1.0, ANGLES)[:, None]
    if unit.gimbal_axis_T is None:
        coupled = float(np.linalg.norm(row[[at.COUPLING, at.COUPLING_U, at.COUPLING_W]]))
        return np.asarray(coupled * unit.speed_limit * reach * unit.axis_T)
    across, gamma = np.cross(unit.gimbal_axis_T, unit.axis_T), row[at.ANGLE_STOP] * reach
    if row[at.COUNT] > 1.5:                                                 # a pair
        return np.asarray(row[at.MOMENTUM] * 2.0 * np.sin(gamma) * across)
    return np.asarray(row[at.MOMENTUM] * (np.cos(gamma) * unit.axis_T + np.sin(gamma) * across))


def turn_times(plants: Sequence[Plant], i: int) -> dict[tuple[str, str], float]:
    """Return (stance, other stance) -> s that unit i's table needs from one line to the other at its rate limit.

    By the shorter way round; the unit faces either line with the same side.  Empty where it stands on no table.
    """
    found = {}
    for k, one in enumerate(plants):
        for other in plants[k + 1:]:
            unit, then = one.units[i], other.units[i]
            if unit.turn_rate <= 0.0:
                continue
            angle = _heading(then) - _heading(unit)
            found[one.stance.name, other.stance.name] = abs((angle + pi) % (2.0 * pi) - pi) / unit.turn_rate
    return found


def _heading(unit: Unit) -> float:
    """Return where a unit faces on its table, rad: the heading of g × s₀, or of a wheel's axis, in the trunk's xy plane."""
    acting = np.cross(unit.gimbal_axis_T, unit.axis_T) if unit.gimbal_axis_T is not None else unit.axis_T
    return float(np.arctan2(acting[1], acting[0]))


def needs_link(plant: Plant, i: int) -> bool:
    """Tell whether unit i is a pair that does not stay mirrored by itself about this line, and no link is stated.

    Only e·s₀ = 0 and κ = 0 keep two free gimbals mirrored; elsewhere the two must be geared to each other.
    """
    row, unit = plant.unit_parameters[i], plant.units[i]
    return bool(row[at.COUNT] > 1.5 and not unit.linked and max(abs(row[at.E_S0]), abs(row[at.KAPPA])) > SQUARE)
