"""One trial: the sampled law, its latency, what disturbs the machine, the motion between, what is measured.

Everything that changes suddenly (a sample, a command that takes effect, a push, a step, the release) stands on the
end of a sub-step, so that Runge-Kutta only ever sees smooth motion. At one and the same instant the order is:
sample, command switch, disturbance: a push at a sampling instant is seen by the next sample (the worse case).
"""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import Events, LawArrays, Output, Work
from balance.kernel.gauge import available, line_momentum, line_torque, note
from balance.kernel.integrate import disturbance_at, jump, rates
from balance.kernel.layout import BALANCED, GRAVITY, KIND, MASS, OFFSET, STIFF_COS, WHEEL
from balance.kernel.stops import release_stops, run_piece
from balance.kernel.tick import law_tick, measure, share_out

Array = NDArray[np.float64]

TINY = 1e-9
"""Share of a sample time within which two instants are the same."""


@njit(cache=True, error_model="numpy", nogil=True)
def run_trial(X: Array, body: Array, units: Array, law: LawArrays, events: Events, output: Output) -> int:
    """Run one trial from X (changed to the end state), fill `output`, return how it ended (`outcome`).

    X: (2 + 2 units,), body and units: `layout`; they are not changed. The bundles are described in `bundles`.
    """
    work = make_work(body, units, law, events)
    end, taken = outcome.RAN, 0
    for sample in range(output.history.shape[0] - 1):
        start = sample * law.sample_time
        until = min(start + law.sample_time, events.lasts)
        tick(X, start, sample, units, law, events, work, output)
        end = run_period(X, start, until, sample, units, law, events, work, output)
        taken += 1
        if end != outcome.RAN:
            break
    finish(X, taken, units, work, output)
    return end


@njit(cache=True, error_model="numpy")
def make_work(body: Array, units: Array, law: LawArrays, events: Events) -> Work:
    """Return fresh working arrays of one trial."""
    n, count, depth = 2 + 2 * units.shape[0], units.shape[0], law.A.shape[0]
    whole = int(np.floor(law.latency / law.sample_time + TINY))
    return Work(body.copy(), units.copy(), np.zeros(count, np.int64), np.zeros(count, np.int64), np.zeros(n),
                np.zeros(n), np.zeros(n), np.zeros(n), np.zeros(count), np.zeros(count), np.zeros(count),
                np.zeros(count), np.zeros((events.torques.shape[0], outcome.TORQUE_SIZE)), np.zeros(4, np.int64),
                np.zeros(depth), np.zeros(depth), np.zeros(law.D.size), np.zeros((whole + 2, count)), np.zeros(2),
                np.zeros(outcome.METRIC_SIZE), np.zeros((count + 1, outcome.LIMITS, 2)))


@njit(cache=True, error_model="numpy")
def tick(X: Array, start: float, sample: int, units: Array, law: LawArrays, events: Events, work: Work,
         output: Output) -> None:
    """Take a sample and compute the command that acts `latency` later; until the release it is held at zero."""
    for i in range(work.queue.shape[0] - 1, 0, -1):
        work.queue[i] = work.queue[i - 1]
    measure(X, work.body, law.places, work.y)
    stored = line_momentum(X, units)
    output.history[sample, 0] = X[0] - work.body[BALANCED]
    output.history[sample, 1] = stored
    if start < events.release - TINY * law.sample_time:
        law_tick(work.x, work.y, law.A, law.B, law.E, law.C, law.D, 0.0, work.spare)
        work.queue[0] = 0.0
        work.line[0] = 0.0
        return
    v, work.line[0] = law_tick(work.x, work.y, law.A, law.B, law.E, law.C, law.D, law.output_limit,
                               work.spare)
    limited = share_out(work.line[0], work.y, law.allotment, law.levelling, law.input_limits, law.line_share,
                        work.queue[0])
    if abs(v) > law.output_limit * (1.0 + 1e-9):
        limited = True
    work.at[3] = 1 if limited else 0
    if limited:
        note(start, stored, units.shape[0], outcome.OUTPUT, output.first)


