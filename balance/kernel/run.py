"""One trial: the sampled law, its latency, what disturbs the machine, the motion between, what is measured.

Everything that changes suddenly (a sample, a command that takes effect, a push, a step, the release) stands on the
end of a sub-step, so that Runge-Kutta only ever sees smooth motion. At one and the same instant the order is:
sample, command switch, disturbance: a push at a sampling instant is seen by the next sample (the worse case).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import (
    ASKED,
    AT,
    CLIPPED,
    INPUTS,
    LINE,
    MEASURED,
    MEMORY,
    NEXT_BREAK,
    NEXT_CHANGE,
    NEXT_JUMP,
    PROBE,
    RATE,
    SERVO_ASKED,
    SERVO_SENT,
    SPARE,
    TORQUES_ON,
    VARYING,
    Events,
    LawArrays,
    Output,
    Work,
)
from balance.kernel.compiled import entry, part
from balance.kernel.gauge import available, line_momentum, line_torque, note
from balance.kernel.integrate import jump
from balance.kernel.layout import (
    BALANCED,
    BUS_VOLTAGE,
    DEAD_BAND,
    GIMBAL_SERVO,
    GRAVITY,
    HEIGHT,
    HINGE,
    KIND,
    MASS,
    OFFSET,
    RATE_LIMIT,
    RESOLUTION,
    SOURCE_AMPS,
    SOURCE_OHMS,
    SOURCE_POWER,
    STIFF_COS,
    WHEEL,
)
from balance.kernel.legs import hinge_moves, legs_mass, legs_row, on_legs_of
from balance.kernel.sensing import digitised, out_of_range, scrambled
from balance.kernel.stops import rates_now, release_stops, run_piece
from balance.kernel.supply import bus_row, most_power
from balance.kernel.tick import law_tick, measure, reads_sensor, servo_steps, share_out

Array = NDArray[np.float64]
Flags = NDArray[np.int64]

TINY = 1e-9
"""Share of a sample time within which two instants are the same."""


@entry
def run_trial(X: Array, units: Array, law: LawArrays, events: Events, work: Work, output: Output) -> int:
    """Run one trial from X (changed to the end state), fill `output`, return how it ended (`outcome`).

    X: (2 + 2 units,), units: `layout`, not changed; `work` fresh from `bundles.fresh_work`, which holds the body.
    """
    end, taken, until = outcome.RAN, 0, 0.0
    for sample in range(output.history.shape[0] - 1):
        start = sample * law.sample_time
        until = min(start + law.sample_time, events.lasts)
        tick(X, start, sample, units, law, events, work, output)
        end = run_period(X, start, until, sample, law.sample_time, units, events, work, output)
        taken += 1
        if end != outcome.RAN:
            break
    finish(X, taken, units, work, output)
    return end


@part
def tick(X: Array, start: float, sample: int, units: Array, law: LawArrays, events: Events, work: Work,
         output: Output) -> None:
    """Take a sample and compute the command that acts `latency` later; until the release it is held at zero."""
    if not sense(X, start, sample, units, law, events, work, output):
        return
    numbers = work.numbers
    free = is_free(start, law.sample_time, events)
    most = law.output_limit if free else 0.0
    A, B = (law.A, law.B) if free else (law.A_held, law.B_held)
    v, limited = law_tick(numbers[MEMORY], numbers[MEASURED], A, B, law.E, law.C, law.D, most, numbers[SPARE])
    short = share_out(limited, numbers[MEASURED], law.allotment, law.levelling, law.input_limits, law.line_share,
                      work.queue[0])
    numbers[LINE, 0] = limited
    send(start, sample, short or abs(v) > most * (1.0 + 1e-9), units, law, events, work, output)


@part
def is_free(start: float, sample_time: float, events: Events) -> bool:
    """Return whether the machine is no longer held."""
    return bool(start >= events.release - TINY * sample_time)


@part
def sense(X: Array, start: float, sample: int, units: Array, law: LawArrays, events: Events, work: Work,
          output: Output) -> bool:
    """Put the measurements into their row and make room for a command; return whether the sample was taken at all."""
    numbers, queue = work.numbers, work.queue
    output.history[sample, 0] = X[0] - work.body[BALANCED]
    output.history[sample, 1] = line_momentum(X, units)
    work.flags[AT, CLIPPED] = 0
    if missed(start, sample, events):
        return False
    for i in range(queue.shape[0] - 1, 0, -1):
        for j in range(queue.shape[1]):
            queue[i, j] = queue[i - 1, j]
    queue[0, queue.shape[1] - 1] = start + law.latency + lateness(start, sample, events)
    acceleration, hinge = 0.0, (0.0, 0.0)
    if is_free(start, law.sample_time, events) and reads_sensor(law.places):
        release_stops(X, start, units, work)
        rates_now(X, start, work)
        acceleration = numbers[RATE, 1]
        hinge = hinge_moves(X, numbers[RATE], units)[2:]
        if out_of_range(X, acceleration, hinge, work.body, events.sensor):
            note(start, output.history[sample, 1], units.shape[0], outcome.SENSOR, output.first)
    measure(X, acceleration, hinge, work.body, law.places, events.sensor, events.seed, sample, numbers[MEASURED])
    for j in range(law.resting.size):
        numbers[MEASURED, j] -= law.resting[j]
    return True


@part
def send(start: float, sample: int, clipped: bool, units: Array, law: LawArrays, events: Events, work: Work,
         output: Output) -> None:
    """Round the command that stands in the newest row as the actuators' inputs do; note that it was clipped."""
    numbers, queue, free = work.numbers, work.queue, is_free(start, law.sample_time, events)
    for j in range(law.allotment.size):
        asked = digitised(queue[0, j], law.input_steps[j], np.inf) if free else 0.0
        if free and units[j, KIND] == GIMBAL_SERVO and units[j, RESOLUTION] + units[j, DEAD_BAND] > 0.0:
            asked, numbers[SERVO_ASKED, j], numbers[SERVO_SENT, j] = servo_steps(
                asked, law.sample_time, numbers[SERVO_ASKED, j], numbers[SERVO_SENT, j], units[j, RESOLUTION],
                units[j, DEAD_BAND], units[j, RATE_LIMIT])
        queue[0, j] = asked
    if free and clipped:
        work.flags[AT, CLIPPED] = 1
        note(start, output.history[sample, 1], units.shape[0], outcome.OUTPUT, output.first)


