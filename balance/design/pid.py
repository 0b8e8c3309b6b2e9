"""PID for one stance: computed within what the design file asks for, or the user's own gains taken as they are."""

from __future__ import annotations

from dataclasses import replace
from math import inf, pi, radians, sqrt

import numpy as np

from balance.design.law import Law
from balance.design.loop import SampledPlant
from balance.design.pid_form import Actuation, PidForm, actuation, pid_law
from balance.design.pid_screen import Wanted
from balance.design.pid_tune import prepare, search
from balance.design.sensed import Sensed
from balance.goal.goal import Goal, PidControl, Requirements
from balance.plant.record import Plant

GYRO_NOISE = radians(0.005)
"""rad/s/√Hz and, as an angle per sample in rad, what the tilt is known to: a small MEMS sensor (common practice)."""

NOISE_SHARE = 0.05
"""Of the torque limit: what sensor noise may ask for, RMS."""

DAMPING = 0.4
"""Least damping ratio of any mode: below it a disturbance rings on."""

LEFT = 0.8
"""Share of the legs' own damping that the loop must leave them."""

FILTER_SHARE = 0.2
"""Derivative filter over sample rate, where the file states none."""

DESATURATION = (4.0, 6.0, 8.0, 3.0, 12.0, 20.0)
"""Desaturation times tried, in units of 1/p, where the file states none: quick, but slower than the lean loop."""

RUNS_AWAY = ("a PID on the lean alone lets the stored momentum run away: the lean can look stable while the wheel speeds "
             "up for ever behind a cancelled zero at the origin; give `gains.momentum` a positive value (rad per N·m·s)")


def design_pid(plant: Plant, sampled: SampledPlant, goal: Goal) -> Law | str:
    """Return the PID law, or in plain words why there is none.

    `plant` is the machine as firmware sees it (stiff legs); `sampled` the machine as it is: gains are computed on that loop.

    Computed gains: the largest ki (least integrated lean after a step torque) that keeps `peak_sensitivity`, the
    margins under `require` and the noise limit (`pid_tune`).  The user's own gains are judged, not changed, except
    that gains without momentum feedback are refused: they leave a state at the edge of stability.
    """
    control = goal.control
    assert isinstance(control, PidControl)
    T, late = sampled.sample_time, sampled.latency
    act = actuation(plant, min(0.3 / (late + T / 2.0), 20.0 * plant.pole))
    bandwidth = 2.0 * pi * (control.derivative_filter or FILTER_SHARE / T)
    if control.gains is not None:
        own = control.gains
        if own.momentum <= 0.0:
            return RUNS_AWAY
        form = PidForm(own.kp, own.ki, own.kd, own.momentum, bandwidth, tracking(own.kp, own.kd, plant.pole))
        return pid_law(plant, form, act, T, late)
    times = [control.desaturation_time] if control.desaturation_time else [k / plant.pole for k in DESATURATION]
    return _computed(plant, sampled, goal.require, control, act, bandwidth, times)


def _computed(plant: Plant, sampled: SampledPlant, require: Requirements, control: PidControl, act: Actuation,
              bandwidth: float, times: list[float]) -> Law | str:
    """Return the law of the first desaturation time that keeps every limit, or which comes nearest and by how much."""
    sensed, wanted = perfect_sensors(sampled, plant), _wanted(plant, require, control)
    nearest = inf
    for time in times:
        form = PidForm(0.0, 1.0, 0.0, 1.0 / (plant.stiffness * time), bandwidth, 1.0 / plant.pole)
        found, over = search(prepare(plant, sensed, form, act), form, wanted, _damping(sampled.plant))
        nearest = min(nearest, over)
        if found is not None and over <= 0.0:
            return pid_law(plant, replace(found, tracking=tracking(found.kp, found.kd, plant.pole)), act,
                           sampled.sample_time, sampled.latency)
    if nearest == inf:
        return "no PID gains stabilise this loop with every mode damped; slow the desaturation or shorten the latency"
    return (f"no PID gains keep all limits at once: the nearest miss one by {100.0 * nearest:.0f} %; ease "
            "`control.peak_sensitivity` or the margins under `require`, shorten the latency, or slow the desaturation")


def tracking(kp: float, kd: float, pole: float) -> float:
    """Return the anti-windup's tracking time in s: half the derivative time, at most 0.2/p.

    The usual √(Ti Td) is too slow for a plant that falls: an integral wound up during saturation is paid for with lean.
    On the bench rig released at 47 % of the best possible, 30 ms recovers and 100 ms falls.
    """
    return min(0.5 * kd / kp if kp > 0.0 and kd > 0.0 else 1.0, 0.2 / pole)


def _damping(plant: Plant) -> float:
    """Return the least damping ratio asked of every mode; legs that give ring as they do, and may lose a fifth of it."""
    return DAMPING if plant.legs is None else min(DAMPING, LEFT * plant.legs.damping)


def perfect_sensors(sampled: SampledPlant, plant: Plant) -> Sensed:
    """Return the sampled plant with lean and lean rate measured under a small sensor's noise, unit states exactly."""
    n, N = len(plant.model.states), len(sampled.A)
    padded = np.zeros(N)
    padded[:n] = plant.momentum_row
    F = np.zeros((n, 2))
    F[0, 0] = F[1, 1] = 1.0
    sigma = np.array([GYRO_NOISE, GYRO_NOISE * sqrt(0.5 / sampled.sample_time)])
    C = sampled.rows(plant.model.states)
    return Sensed(sampled.A, sampled.B, C, np.zeros((N, 2)), F, sigma, np.eye(N)[0], padded, sampled.sample_time)


def _wanted(plant: Plant, require: Requirements, control: PidControl) -> Wanted:
    """Return the limits of the search: `control.peak_sensitivity` and what `require` asks of the margins."""
    return Wanted(
        peak_sensitivity=min(control.peak_sensitivity, require.peak_sensitivity or inf),
        phase=require.phase_margin or 0.0, gain_lower=require.gain_margin_lower or 1.0,
        gain_upper=require.gain_margin_upper or 1.0, delay=require.delay_margin or 0.0,
        disk=require.disk_margin or 1e-9, noise=NOISE_SHARE * plant.torque_limit)
