"""The plant of a machine that is not quite as its file says: the same model with some of its numbers moved.

How the law shares its command (allotment, levelling) and the limits stay those of the file: the law was made for it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import cos, hypot, isfinite, sin

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.plant.build import about_balance, balanced, free_inertia
from balance.plant.linear import linear_model
from balance.plant.on_legs import on_legs
from balance.plant.record import Plant, Unit
from balance.plant.sharing import momentum_row

Array = NDArray[np.float64]


def deviated(plant: Plant, by: Mapping[str, float]) -> Plant:
    """Return the plant with deviations `by` name; names that are not of the plant (`latency`) are left alone.

    Shares of the nominal value: `mass` (more of the same, so the inertia about its centre grows with it), `inertia` (about
    the line), `voltage` and `bandwidth` (lags of the actuators), and per unit `torque_constant`, `flywheel_momentum`;
    SI: `height`, `offset` in m, `pair_angle` in rad; `leg_stiffness`, a share, where the legs give.  A machine with several
    units writes `NAME.torque_constant`.
    The inertia never falls below the mass at its distance from the line (parallel-axis theorem).
    """
    legs = plant.legs_parameters
    plant = plant.for_law
    body = _body(plant, by)
    rows = np.array([_row(plant, i, by) for i in range(len(plant.units))])
    stiffness, inertia = about_balance(body)
    model = linear_model(body, rows, tuple(unit.name for unit in plant.units), stiffness, inertia)
    push = np.array([1.0 + by.get(unit_key(plant, i, "torque_constant"), 0.0) for i in range(len(plant.units))])
    model = replace(model, B=model.B * push)
    units = tuple(_unit(plant.units[i], rows[i], by) for i in range(len(rows)))
    first = [model.states.index(s) for s in model.states if s.split(".")[-1] in ("wheel_speed", "gimbal_angle")]
    moved = replace(plant, units=units, model=model, stiffness=stiffness, inertia_free=free_inertia(inertia, rows),
                    momentum_row=momentum_row(rows, first, len(model.states)), balanced_lean=float(body[at.BALANCED]),
                    body_parameters=body, unit_parameters=rows)
    if legs is None:
        return moved
    given = legs.copy()
    given[at.HINGE_STIFFNESS] *= 1.0 + by.get("leg_stiffness", 0.0)
    return on_legs(moved, given, push)


def unit_key(plant: Plant, i: int, word: str) -> str:
    """Return the name of a unit's own deviation; alone it needs no prefix, as its states do not."""
    return word if len(plant.units) == 1 else f"{plant.units[i].name}.{word}"


def _body(plant: Plant, by: Mapping[str, float]) -> Array:
    """Return the body's row with mass, centre of mass and inertia moved."""
    body: Array = plant.body_parameters.copy()
    stance = plant.stance
    more = 1.0 + by.get("mass", 0.0)
    h, d = stance.height + by.get("height", 0.0), stance.offset + by.get("offset", 0.0)
    around = stance.inertia_locked - stance.mass * hypot(stance.height, stance.offset) ** 2
    least = more * stance.mass * hypot(h, d) ** 2
    inertia = max((more * around + least) * (1.0 + by.get("inertia", 0.0)), least)
    body[at.MASS], body[at.HEIGHT], body[at.OFFSET] = more * stance.mass, h, d
    body[at.INERTIA] += inertia - stance.inertia_locked
    weight = more * stance.mass * body[at.GRAVITY]
    body[at.STIFF_SIN], body[at.STIFF_COS] = weight * h, weight * d
    body[at.BALANCED] = balanced(d, h - body[at.FOOT_RADIUS])
    return body


def _row(plant: Plant, i: int, by: Mapping[str, float]) -> Array:
    """Return a unit's row with its momentum, the pair's mismatch and a servo's bandwidth moved.

    Each gimbal of a pair off by ε from the mirrored pose: e·(g × s₀) becomes e·(g × s₀) cos ε − e·s₀ sin ε.  A difference
    of H between the two leaves their sum, and so the loop about the line, as it is; it acts across the line.
    """
    row: Array = plant.unit_parameters[i].copy()
    if row[at.KIND] == at.WHEEL:
        return row
    off = by.get(unit_key(plant, i, "pair_angle"), 0.0)
    row[at.MOMENTUM] *= 1.0 + by.get(unit_key(plant, i, "flywheel_momentum"), 0.0)
    row[at.E_GXS0] = row[at.E_GXS0] * cos(off) - row[at.E_S0] * sin(off)
    row[at.RATE_LAG] *= 1.0 + by.get("bandwidth", 0.0)
    return row


def _unit(unit: Unit, row: Array, by: Mapping[str, float]) -> Unit:
    """Return the unit with its lag moved: the supply's voltage is in the gain of a current loop, not of a servo's."""
    if not isfinite(unit.lag):
        return unit
    if row[at.KIND] == at.WHEEL:
        return replace(unit, lag=unit.lag * (1.0 + by.get("bandwidth", 0.0)) * (1.0 + by.get("voltage", 0.0)))
    return replace(unit, lag=unit.lag * (1.0 + by.get("bandwidth", 0.0)))