@part
def run_period(X: Array, start: float, stop: float, sample: int, sample_time: float, units: Array,
               events: Events, work: Work, output: Output) -> int:
    """Integrate from one sample to the next, piece by piece between sudden changes; return how it ended."""
    tiny = TINY * sample_time
    saturated = output.metrics[outcome.SATURATED]
    t, end = start, outcome.RAN
    while t < stop - tiny and end == outcome.RAN:
        until = min(stop, newest_due(t + tiny, work))
        change(X, t, tiny, units, events, work)
        if work.flags[AT, NEXT_BREAK] < events.breaks.size:
            until = min(until, events.breaks[work.flags[AT, NEXT_BREAK]])
        if t == start and output.trace.shape[0] > 0:
            write(X, t, units, work, output.trace[sample])
        if t >= events.release - tiny:
            end, t = run_piece(X, t, until, events.longest, units, work, output)
        if end == outcome.RAN:
            t = until
    if work.flags[AT, CLIPPED] == 1:
        output.metrics[outcome.SATURATED] = saturated + t - start
    work.numbers[LINE, 1] = t
    return end


@part
def newest_due(t: float, work: Work) -> float:
    """Put what the newest command that acts at t asks of each unit; return when the next one takes over, in s.

    A command that comes due after a newer one has acted is never used.
    """
    queue, next_one = work.queue, np.inf
    last = queue.shape[1] - 1
    for i in range(queue.shape[0]):
        if queue[i, last] <= t or i == queue.shape[0] - 1:
            for j in range(last):
                work.numbers[ASKED, j] = queue[i, j]
            break
        next_one = min(next_one, queue[i, last])
    return next_one


