"""What must be survived, as momentum about the line: what each trial asks of z, times J_rest p.

A disturbance d(t) moves z = lean + lean rate/p by its discounted momentum; torque T can answer it if
∫e^{−ps} T ds ≥ J_rest p z₀ + max over t of ∫₀ᵗ e^{−ps} d ds, times e^{p t_d} for what comes too late.  The maximum over
t: a law that does not know the future must be able to bear that the rest never comes.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, tau

import numpy as np
from numpy.typing import NDArray

from balance.goal.goal import Goal
from balance.goal.trials import Trial

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Seen:
    """What a contact line sees of the machine with each candidate, (n,) each."""

    mass: Array         # kg
    height: Array       # m
    inertia: Array      # J_rest, kg·m²
    stiffness: Array    # G, N·m/rad

    @property
    def pole(self) -> Array:
        """Return p in 1/s."""
        return np.asarray(np.sqrt(self.stiffness / self.inertia))


def demands(goal: Goal, seen: Seen) -> dict[str, Array]:
    """Return trial name -> discounted momentum it asks for in N·m·s, (n,), latency not counted."""
    return {name: demand(trial, seen) for name, trial in goal.trials.items()}


def demand(trial: Trial, seen: Seen) -> Array:
    """Return what one trial asks for; parts act together.  Slopes and tables over time are left to the simulator."""
    p, J = seen.pole, seen.inertia
    total: Array = np.zeros_like(p)
    for start in (trial.start, trial.lift_off):
        if start is not None:
            total += J * np.abs(p * start.lean + start.lean_rate) + abs(start.stored)
    if trial.push is not None:
        total += trial.push.impulse * trial.push.height
    if trial.offset is not None:
        total += abs(trial.offset.shift) * seen.stiffness / seen.height / p
    if trial.payload is not None:
        total += abs(trial.payload.mass * trial.payload.across) * seen.stiffness / (seen.mass * seen.height) / p
    if trial.torque is not None:
        lasts = inf if trial.torque.lasts is None else trial.torque.lasts
        total += abs(trial.torque.step) * (1.0 - np.exp(-p * lasts)) / p
    if trial.ramp is not None:
        total += abs(trial.ramp.to) * (1.0 - np.exp(-p * trial.ramp.lasts)) / (p * p * trial.ramp.lasts)
    swing = trial.swing
    if swing is not None and swing.peak is not None and swing.lasts is not None:
        turn = tau / swing.lasts
        total += abs(swing.peak) * turn * (1.0 + np.exp(-0.5 * p * swing.lasts)) / (p * p + turn * turn)
    for points in (swing.points if swing is not None else None, trial.gusts.points if trial.gusts is not None else None):
        if points:
            total += _of_points(points, p)
    return total


def _of_points(points: tuple[tuple[float, float], ...], p: Array) -> Array:
    """Return the largest discounted momentum, either way, of a torque given by points (trapezia of 400 cuts)."""
    times = np.linspace(points[0][0], points[-1][0], 400)
    torque = np.interp(times, [t for t, _ in points], [v for _, v in points])
    sampled = np.geomspace(p.min(), p.max(), 32) if p.max() > p.min() else p[:1]
    found = []
    for pole in sampled:
        weighed = np.exp(-pole * (times - times[0])) * torque
        running = np.concatenate([[0.0], np.cumsum(0.5 * (weighed[1:] + weighed[:-1]) * np.diff(times))])
        found.append(np.abs(running).max())
    return np.asarray(np.interp(p, sampled, found))


def total_delay(goal: Goal, lag: float) -> float:
    """Return what comes too late in s: latency, half a sample of hold, jitter, the drive's lag 1/bandwidth (rad/s)."""
    return goal.loop.latency + 0.5 / goal.loop.rate + goal.loop.jitter + 1.0 / lag
