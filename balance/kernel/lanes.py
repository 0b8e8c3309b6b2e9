"""64 trials side by side: the same sampled law, latency and disturbances as `run.run_trial`, in vectors.

Per lane: the machine, the start, the size of what disturbs it, the seed of its noise. Common to a block: the law, the
sensor, when something happens. A lane's numbers depend on nothing in its neighbours, so a batch may be cut anywhere.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import lane_rows as at
from balance.kernel import outcome
from balance.kernel.bundles import Events, LawArrays
from balance.kernel.compiled import fused, lanes_entry
from balance.kernel.integrate import disturbance_at
from balance.kernel.lane_law import accelerate, sense_lanes, share_lanes, span, tick_lanes
from balance.kernel.lane_rows import LANES
from balance.kernel.lane_wheels import march_one, march_two, momentum_of, motor_in
from balance.kernel.sensing import TILT

Array = NDArray[np.float64]

TINY = 1e-9
"""Share of a sample time within which two instants are the same, as in `run`."""


@lanes_entry
def run_block(X: Array, wheels: int, law: LawArrays, events: Events, active: Array, history: Array, earlier: int,
              settling: tuple[float, float, float, float]) -> None:
    """Run one block of trials; X: (rows · LANES,), filled with machines and starts (`lane_rows`), answers included.

    active: (s, TORQUE_SIZE) for the torques on at the time; history: ((samples + 1) · LANES,) leans at the samples and at
    the end; earlier: the sample whose momentum is kept; settling: see `settle`.
    """
    samples = history.size // LANES - 1
    at_jump, on, taken = 0, 0, 0
    tilts = reads_tilt(law)
    for sample in range(samples):
        start = sample * law.sample_time
        keep(X, history, sample)
        if sample == earlier:
            remember(X, wheels, at.EARLIER)
        if tilts:
            accelerate(X, wheels, disturbance_at(start, active, on))
        sense_lanes(X, law, events.sensor, sample)
        tick_lanes(X, law)
        advance_queue(X, law)
        share_lanes(X, law)
        at_jump, on = run_period(X, start, sample, wheels, law, events, active, at_jump, on)
        taken = sample + 1
        if not any_alive(X):
            break
    keep(X, history, taken)
    finish_lanes(X, wheels, events.lasts)
    settle(X, history, taken, law.sample_time, settling)


@fused
def reads_tilt(law: LawArrays) -> bool:
    """Return whether the law measures the accelerometer's tilt."""
    tilts = False
    for j in range(law.places.size):
        tilts = tilts or law.places[j] == TILT
    return tilts


@fused
def keep(X: Array, history: Array, sample: int) -> None:
    """Put the leans of all lanes into their row of the history."""
    row = history[sample * LANES:(sample + 1) * LANES]
    for lane in range(LANES):
        row[lane] = X[at.THETA * LANES + lane] - X[at.BALANCED * LANES + lane]


@fused
def remember(X: Array, wheels: int, row: int) -> None:
    """Put the momentum each lane stores about the line into a row."""
    out, two = X[span(row)], 1.0 if wheels == 2 else 0.0
    for lane in range(LANES):
        rate = X[at.RATE * LANES + lane]
        stored = momentum_of(rate, X[at.SPEED * LANES + lane], motor_in(X, at.MOTOR, lane))
        other = momentum_of(rate, X[(at.SPEED + at.WHEEL_STATES) * LANES + lane],
                            motor_in(X, at.MOTOR + at.MOTOR_SIZE, lane))
        out[lane] = stored + two * other


@fused
def any_alive(X: Array) -> bool:
    """Return whether any lane's trial still runs."""
    total = 0.0
    for lane in range(LANES):
        total += X[at.ALIVE * LANES + lane]
    return total > 0.0


@fused
def slots(law: LawArrays) -> int:
    """Return how many commands are on their way at most, the one that acts included."""
    return int(np.floor(law.latency / law.sample_time + 1e-9)) + 2


@fused
def advance_queue(X: Array, law: LawArrays) -> None:
    """Make room for the newest command."""
    for slot in range(slots(law) - 1, 0, -1):
        for k in range(law.allotment.size):
            older, newer = X[span(at.QUEUE + 2 * slot + k)], X[span(at.QUEUE + 2 * slot - 2 + k)]
            for lane in range(LANES):
                older[lane] = newer[lane]


@fused
def command(X: Array, law: LawArrays, slot: int) -> None:
    """Let the command in this slot act."""
    for k in range(law.allotment.size):
        acts, queued = X[span(at.ASKED + k)], X[span(at.QUEUE + 2 * slot + k)]
        for lane in range(LANES):
            acts[lane] = queued[lane]