@part
def missed(start: float, sample: int, events: Events) -> bool:
    """Return whether the sample is one that the controller does not take."""
    for i in range(events.spells.shape[0]):
        if events.spells[i, outcome.WHAT] == outcome.MISSED and in_spell(start, events.spells[i]):
            return bool(scrambled(events.seed + 1, 2 * sample) < events.spells[i, outcome.VALUE])
    return False


@part
def lateness(start: float, sample: int, events: Events) -> float:
    """Return by how much in s the command of this sample is later than the latency."""
    most = 0.0
    for i in range(events.spells.shape[0]):
        if events.spells[i, outcome.WHAT] == outcome.LATE and in_spell(start, events.spells[i]):
            most = max(most, events.spells[i, outcome.VALUE])
    return float(most * scrambled(events.seed + 1, 2 * sample + 1)) if most > 0.0 else 0.0


@part
def in_spell(t: float, spell: Array) -> bool:
    """Return whether a spell is on, to a ten-thousandth of a millisecond."""
    return bool(spell[outcome.START] <= t + 1e-7 < spell[outcome.END])


@part
def change(X: Array, t: float, tiny: float, units: Array, events: Events, work: Work) -> None:
    """Apply what changes suddenly at t: release, kicks and shifts due, and which torques act from now on."""
    at = work.flags[AT]
    legs = legs_row(units)
    if events.release > 0.0 and abs(t - events.release) <= tiny:
        X[1] = events.release_rate
        if legs >= 0:
            X[2 + 2 * legs] = events.release_rate
    while at[NEXT_JUMP] < events.jumps.shape[0] and events.jumps[at[NEXT_JUMP], outcome.AT] <= t + tiny:
        blow = events.jumps[at[NEXT_JUMP], outcome.KICK]
        on_legs = on_legs_of(events.jumps[at[NEXT_JUMP], outcome.HEIGHT], units) * blow
        kick(X, blow - on_legs, np.int64(-1), work)
        kick(X, on_legs, np.int64(legs), work)
        shift = events.jumps[at[NEXT_JUMP], outcome.SHIFT]
        shift_centre(shift, work.body)
        shift_centre(shift, work.base)
        at[NEXT_JUMP] += 1
    while at[NEXT_CHANGE] < events.changes.shape[0] and events.changes[at[NEXT_CHANGE], outcome.AT] <= t + tiny:
        change_body(X, events.changes[at[NEXT_CHANGE]], work)
        at[NEXT_CHANGE] += 1
    while at[NEXT_BREAK] < events.breaks.size and events.breaks[at[NEXT_BREAK]] <= t + tiny:
        at[NEXT_BREAK] += 1
    switch_torques(t + tiny, events.torques, work.active, at)
    weaken_supply(t + tiny, units, events, work)


@part
def shift_centre(shift: float, body: Array) -> None:
    """Move the centre of mass by `shift` m along w."""
    body[OFFSET] += shift
    body[STIFF_COS] += body[MASS] * body[GRAVITY] * shift


@part
def switch_torques(t: float, torques: Array, active: Array, at: Flags) -> None:
    """Put the torques that act at t into the first rows of `active`; note how many, and whether one changes the body."""
    on = 0
    at[VARYING] = 0
    for i in range(torques.shape[0]):
        if torques[i, outcome.START] <= t < torques[i, outcome.END]:
            for j in range(outcome.TORQUE_SIZE):
                active[on, j] = torques[i, j]
                if outcome.OF_INERTIA <= j < outcome.LEVER and torques[i, j] != 0.0:
                    at[VARYING] = 1
            on += 1
    at[TORQUES_ON] = on


@part
def weaken_supply(t: float, units: Array, events: Events, work: Work) -> None:
    """Let the supply's own voltage fall to what is left of it at t."""
    bus = bus_row(units)
    if bus < 0:
        return
    left = 1.0
    for i in range(events.spells.shape[0]):
        spell = events.spells[i]
        if spell[outcome.WHAT] == outcome.SUPPLY_LEFT and spell[outcome.START] <= t < spell[outcome.END]:
            left *= spell[outcome.VALUE]
    volts = left * units[bus, BUS_VOLTAGE]
    work.live[bus, BUS_VOLTAGE] = volts
    work.live[bus, SOURCE_POWER] = most_power(volts, units[bus, SOURCE_OHMS], units[bus, SOURCE_AMPS])


