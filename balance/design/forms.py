"""The same gains in the forms firmware people meet: SI rows, ampere and duty per unit of state, folded per sample."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.kernel.layout import BUS_VOLTAGE, KIND, RESISTANCE, TORQUE_PER_AMP, WHEEL
from balance.plant.record import Plant

Array = NDArray[np.float64]


@dataclass(frozen=True)
class ActuatorGains:
    """One unit's row: input = row · measurements, SI, the law's memory left out.

    `current` in A and `duty` (share of the supply voltage at standstill, R i/V) per SI unit of each measurement; None for
    gimbal drives, whose input is the rate (rad/s) or torque (N·m) itself.
    """

    unit: str
    si: Array               # (m,)
    current: Array | None   # (m,)
    duty: Array | None      # (m,)


@dataclass(frozen=True)
class PidForms:
    """PID about the line. Parallel per second, and folded: what is added or multiplied once a sample."""

    kp: float               # N·m/rad
    ki: float               # N·m/(rad·s)
    kd: float               # N·m·s/rad
    ki_sample: float        # N·m/rad added to the integral per sample and rad of error: ki T
    kd_new: float           # N·m·s/rad on the newest rate: kd (1 − a)
    filter_keep: float      # a: share of the filtered rate kept per sample
    integral_time: float    # s, Ti = kp/ki of the standard form (inf without ki)
    derivative_time: float  # s, Td = kd/kp


def actuator_gains(design: Design) -> tuple[ActuatorGains, ...]:
    """Return one row per unit: allotment × D − levelling, on `law.measurements`."""
    law = design.law
    rows = np.outer(law.allotment, law.D) - law.levelling                       # (units, m)
    return tuple(_row(design.plant, i, rows[i]) for i in range(len(rows)))


def _row(plant: Plant, i: int, row: Array) -> ActuatorGains:
    unit = plant.unit_parameters[i]
    if unit[KIND] != WHEEL:
        return ActuatorGains(plant.units[i].name, row, None, None)
    current = row / unit[TORQUE_PER_AMP]
    duty = current * unit[RESISTANCE] / unit[BUS_VOLTAGE] if np.isfinite(unit[BUS_VOLTAGE]) else None
    return ActuatorGains(plant.units[i].name, row, current, duty)


def pid_forms(design: Design) -> PidForms | None:
    """Return a PID law's forms, None for other laws."""
    law, gains = design.law, design.law.gains
    if law.kind != "pid":
        return None
    T = law.sample_time
    keep = float(np.exp(-gains["derivative_filter_rad_s"] * T))
    kp, ki, kd = gains["kp"], gains["ki"], gains["kd"]
    return PidForms(kp, ki, kd, ki * T, kd * (1.0 - keep), keep, kp / ki if ki else float("inf"), kd / kp if kp else 0.0)
