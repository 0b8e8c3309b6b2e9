"""How one sub-step is made: rates of the whole machine, and classic Runge-Kutta of order four.

The arrays are handed in one by one: compiled code takes a bundle apart again at every call, and these are hot. So is
`forceinline` here and in what is called from here: a call between compiled functions counts references of every array.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.compiled import entry, inlined, part
from balance.kernel.drive import LIMITER_GAIN, unit_input
from balance.kernel.equations import derivative
from balance.kernel.gauge import watch, watch_bus, watch_feet
from balance.kernel.layout import (
    ANGLE_STOP,
    BALANCED,
    BODY_DRAG,
    CURRENT_LAG,
    DRIVE_TORQUE,
    FELL,
    GIMBAL_SERVO,
    GRAVITY,
    HEIGHT,
    HINGE_MODE,
    INERTIA,
    KIND,
    LANDS_OUTWARD,
    LEGS,
    MASS,
    MOTOR,
    OFFSET,
    OWN_INERTIA,
    PARTNER,
    RATE_LAG,
    ROLE,
    STIFF_COS,
    STIFF_SIN,
    TAKES_BACK,
    TOOTH_STIFFNESS,
    TOOTHED,
    TORQUE_PER_AMP,
    TOUCH_DOWN,
    WHEEL,
)
from balance.kernel.legs import legs_row, on_legs_of
from balance.kernel.supply import CLAMP_GAIN, bus_row, put_voltage, share_bus
from balance.kernel.teeth import press_teeth

Array = NDArray[np.float64]
Flags = NDArray[np.int64]

LONGEST_STEP = 0.5e-3
"""s: sub-step where no lag asks for a shorter one."""

OF_LAG = 0.25
"""Share of a lag's time constant: keeps lean within 5e-9 rad of a 1e-12 integration with every limit met (measured)."""


@part
def flank_frequency(units: Array, i: int) -> float:
    """Return how fast toothed wheel i and its motor swing on touching flanks in rad/s."""
    motor = int(units[i, PARTNER])
    return float(np.sqrt(units[i, TOOTH_STIFFNESS] * (1.0 / units[i, OWN_INERTIA] + 1.0 / units[motor, OWN_INERTIA])))


@entry
def longest_step(units: Array) -> float:
    """Return the longest sub-step in s: 0.5 ms, or OF_LAG of the fastest lag's time constant."""
    h = min(LONGEST_STEP, OF_LAG / LIMITER_GAIN)
    for i in range(units.shape[0]):
        lag = 0.0
        if units[i, KIND] == WHEEL and units[i, ROLE] == MOTOR:
            lag = units[i, CURRENT_LAG]
        elif units[i, KIND] == WHEEL and units[i, ROLE] == TOOTHED:
            lag = flank_frequency(units, i)
        elif units[i, KIND] == WHEEL and units[i, ROLE] == LEGS:
            lag = units[i, HINGE_MODE]
        elif units[i, KIND] == WHEEL:
            lag = CLAMP_GAIN if units[i, TAKES_BACK] == 0.0 else 0.0
        elif units[i, KIND] == GIMBAL_SERVO:
            lag = units[i, RATE_LAG]
        if np.isfinite(lag) and lag > 0.0:
            h = min(h, OF_LAG / lag)
    return h


@inlined
def disturbance_at(t: float, active: Array, count: int) -> float:
    """Return the torque about the line in N·m at time t from the first `count` rows of `active`."""
    total = 0.0
    for i in range(count):
        total += torque_of(t, active, i)
    return total


@inlined
def torque_of(t: float, active: Array, i: int) -> float:
    """Return the torque about the line in N·m of one row at time t."""
    s = t - active[i, outcome.START]
    torque = active[i, outcome.LEVEL] + active[i, outcome.SLOPE] * s
    if active[i, outcome.SWING] != 0.0:
        torque += active[i, outcome.SWING] * np.sin(active[i, outcome.TURN] * s)
    return float(torque)


@part
def put_on_legs(t: float, active: Array, count: int, live: Array, commands: Array) -> float:
    """Put what acts on legs that give at time t into their command; return it in N·m, 0 for stiff legs."""
    row = legs_row(live)
    if row < 0:
        return 0.0
    total = 0.0
    for i in range(count):
        total += on_legs_of(active[i, outcome.LEVER], live) * torque_of(t, active, i)
    commands[row] = total
    return total


@inlined
def push_at(t: float, active: Array, count: int) -> float:
    """Return the horizontal force along w in N that makes these torques at time t; a couple has none."""
    total = 0.0
    for i in range(count):
        if active[i, outcome.LEVER] != np.inf:
            total += torque_of(t, active, i) / active[i, outcome.LEVER]
    return total


@inlined
def vary(t: float, active: Array, count: int, base: Array, body: Array) -> None:
    """Put what the rows of `active` make of the body at time t.

    J̇ θ̇ of a changing inertia acts as a drag does; the height and offset that the feet feel follow G_s and G_c.
    """
    inertia, change, up, across = 0.0, 0.0, 0.0, 0.0
    for i in range(count):
        s = t - active[i, outcome.START]
        inertia += active[i, outcome.OF_INERTIA] + active[i, outcome.OF_INERTIA + 1] * s
        change += active[i, outcome.OF_INERTIA + 1]
        up += active[i, outcome.OF_STIFF_SIN] + active[i, outcome.OF_STIFF_SIN + 1] * s
        across += active[i, outcome.OF_STIFF_COS] + active[i, outcome.OF_STIFF_COS + 1] * s
    weight = base[MASS] * base[GRAVITY]
    body[INERTIA], body[BODY_DRAG] = base[INERTIA] + inertia, base[BODY_DRAG] + change
    body[STIFF_SIN], body[HEIGHT] = base[STIFF_SIN] + up, base[HEIGHT] + up / weight
    body[STIFF_COS], body[OFFSET] = base[STIFF_COS] + across, base[OFFSET] + across / weight