@part
def change_body(X: Array, row: Array, work: Work) -> None:
    """Add what changes of the body; what comes at rest takes its share of the momentum about the line.

    (J + ΔJ) θ̇⁺ = J θ̇⁻ is the kick −ΔJ θ̇⁻ on the machine as it is from now on; with legs that give, ΔM times both rates.
    """
    legs = legs_row(work.live)
    before = legs_share(X, legs, work)
    for j in range(work.body.size):
        work.body[j] += row[outcome.CHANGED + j]
        work.base[j] += row[outcome.CHANGED + j]
    comes = row[outcome.AT_REST]
    if comes == 0.0 or legs < 0:
        kick(X, -comes * X[1], np.int64(-1), work)
        return
    after = legs_share(X, legs, work)
    psi, chi = X[1], X[2 + 2 * legs]
    trunk = -(comes + after[0] - before[0]) * psi - (after[1] - before[1]) * chi
    kick(X, trunk, np.int64(-1), work)
    kick(X, -(after[1] - before[1]) * psi - (after[2] - before[2]) * chi, np.int64(legs), work)


@part
def legs_share(X: Array, legs: int, work: Work) -> tuple[float, float, float]:
    """Return what legs that give make of the mass matrix in kg·m² (`legs.legs_mass`); zeros for stiff ones."""
    if legs < 0:
        return 0.0, 0.0, 0.0
    body = work.body
    added, coupling, own = legs_mass(X[0] - X[3 + 2 * legs], body[MASS], body[HEIGHT], body[OFFSET], work.live[legs, HINGE])
    return added, coupling, own


@part
def kick(X: Array, impulse: float, row: int, work: Work) -> None:
    """Let an impulse in N·m·s act at once, on the trunk (row −1) or in a row of the units: rates jump by M⁻¹ times it."""
    if impulse == 0.0:
        return
    step = work.numbers[RATE]
    jump(row, X, work.body, work.live, work.numbers[INPUTS], work.numbers[PROBE], step)
    X[1] += impulse * step[1]
    for i in range(work.live.shape[0]):
        place = 2 + 2 * i if work.live[i, KIND] == WHEEL else 3 + 2 * i
        X[place] += impulse * step[place]


@part
def write(X: Array, t: float, units: Array, work: Work, out: Array) -> None:
    """Record one sample in the row `out`."""
    release_stops(X, t, units, work)
    out[outcome.DISTURBANCE] = rates_now(X, t, work)
    out[outcome.TIME] = t
    out[outcome.LEAN] = X[0] - work.body[BALANCED]
    out[outcome.LEAN_RATE] = X[1]
    out[outcome.LINE_TORQUE] = line_torque(X, work.numbers[RATE], units)
    out[outcome.LINE_TORQUE_LIMIT] = available(X, units, out[outcome.LINE_TORQUE])
    out[outcome.LINE_MOMENTUM] = line_momentum(X, units)
    out[outcome.COMMAND] = work.numbers[LINE, 0]
    for i in range(2, X.size):
        out[outcome.TRACE_SIZE + i - 2] = X[i]


@part
def finish(X: Array, sample: int, units: Array, work: Work, output: Output) -> None:
    """Record the end state and the last peaks."""
    metrics, lean, stored = output.metrics, X[0] - work.body[BALANCED], line_momentum(X, units)
    output.history[sample, 0] = lean
    output.history[sample, 1] = stored
    if output.trace.shape[0] > 0:
        write(X, work.numbers[LINE, 1], units, work, output.trace[sample])
    metrics[outcome.PEAK_LEAN] = max(metrics[outcome.PEAK_LEAN], abs(lean))
    metrics[outcome.PEAK_MOMENTUM] = max(metrics[outcome.PEAK_MOMENTUM], abs(stored))
    metrics[outcome.END_TIME] = work.numbers[LINE, 1]
    metrics[outcome.END_LEAN] = lean
    metrics[outcome.END_MOMENTUM] = stored
    metrics[outcome.SAMPLES] = sample + 1
