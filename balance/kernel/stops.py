"""One smooth piece of a trial, and gimbal stops in it: hard, without rebound.

A gimbal that lies on its stop is integrated as a servo of unlimited strength told to stand still, so that the
equations of motion need no second form; `Work.live` is the copy of the units' parameters that says so.
"""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import Output, Work
from balance.kernel.gauge import line_momentum, note
from balance.kernel.integrate import beyond_stop, disturbance_at, jump, march, rates
from balance.kernel.layout import ANGLE_STOP, DRIVE_TORQUE, GIMBAL_SERVO, GIMBAL_TORQUE, KIND, RATE_LAG

Array = NDArray[np.float64]


@njit(cache=True, error_model="numpy")
def run_piece(X: Array, begin: float, until: float, longest: float, units: Array, work: Work,
              output: Output) -> tuple[int, float]:
    """Integrate one smooth piece in sub-steps of at most `longest`; return how the trial ended, and the time.

    Where a gimbal meets its stop the sub-step is cut there, and the rest of the piece is divided anew.
    """
    t, end = begin, outcome.RAN
    while t < until - 1e-9 * (until - begin) and end == outcome.RAN:
        steps = max(int(np.ceil((until - t) / longest - 1e-9)), 1)
        h = (until - t) / steps
        if release_stops(X, t, units, work):
            steps = 1
        made, end = march(X, t, h, steps, work.commands, work.active, work.at[2], work.body, units, work.live,
                          work.held, work.met, work.inputs, work.slopes, work.rate, work.total, work.probe,
                          output.metrics, output.first)
        t += made * h
        if made < steps and end == outcome.RAN:
            t += max(run_to_stop(X, t, h, units, work, output), 1e-6 * h)
    return end, t


@njit(cache=True, error_model="numpy")
def run_to_stop(X: Array, t: float, h: float, units: Array, work: Work, output: Output) -> float:
    """Move on from t to where a gimbal meets its stop, within the next h; hold it there; return the time moved.

    The instant is found by bisection on the length of a single step: rare, and good to 1e-12 of the step.
    Metrics of the trial steps go to spare arrays.
    """
    hit = beyond_stop(work.total, units, work.held)
    work.kept[:] = X
    low, high = 0.0, h
    while True:
        last = high - low <= 1e-12 * h
        reach = low if last else 0.5 * (low + high)
        metrics = output.metrics if last else work.spare_metrics
        first = output.first if last else work.spare_first
        made, _ = march(X, t, reach, np.int64(1), work.commands, work.active, work.at[2], work.body, units,
                        work.live, work.held, work.met, work.inputs, work.slopes, work.rate, work.total,
                        work.probe, metrics, first)
        if last:
            break
        X[:] = work.kept
        if made == 0:
            hit = beyond_stop(work.total, units, work.held)
            high = reach
        else:
            low = reach
    stop_gimbal(hit, X, units, work)
    note(t + low, line_momentum(X, units), hit, outcome.STOP, output.first)
    return low


@njit(cache=True, error_model="numpy")
def release_stops(X: Array, t: float, units: Array, work: Work) -> bool:
    """Let go of each held gimbal that the law would turn away from its stop; return whether one is still held.

    Also puts `work.commands`: what the law asks, but standing still for a gimbal on its stop.
    """
    any_held = False
    for i in range(units.shape[0]):
        work.commands[i] = work.asked[i] if work.held[i] == 0 else 0.0
    for i in range(units.shape[0]):
        if work.held[i] == 0:
            continue
        work.live[i] = units[i]
        work.commands[i] = work.asked[i]
        rates(X, disturbance_at(t, work.active, work.at[2]), work.commands, work.body, work.live, work.met,
              work.inputs, work.slopes, work.rate)
        if work.rate[3 + 2 * i] * work.held[i] < 0.0:
            work.held[i] = 0
        else:
            any_held = True
            lock(i, work.live)
            work.commands[i] = 0.0
    return any_held


@njit(cache=True, error_model="numpy")
def lock(i: int, live: Array) -> None:
    """Make unit i stand still whatever pushes it."""
    live[i, KIND] = GIMBAL_SERVO
    live[i, DRIVE_TORQUE] = np.inf
    live[i, RATE_LAG] = 1.0


@njit(cache=True, error_model="numpy")
def stop_gimbal(i: int, X: Array, units: Array, work: Work) -> None:
    """Unit i met its stop: its rate drops to zero, shared with the body by the mass matrix; it is held there.

    The stop's impulse is internal to the machine: the jumps of lean rate and gimbal rate have the ratio
    in which the gimbal's own torque changes the two accelerations.
    """
    side = 1 if X[2 + 2 * i] > 0.0 else -1
    kind = work.live[i, KIND]
    work.live[i, KIND] = GIMBAL_TORQUE
    jump(i, X, work.body, work.live, work.inputs, work.probe, work.rate)
    work.live[i, KIND] = kind
    X[1] -= work.rate[1] / work.rate[3 + 2 * i] * X[3 + 2 * i]
    X[2 + 2 * i] = side * units[i, ANGLE_STOP]
    X[3 + 2 * i] = 0.0
    work.held[i] = side
    lock(i, work.live)
