"""What a constant error does for ever: a centre of mass that is off, a tilt that is misread.

At rest no stabiliser gives torque, so gravity alone balances the machine and the law must ask for nothing: (I − A)x = B y
and C x + D y = 0 fix the momentum that stands in the stabiliser.  Linear; drag of the turning wheels is left out of the
balance, and counted in the power.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.kernel.layout import (
    BACK_EMF,
    COULOMB,
    GRAVITY,
    KIND,
    MASS,
    OFFSET,
    OWN_INERTIA,
    RESISTANCE,
    TORQUE_PER_AMP,
    VISCOUS,
    WHEEL,
)
from balance.plant.legs import balance_on
from balance.plant.record import Plant

Array = NDArray[np.float64]

TRIMMED = 1e3
"""m or rad: what needs an error larger than this to fill the capacity is trimmed out by the law; the rest is rounding."""

STILL = {"tilt": "lean", "gyro": "lean_rate"}
"""What the sensors show at rest."""


@dataclass(frozen=True)
class Standing:
    """What a steady error leads to, per stance."""

    offset: float            # m of centre-of-mass error whose standing momentum is the whole capacity
    tilt: float              # rad of tilt error, the same
    momentum: float          # N·m·s that stands for 1 mm of centre-of-mass error
    speeds: Array            # (units,) rad/s of each wheel then, or rad of each gimbal
    power: float             # W from the supply to turn the wheels against their drag then (0 for gimbals)
    full_in: float           # s until the capacity is used up by 1 mm if the law brought nothing back


def standing(design: Design) -> Standing:
    """Return what steady errors do; zeros where the loop is unstable or holds no such state."""
    plant = design.plant
    weight = float(plant.body_parameters[MASS] * plant.body_parameters[GRAVITY])
    per_lean = _momentum_per_lean(design)
    per_metre = per_lean * _lean_per_offset(plant, weight) if plant.stiffness > 0.0 else 0.0
    momentum = 1e-3 * per_metre
    where = _per_momentum(design) * momentum
    kept = [i for i, name in enumerate(plant.model.states) if name.endswith(("wheel_speed", "gimbal_angle"))]
    speeds = where[kept]
    return Standing(_tolerable(design, per_metre), _tolerable(design, per_lean), momentum, speeds,
                    _drag_power(plant.unit_parameters, speeds), plant.momentum_capacity / (1e-3 * weight))


def _lean_per_offset(plant: Plant, weight: float) -> float:
    """Return how the balance moves per metre of centre-of-mass error, rad/m: outward mass leans it inward.

    −m g/G; on legs that give they bend as well, and further: a central difference of the balance over 0.2 mm.
    """
    if plant.legs_parameters is None:
        return -weight / plant.stiffness
    ends = []
    for shift in (1e-4, -1e-4):
        body = plant.body_parameters.copy()
        body[OFFSET] += shift
        ends.append(balance_on(body, plant.legs_parameters)[0])
    return (ends[0] - ends[1]) / 2e-4


def tolerable_offset(design: Design) -> float:
    """Return the offset error in m the machine bears for ever; inf where none is stored, 0 where it bears none."""
    return standing(design).offset


def _tolerable(design: Design, per_error: float) -> float:
    if not design.margins.stable or np.isnan(per_error):
        return 0.0
    largest = design.plant.momentum_capacity / abs(per_error) if per_error != 0.0 else float("inf")
    return largest if largest < TRIMMED else float("inf")


def _momentum_per_lean(design: Design) -> float:
    """Return the standing momentum in N·m·s per rad of lean shown to the law at rest; NaN where it holds none."""
    plant, law = design.plant, design.law
    if not design.margins.stable:
        return float("nan")
    lean = np.zeros(len(plant.model.states))
    lean[0] = 1.0
    pick = [plant.model.states.index(STILL.get(name, name)) for name in law.measurements]
    state, shown = _per_momentum(design)[pick], lean[pick]                   # (m,)
    k = law.A.shape[0]
    rows = np.zeros((k + 1, k + 1))
    rows[:k, :k], rows[:k, k] = np.eye(k) - law.A, -(law.B @ state)
    rows[k, :k], rows[k, k] = law.C, law.D @ state
    right = np.concatenate([law.B @ shown, [-(law.D @ shown)]])
    solved, *_ = np.linalg.lstsq(rows, right)
    if not np.allclose(rows @ solved, right, atol=1e-9 * (1.0 + float(np.abs(right).max()))):
        return float("nan")
    return float(solved[k])


def _per_momentum(design: Design) -> Array:
    """Return the model's states with one N·m·s stored about the line, shared out as the law does, (n,)."""
    plant = design.plant
    state = np.zeros(len(plant.model.states))
    where = 2
    for share, unit in zip(plant.allotment, plant.unit_parameters, strict=True):
        state[where] = share / unit[OWN_INERTIA] if unit[KIND] == WHEEL else share
        where += 1 if unit[KIND] == WHEEL else 2
    stored = float(plant.momentum_row @ state)
    return state / stored if stored != 0.0 else state


def _drag_power(units: Array, speeds: Array) -> float:
    """Return Σ V i with i = drag/K_t and V = R i + K_e Ω, in W, over the wheels at these speeds."""
    total = 0.0
    for unit, speed in zip(units, np.abs(speeds), strict=True):
        if unit[KIND] == WHEEL and speed > 0.0:
            current = (unit[COULOMB] + unit[VISCOUS] * speed) / unit[TORQUE_PER_AMP]
            total += current * (unit[RESISTANCE] * current + unit[BACK_EMF] * speed)
    return float(total)