@njit(cache=True, error_model="numpy")
def run_period(X: Array, start: float, stop: float, sample: int, units: Array, law: LawArrays, events: Events,
               work: Work, output: Output) -> int:
    """Integrate from one sample to the next, piece by piece between sudden changes; return how it ended."""
    tiny = TINY * law.sample_time
    whole = work.queue.shape[0] - 2
    part = law.latency - whole * law.sample_time
    saturated = output.metrics[outcome.SATURATED]
    t, end = start, outcome.RAN
    while t < stop - tiny and end == outcome.RAN:
        late = t >= start + part - tiny
        for i in range(units.shape[0]):
            work.asked[i] = work.queue[whole if late else whole + 1, i]
        change(X, t, tiny, events, work)
        until = stop if late else min(stop, start + part)
        if work.at[1] < events.breaks.size:
            until = min(until, events.breaks[work.at[1]])
        if t == start and output.trace.shape[0] > 0:
            write(X, t, sample, units, work, output)
        if t >= events.release - tiny:
            end, t = run_piece(X, t, until, events.longest, units, work, output)
        if end == outcome.RAN:
            t = until
    if work.at[3] == 1:
        output.metrics[outcome.SATURATED] = saturated + t - start
    work.line[1] = t
    return end


@njit(cache=True, error_model="numpy")
def change(X: Array, t: float, tiny: float, events: Events, work: Work) -> None:
    """Apply what changes suddenly at t: release, kicks and shifts due, and which torques act from now on.

    `work.at`: next jump, next break, number of active torques.
    """
    if events.release > 0.0 and abs(t - events.release) <= tiny:
        X[1] = events.release_rate
    while work.at[0] < events.jumps.shape[0] and events.jumps[work.at[0], outcome.AT] <= t + tiny:
        row = events.jumps[work.at[0]]
        if row[outcome.KICK] != 0.0:
            jump(np.int64(-1), X, work.body, work.live, work.inputs, work.probe, work.rate)
            X[1] += row[outcome.KICK] * work.rate[1]
            for i in range(work.inputs.size):
                place = 2 + 2 * i if work.live[i, KIND] == WHEEL else 3 + 2 * i
                X[place] += row[outcome.KICK] * work.rate[place]
        work.body[OFFSET] += row[outcome.SHIFT]
        work.body[STIFF_COS] += work.body[MASS] * work.body[GRAVITY] * row[outcome.SHIFT]
        work.at[0] += 1
    while work.at[1] < events.breaks.size and events.breaks[work.at[1]] <= t + tiny:
        work.at[1] += 1
    on = 0
    for i in range(events.torques.shape[0]):
        if events.torques[i, outcome.START] <= t + tiny and events.torques[i, outcome.END] > t + tiny:
            work.active[on] = events.torques[i]
            on += 1
    work.at[2] = on


@njit(cache=True, error_model="numpy")
def write(X: Array, t: float, row: int, units: Array, work: Work, output: Output) -> None:
    """Record one sample."""
    release_stops(X, t, units, work)
    out = output.trace[row]
    out[outcome.DISTURBANCE] = disturbance_at(t, work.active, work.at[2])
    rates(X, out[outcome.DISTURBANCE], work.commands, work.body, work.live, work.met, work.inputs, work.slopes,
          work.rate)
    out[outcome.TIME] = t
    out[outcome.LEAN] = X[0] - work.body[BALANCED]
    out[outcome.LEAN_RATE] = X[1]
    out[outcome.LINE_TORQUE] = line_torque(X, work.rate, units)
    out[outcome.LINE_TORQUE_LIMIT] = available(X, units, out[outcome.LINE_TORQUE])
    out[outcome.LINE_MOMENTUM] = line_momentum(X, units)
    out[outcome.COMMAND] = work.line[0]
    for i in range(2, X.size):
        out[outcome.TRACE_SIZE + i - 2] = X[i]


@njit(cache=True, error_model="numpy")
def finish(X: Array, sample: int, units: Array, work: Work, output: Output) -> None:
    """Record the end state and the last peaks."""
    t = work.line[1]
    output.history[sample, 0] = X[0] - work.body[BALANCED]
    output.history[sample, 1] = line_momentum(X, units)
    if output.trace.shape[0] > 0:
        write(X, t, sample, units, work, output)
    output.metrics[outcome.PEAK_LEAN] = max(output.metrics[outcome.PEAK_LEAN], abs(output.history[sample, 0]))
    output.metrics[outcome.END_TIME] = t
    output.metrics[outcome.END_LEAN] = output.history[sample, 0]
    output.metrics[outcome.END_MOMENTUM] = output.history[sample, 1]
    output.metrics[outcome.SAMPLES] = sample + 1