@fused
def run_period(X: Array, start: float, sample: int, wheels: int, law: LawArrays, events: Events, active: Array,
               at_jump: int, on: int) -> tuple[int, int]:
    """Move all lanes from one sample to the next, piece by piece between sudden changes, as `run.run_period`."""
    tiny, stop = TINY * law.sample_time, min(start + law.sample_time, events.lasts)
    last = slots(law) - 1
    due = (sample - (last - 1)) * law.sample_time + law.latency      # when the last but one of the queue takes over
    for lane in range(LANES):
        X[at.CLIPPED * LANES + lane] *= X[at.ALIVE * LANES + lane]
        X[at.SATURATED_BEFORE * LANES + lane] = X[at.SATURATED * LANES + lane]
    t = start
    while t < stop - tiny:
        until = min(stop, due if due > t + tiny else np.inf)
        command(X, law, last if due > t + tiny else last - 1)
        at_jump, on = disturb(X, t + tiny, wheels, events, active, at_jump)
        for k in range(events.breaks.size):
            if events.breaks[k] > t + tiny:
                until = min(until, events.breaks[k])
                break
        steps = max(int(np.ceil((until - t) / events.longest - 1e-9)), 1)
        march_lanes(X, t, (until - t) / steps, steps, wheels, active, on)
        t = until
    for lane in range(LANES):
        here = X[at.END_TIME * LANES + lane] if X[at.ALIVE * LANES + lane] == 0.0 else stop
        whole = X[at.SATURATED_BEFORE * LANES + lane] + here - start
        was = X[at.SATURATED * LANES + lane]
        X[at.SATURATED * LANES + lane] = whole if X[at.CLIPPED * LANES + lane] > 0.0 else was
    return at_jump, on


@fused
def march_lanes(X: Array, begin: float, h: float, steps: int, wheels: int, active: Array, on: int) -> None:
    """Make `steps` sub-steps of h from `begin`."""
    for step in range(steps):
        t = begin + step * h
        torque = (disturbance_at(t, active, on), disturbance_at(t + 0.5 * h, active, on), disturbance_at(t + h, active, on))
        if wheels == 1:
            march_one(X, t, h, torque)
        else:
            march_two(X, t, h, torque)


@fused
def disturb(X: Array, t: float, wheels: int, events: Events, active: Array, at_jump: int) -> tuple[int, int]:
    """Let the blows due by t act, gather the torques that act then; return (next blow, how many act)."""
    while at_jump < events.jumps.shape[0] and events.jumps[at_jump, outcome.AT] <= t:
        blow(X, events.jumps[at_jump, outcome.KICK], wheels)
        at_jump += 1
    on = 0
    for i in range(events.torques.shape[0]):
        if events.torques[i, outcome.START] <= t < events.torques[i, outcome.END]:
            for j in range(outcome.TORQUE_SIZE):
                active[on, j] = events.torques[i, j]
            on += 1
    return at_jump, on


@fused
def blow(X: Array, impulse: float, wheels: int) -> None:
    """Let an impulse in N·m·s about the line act at once, scaled per lane: rates jump by M⁻¹ times it."""
    two = 1.0 if wheels == 2 else 0.0
    for lane in range(LANES):
        jump = impulse * X[at.SCALE * LANES + lane] * X[at.PER_MASS * LANES + lane] * X[at.ALIVE * LANES + lane]
        X[at.RATE * LANES + lane] += jump
        X[at.SPEED * LANES + lane] -= X[(at.MOTOR + at.SHARE) * LANES + lane] * jump
        other = X[(at.MOTOR + at.MOTOR_SIZE + at.SHARE) * LANES + lane]
        X[(at.SPEED + at.WHEEL_STATES) * LANES + lane] -= two * other * jump


@fused
def finish_lanes(X: Array, wheels: int, lasts: float) -> None:
    """Put the end state and the last peaks."""
    remember(X, wheels, at.END_MOMENTUM)
    for lane in range(LANES):
        lean, stored = X[at.THETA * LANES + lane] - X[at.BALANCED * LANES + lane], X[at.END_MOMENTUM * LANES + lane]
        X[at.END_LEAN * LANES + lane] = lean
        X[at.PEAK_LEAN * LANES + lane] = max(X[at.PEAK_LEAN * LANES + lane], abs(lean))
        X[at.PEAK_MOMENTUM * LANES + lane] = max(X[at.PEAK_MOMENTUM * LANES + lane], abs(stored))
        was = X[at.END_TIME * LANES + lane]
        X[at.END_TIME * LANES + lane] = was if X[at.ALIVE * LANES + lane] == 0.0 else lasts


@fused
def settle(X: Array, history: Array, taken: int, sample_time: float, settling: tuple[float, float, float, float]) -> None:
    """Put when each lean has come to its target to stay, counted from `quiet`, in s; inf: never.

    settling: (quiet s, share of the peak |lean| that is the band, the band's least in rad, s it must have stayed): the rule
    of a single trial's story, with the lean known at the samples and at the end.
    """
    quiet, share, least, stays = settling
    for lane in range(LANES):
        ran, lasts = X[at.END * LANES + lane] == 0.0, X[at.END_TIME * LANES + lane]
        peak = 0.0
        for k in range(taken + 1):
            peak = max(peak, abs(history[k * LANES + lane]))
        band, target = max(share * peak, least), X[at.TARGET * LANES + lane]
        last = taken
        while last >= 0 and abs(history[last * LANES + lane] - target) <= band:
            last -= 1
        if last >= 0 and min(last * sample_time, lasts) < quiet - 1e-12:
            last = -1
        since = min((last + 1) * sample_time, lasts)
        stayed = ran and last < taken and lasts - max(since if last >= 0 else quiet, quiet) >= stays
        X[at.SETTLED * LANES + lane] = (max(since - quiet, 0.0) if last >= 0 else 0.0) if stayed else np.inf
