"""One smooth piece of a trial, and gimbal stops in it: hard, without rebound.

A gimbal that lies on its stop is integrated as a servo of unlimited strength told to stand still, so that the
equations of motion need no second form; `Work.live` is the copy of the units' parameters that says so.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import (
    ASKED,
    AT,
    COMMANDS,
    HELD,
    INPUTS,
    KEPT,
    MET,
    PROBE,
    RATE,
    SLOPES,
    SPARE_METRICS,
    TORQUES_ON,
    TOTAL,
    VARYING,
    Output,
    Work,
)
from balance.kernel.compiled import part
from balance.kernel.gauge import line_momentum, note
from balance.kernel.integrate import beyond_stop, disturbance_at, jump, march, put_on_legs, rates, vary
from balance.kernel.layout import ANGLE_STOP, DRIVE_TORQUE, GIMBAL_SERVO, GIMBAL_TORQUE, KIND, RATE_LAG, WHEEL

Array = NDArray[np.float64]


@part
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
        made, end = go(X, t, h, steps, units, work, output.metrics, output.first)
        t += made * h
        if made < steps and end == outcome.RAN:
            t += max(run_to_stop(X, t, h, units, work, output.metrics, output.first), 1e-6 * h)
    return end, t


@part
def go(X: Array, t: float, h: float, steps: int, units: Array, work: Work, metrics: Array,
       first: Array) -> tuple[int, int]:
    """Take the bundle apart and march: the one place where it is done."""
    numbers, flags = work.numbers, work.flags
    made, end = march(X, t, h, steps, numbers[COMMANDS], work.active, flags[AT, TORQUES_ON], flags[AT, VARYING],
                      work.base, work.body, units, work.live, flags[HELD], flags[MET], numbers[INPUTS], numbers[SLOPES],
                      numbers[RATE], numbers[TOTAL], numbers[PROBE], metrics, first)
    return int(made), int(end)


@part
def run_to_stop(X: Array, t: float, h: float, units: Array, work: Work, metrics: Array, first: Array) -> float:
    """Move on from t to where a gimbal meets its stop, within the next h; hold it there; return the time moved.

    The instant is found by bisection on the length of a single step: rare, and good to 1e-12 of the step. Metrics of
    the trial steps go to spare arrays.
    """
    kept, total, held = work.numbers[KEPT], work.numbers[TOTAL], work.flags[HELD]
    hit = beyond_stop(total, units, held)
    low, high = 0.0, h
    for j in range(X.size):
        kept[j] = X[j]
    while high - low > 1e-12 * h:
        middle = 0.5 * (low + high)
        made, _ = go(X, t, middle, np.int64(1), units, work, work.numbers[SPARE_METRICS], work.spare_first)
        if made == 0:
            hit = beyond_stop(total, units, held)
            high = middle
        else:
            low = middle
        for j in range(X.size):
            X[j] = kept[j]
    go(X, t, low, np.int64(1), units, work, metrics, first)
    stop_gimbal(hit, X, units, work)
    note(t + low, line_momentum(X, units), hit, outcome.STOP, first)
    return low


@part
def release_stops(X: Array, t: float, units: Array, work: Work) -> bool:
    """Let go of each held gimbal that the law would turn away from its stop; return whether one is still held.

    Also puts the commands: what the law asks, but standing still for a gimbal on its stop.
    """
    numbers, held = work.numbers, work.flags[HELD]
    any_held = False
    for i in range(units.shape[0]):
        numbers[COMMANDS, i] = numbers[ASKED, i] if held[i] == 0 else 0.0
    for i in range(units.shape[0]):
        if held[i] == 0:
            continue
        for j in range(units.shape[1]):
            work.live[i, j] = units[i, j]
        numbers[COMMANDS, i] = numbers[ASKED, i]
        rates_now(X, t, work)
        if numbers[RATE, 3 + 2 * i] * held[i] < 0.0:
            held[i] = 0
        else:
            any_held = True
            lock(i, work.live)
            numbers[COMMANDS, i] = 0.0
    return any_held


@part
def rates_now(X: Array, t: float, work: Work) -> float:
    """Put the rates at t into their row; return the disturbance in N·m."""
    numbers = work.numbers
    torque = disturbance_at(t, work.active, work.flags[AT, TORQUES_ON])
    if work.flags[AT, VARYING] == 1:
        vary(t, work.active, work.flags[AT, TORQUES_ON], work.base, work.body)
    on_trunk = torque - put_on_legs(t, work.active, work.flags[AT, TORQUES_ON], work.live, numbers[COMMANDS])
    rates(X, on_trunk, numbers[COMMANDS], work.body, work.live, work.flags[MET], numbers[INPUTS], numbers[SLOPES],
          numbers[RATE])
    return float(torque)


@part
def lock(i: int, live: Array) -> None:
    """Make unit i stand still whatever pushes it."""
    live[i, KIND] = GIMBAL_SERVO
    live[i, DRIVE_TORQUE] = np.inf
    live[i, RATE_LAG] = 1.0


@part
def stop_gimbal(i: int, X: Array, units: Array, work: Work) -> None:
    """Unit i met its stop: its rate drops to zero, shared with the body by the mass matrix; it is held there.

    The stop's impulse is internal to the machine: the jumps of lean rate, wheels' and legs' rates and gimbal rate have
    the ratios in which the gimbal's own torque changes the accelerations.
    """
    side = 1 if X[2 + 2 * i] > 0.0 else -1
    kind, change = work.live[i, KIND], work.numbers[RATE]
    work.live[i, KIND] = GIMBAL_TORQUE
    jump(i, X, work.body, work.live, work.numbers[INPUTS], work.numbers[PROBE], change)
    work.live[i, KIND] = kind
    impulse = -X[3 + 2 * i] / change[3 + 2 * i]
    X[1] += impulse * change[1]
    for j in range(units.shape[0]):
        if units[j, KIND] == WHEEL:
            X[2 + 2 * j] += impulse * change[2 + 2 * j]
    X[2 + 2 * i] = side * units[i, ANGLE_STOP]
    X[3 + 2 * i] = 0.0
    work.flags[HELD, i] = side
    lock(i, work.live)
