"""The largest centre-of-mass error the machine bears for ever."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.kernel.layout import GRAVITY, KIND, MASS, OWN_INERTIA, WHEEL

Array = NDArray[np.float64]


def tolerable_offset(design: Design) -> float:
    """Return the offset error in m whose standing momentum is the whole capacity; inf where none is stored.

    At rest no stabiliser gives torque, so gravity balances the error: lean = -m g s cos β/G. The law then asks for
    nothing only where its memory is at rest and v = 0, which fixes the momentum stored: (I - A)x = B y,
    C x + D y = 0, linear in (x, momentum). Drag of the turning wheels is left out.
    0 where the loop is unstable or holds no such state.
    """
    plant, law = design.plant, design.law
    if not design.margins.stable:
        return 0.0
    body = plant.body_parameters
    lean_per_m = -body[MASS] * body[GRAVITY] / plant.stiffness
    state = _per_momentum(design)                                            # (n,)
    lean = np.zeros(len(plant.model.states))
    lean[0] = 1.0
    still = {"tilt": "lean", "gyro": "lean_rate"}                            # what the sensors show at rest
    pick = [plant.model.states.index(still.get(name, name)) for name in law.measurements]
    k = law.A.shape[0]
    rows = np.zeros((k + 1, k + 1))
    rows[:k, :k], rows[:k, k] = np.eye(k) - law.A, -(law.B @ state[pick])
    rows[k, :k], rows[k, k] = law.C, law.D @ state[pick]
    right = np.concatenate([law.B @ lean[pick], [-(law.D @ lean[pick])]]) * lean_per_m
    solved, *_ = np.linalg.lstsq(rows, right)
    if not np.allclose(rows @ solved, right, atol=1e-9 * (1.0 + float(np.abs(right).max()))):
        return 0.0
    stored = abs(float(solved[k]))
    return float("inf") if stored < 1e-12 else plant.momentum_capacity / stored


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