@inlined
def rates(X: Array, torque: float, commands: Array, body: Array, live: Array, met: Flags, inputs: Array,
          slopes: Array, out: Array) -> None:
    """Fill `out` with dX/dt under held commands and a torque about the line; `met` with each unit's limit."""
    bus = bus_row(live)
    power, volts = 0.0, 0.0
    if bus >= 0:
        power, volts = put_voltage(X, bus, live)
    geared = 0
    for i in range(live.shape[0]):
        inputs[i], slopes[i], met[i] = unit_input(live, i, X[2 + 2 * i], X[3 + 2 * i], X[1], commands[i])
        if live[i, KIND] == WHEEL and live[i, ROLE] == TOOTHED:
            geared = 1
    if bus >= 0:
        share_bus(X, power, volts, bus, live, slopes, met, inputs)
    if geared == 1:
        press_teeth(X, live, inputs, slopes)
    derivative(X, inputs, torque, body, live, out)
    for i in range(live.shape[0]):
        if live[i, KIND] == WHEEL:
            out[3 + 2 * i] = slopes[i]
        elif live[i, KIND] == GIMBAL_SERVO:
            wanted = (inputs[i] - X[3 + 2 * i]) * live[i, RATE_LAG]
            if abs(out[3 + 2 * i] - wanted) > 1e-9 * (1.0 + abs(wanted)) and live[i, DRIVE_TORQUE] != np.inf:
                met[i] = outcome.DRIVE


@part
def march(X: Array, begin: float, h: float, steps: int, commands: Array, active: Array, count: int, varying: int,
          base: Array, body: Array, units: Array, live: Array, held: Flags, met: Flags, inputs: Array, slopes: Array,
          rate: Array, total: Array, probe: Array, metrics: Array, first: Array) -> tuple[int, int]:
    """Make at most `steps` sub-steps of h from `begin`; return (steps made, how the trial ended).

    It stops short, with X at the end of the last whole step, where a free gimbal would pass its stop. Classic
    Runge-Kutta of order four; one call site of `rates` in a loop, since four would be compiled four times.
    """
    for step in range(steps):
        t = begin + step * h
        for j in range(X.size):
            probe[j] = X[j]
            total[j] = X[j]
        for stage in range(4):
            reach = 0.0 if stage == 0 else (h if stage == 3 else 0.5 * h)
            if stage > 0:
                for j in range(X.size):
                    probe[j] = X[j] + reach * rate[j]
            torque = disturbance_at(t + reach, active, count)
            torque -= put_on_legs(t + reach, active, count, live, commands)
            if varying == 1:
                vary(t + reach, active, count, base, body)
            rates(probe, torque, commands, body, live, met, inputs, slopes, rate)
            if stage == 0:
                settle_currents(X, inputs, live, met, held)
                watch(t, h, X, rate, body, units, met, metrics, first)
                watch_feet(t, X, rate, push_at(t, active, count), body, units, metrics)
                watch_bus(X, units, live, metrics)
            weight = h / 3.0 if 0 < stage < 3 else h / 6.0
            for j in range(X.size):
                total[j] += weight * rate[j]
        if beyond_stop(total, units, held) >= 0:
            return step, outcome.RAN
        for j in range(X.size):
            X[j] = total[j]
        end = ended(X, body)
        if end != outcome.RAN:
            return step + 1, end
    return steps, outcome.RAN


@inlined
def settle_currents(X: Array, inputs: Array, live: Array, met: Flags, held: Flags) -> None:
    """Show the current of wheels without a current lag (no state of its own), and that a held gimbal is limited."""
    for i in range(live.shape[0]):
        if live[i, KIND] == WHEEL and live[i, ROLE] == MOTOR and live[i, CURRENT_LAG] == np.inf:
            X[3 + 2 * i] = inputs[i] / live[i, TORQUE_PER_AMP]
        if held[i] != 0:
            met[i] = outcome.STOP


@inlined
def beyond_stop(X: Array, units: Array, held: Flags) -> int:
    """Return the first gimballed unit that is past its stop and not held there, or -1."""
    for i in range(units.shape[0]):
        if units[i, KIND] != WHEEL and held[i] == 0 and abs(X[2 + 2 * i]) > units[i, ANGLE_STOP]:
            return i
    return -1


@inlined
def ended(X: Array, body: Array) -> int:
    """Return how the trial has ended in this state (RAN: it has not)."""
    lean = X[0] - body[BALANCED]
    if X[0] <= -body[TOUCH_DOWN] or X[0] >= body[LANDS_OUTWARD]:
        return outcome.TOUCHED_DOWN
    if lean > body[FELL]:
        return outcome.FELL_OUTWARD
    if not lean >= -body[FELL]:            # a state that is no number has fallen too, never recovered
        return outcome.FELL_INWARD
    return outcome.RAN


@part
def jump(column: int, X: Array, body: Array, live: Array, inputs: Array, rest: Array, push: Array) -> None:
    """Fill `push` with the change of all rates per impulse: about the line (column -1), or in input `column`.

    Accelerations are affine in torques, so the difference of two of them is a column of M⁻¹,
    geared rotors included.
    """
    for i in range(live.shape[0]):
        inputs[i] = 0.0
    about = 0.0
    for pushed in range(2):                                # one place that calls, since two would be compiled
        if pushed == 1:
            for j in range(X.size):
                rest[j] = push[j]
            if column >= 0:
                inputs[column] = 1.0
            else:
                about = 1.0
        derivative(X, inputs, about, body, live, push)
    for j in range(X.size):
        push[j] -= rest[j]
