"""How much more a failed trial would have needed, found by running the very same trial with a larger stabiliser."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.goal.goal import Goal
from balance.goal.trials import Trial
from balance.kernel.layout import (
    BUS_VOLTAGE,
    CURRENT_LIMIT,
    DRIVE_TORQUE,
    GIMBAL_INERTIA,
    KIND,
    MOMENTUM,
    OVERVOLTAGE,
    RATE_LIMIT,
    SOURCE_AMPS,
    SPEED_LIMIT,
    TORQUE_LIMIT,
    WHEEL,
)
from balance.plant.record import Plant
from balance.simulate.run import run_one

Array = NDArray[np.float64]

MOST = 4.0
"""Larger factors are no advice any more: another stabiliser is needed."""
FINE = 0.01


def what_it_needs(design: Design, goal: Goal, name: str, trial: Trial, toward: str) -> str:
    """Return in words how much more momentum, torque or both the trial needs; found by simulation to 1 %."""
    for words, change in (("momentum", more_momentum), ("torque", more_torque), ("momentum and torque", _both)):
        factor = _least(change, design, goal, name, trial, toward)
        if factor is not None:
            return f"needs about {100.0 * (factor - 1.0):.0f} % more {words} (found by running the trial again)"
    return f"even {MOST:.0f} times the momentum and torque would not do (found by running the trial again)"


def more_momentum(design: Design, factor: float) -> Design:
    """Return the design with `factor` times the momentum at the same torque.

    Wheels: speed limit and bus voltage grow, the law stays. Gimballed: H grows and the rates shrink, so that the
    same command gives the same torque about the line; the law sees the gimbals as they would have stood.
    """
    rows, law = design.plant.unit_parameters.copy(), design.law
    allotment, levelling, D, B = law.allotment.copy(), law.levelling.copy(), law.D.copy(), law.B.copy()
    for i, row in enumerate(rows):
        if row[KIND] == WHEEL:
            row[SPEED_LIMIT] *= factor
            row[BUS_VOLTAGE] *= factor
            continue
        row[MOMENTUM] *= factor
        row[RATE_LIMIT] /= factor
        row[GIMBAL_INERTIA] *= factor
        row[DRIVE_TORQUE] *= factor
        allotment[i] /= factor
        for j, measured in enumerate(law.measurements):
            if measured in _gimbal_states(design.plant, i):
                D[j] *= factor
                B[:, j] *= factor
    changed = replace(law, allotment=allotment, levelling=levelling, D=D, B=B)
    return replace(design, plant=_with(design.plant, rows, factor, 1.0), law=changed)


def more_torque(design: Design, factor: float) -> Design:
    """Return the design with `factor` times the torque at the same momentum: limits on torque, current and rate."""
    rows, law = design.plant.unit_parameters.copy(), design.law
    for row in rows:
        places = (TORQUE_LIMIT, CURRENT_LIMIT) if row[KIND] == WHEEL else (RATE_LIMIT, DRIVE_TORQUE)
        row[list(places)] *= factor
    changed = replace(law, output_limit=law.output_limit * factor, input_limits=law.input_limits * factor)
    return replace(design, plant=_with(design.plant, rows, 1.0, factor), law=changed)


def _both(design: Design, factor: float) -> Design:
    """Return the design with `factor` times momentum and torque."""
    return more_torque(more_momentum(design, factor), factor)


def _least(change: Callable[[Design, float], Design], design: Design, goal: Goal, name: str, trial: Trial,
           toward: str) -> float | None:
    """Return the smallest factor with which the trial is recovered, to 1 %; None where MOST is not enough."""

    def recovers(factor: float) -> bool:
        return run_one(change(design, factor), goal, name, trial, toward, False).verdict == "recovered"

    if not recovers(MOST):
        return None
    low, high = 1.0, MOST
    while high / low > 1.0 + FINE:
        middle = float(np.sqrt(low * high))
        low, high = (low, middle) if recovers(middle) else (middle, high)
    return high


def _gimbal_states(plant: Plant, i: int) -> tuple[str, str]:
    """Return the names of the two states of gimballed unit i."""
    where = 2 + sum(1 if row[KIND] == WHEEL else 2 for row in plant.unit_parameters[:i])
    return plant.model.states[where], plant.model.states[where + 1]


def _with(plant: Plant, rows: Array, momentum: float, torque: float) -> Plant:
    """Return the plant with other unit rows, `momentum` times its capacity, and a supply to match."""
    units = tuple(replace(u, momentum_capacity=u.momentum_capacity * momentum) for u in plant.units)
    supply = plant.supply_parameters
    if supply is not None:
        supply = supply.copy()
        supply[[BUS_VOLTAGE, OVERVOLTAGE]] *= momentum
        supply[SOURCE_AMPS] *= torque
    return replace(plant, unit_parameters=rows, units=units, momentum_capacity=plant.momentum_capacity * momentum,
                   supply_parameters=supply)
