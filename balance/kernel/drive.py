"""What motors and gimbal drives can do: current, voltage, torque, speed and rate limits of unit i.

The speed limit of a wheel and the rate limit of a torque-driven gimbal act as a real drive's limiter does: in
proportion to what is left, with `limiter_gain`, so that the torque is cut without chatter; it never brakes a wheel.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.compiled import inlined, part
from balance.kernel.equations import gimbal_terms
from balance.kernel.layout import (
    ANGLE_STOP,
    BACK_EMF,
    BEHIND_PLAY,
    BUS_VOLTAGE,
    CURRENT_LAG,
    CURRENT_LIMIT,
    DRIVE_TORQUE,
    GIMBAL_INERTIA,
    GIMBAL_SERVO,
    KIND,
    LEGS,
    MOTOR,
    OWN_INERTIA,
    RATE_LIMIT,
    RESISTANCE,
    ROLE,
    SPEED_LIMIT,
    TORQUE_LIMIT,
    TORQUE_PER_AMP,
    WHEEL,
)

Array = NDArray[np.float64]

LIMITER_GAIN = 500.0
"""1/s: a limiter acts where the limit is nearer than acceleration / this; slow enough for a 0.5 ms step."""

SLACK = 1e-9
"""Relative excess below which a command that equals its limit does not count as limited."""


@inlined
def limiter_gain(units: Array, i: int) -> float:
    """Return the speed limiter's gain in 1/s: a quarter of the current loop's bandwidth, at most LIMITER_GAIN."""
    return float(min(0.25 * units[i, CURRENT_LAG], LIMITER_GAIN))


@inlined
def speed_cap(torque: float, speed: float, speed_limit: float, gain: float) -> float:
    """Return the largest |torque| in N·m the speed limiter lets through; `gain`: inertia turned times its gain in 1/s."""
    room = speed_limit - speed if torque > 0.0 else speed_limit + speed
    return max(gain * room, 0.0)


@inlined
def current_reach(emf: float, volts: float, per_ohm: float, most: float) -> tuple[float, float]:
    """Return the smallest and largest current in A under a back-EMF and a bus voltage in V: `current_window`."""
    low, high = (-volts - emf) * per_ohm, (volts - emf) * per_ohm
    return min(max(low, -most), most), min(max(high, -most), most)


@part
def current_window(units: Array, i: int, speed: float) -> tuple[float, float]:
    """Return the smallest and largest current in A the bus can drive at this wheel speed.

    Each end of (±V - K_e N Ω)/R is clipped into ±i_max: intersecting the two intervals can leave nothing, where
    the motor really brakes at -i_max.
    """
    low, high = current_reach(units[i, BACK_EMF] * speed, units[i, BUS_VOLTAGE], 1.0 / units[i, RESISTANCE],
                              units[i, CURRENT_LIMIT])
    return low, high


@inlined
def current_target(units: Array, i: int, speed: float, command: float) -> tuple[float, int]:
    """Return the current in A the loop heads for under a torque command in N·m, and the limit that cut it."""
    met = outcome.NO_LIMIT
    torque = command
    if abs(torque) > units[i, TORQUE_LIMIT]:
        if abs(torque) > units[i, TORQUE_LIMIT] * (1.0 + SLACK):
            met = outcome.TORQUE
        torque = units[i, TORQUE_LIMIT] if torque > 0.0 else -units[i, TORQUE_LIMIT]
    turned = units[i, OWN_INERTIA] + units[i, BEHIND_PLAY]
    cap = speed_cap(torque, speed, units[i, SPEED_LIMIT], turned * limiter_gain(units, i))
    if abs(torque) > cap:
        met = outcome.SPEED
        torque = cap if torque > 0.0 else -cap
    current = torque / units[i, TORQUE_PER_AMP]
    needed = units[i, RESISTANCE] * current + units[i, BACK_EMF] * speed
    if abs(needed) <= units[i, BUS_VOLTAGE] and abs(current) <= units[i, CURRENT_LIMIT]:
        return current, met
    low, high = current_window(units, i, speed)
    slack = SLACK * units[i, CURRENT_LIMIT]
    if abs(units[i, BACK_EMF] * speed) > units[i, BUS_VOLTAGE] + units[i, RESISTANCE] * units[i, CURRENT_LIMIT]:
        met = outcome.UNREGULATED
    elif current > high + slack:
        met = outcome.CURRENT if high >= units[i, CURRENT_LIMIT] else outcome.VOLTAGE
    elif current < low - slack:
        met = outcome.CURRENT if low <= -units[i, CURRENT_LIMIT] else outcome.VOLTAGE
    return min(max(current, low), high), met


@part
def gimbal_torque(units: Array, i: int, angle: float, rate: float, lean_rate: float,
                  command: float) -> tuple[float, int]:
    """Return the torque in N·m of a torque-driven gimbal under a torque command, and the limit that cut it.

    The rate limiter knows what the flywheel pushes back, H σ' θ̇, and holds the rate with all the drive's strength.
    """
    met = outcome.NO_LIMIT
    torque = command
    if units[i, RATE_LIMIT] != np.inf:
        _, _, _, back = gimbal_terms(i, angle, rate, lean_rate, units)
        high = units[i, GIMBAL_INERTIA] * LIMITER_GAIN * (units[i, RATE_LIMIT] - rate) - back
        low = units[i, GIMBAL_INERTIA] * LIMITER_GAIN * (-units[i, RATE_LIMIT] - rate) - back
        if torque > high or torque < low:
            met = outcome.RATE
            torque = min(max(torque, low), high)
    most = units[i, DRIVE_TORQUE]
    if abs(torque) > most:
        if abs(torque) > most * (1.0 + SLACK):
            met = outcome.DRIVE
        torque = min(max(torque, -most), most)
    return torque, met


@inlined
def gimbal_rate(units: Array, i: int, command: float) -> tuple[float, int]:
    """Return the rate in rad/s a position servo is asked for, and the limit that cut it."""
    most = units[i, RATE_LIMIT]
    met = outcome.RATE if abs(command) > most * (1.0 + SLACK) else outcome.NO_LIMIT
    return min(max(command, -most), most), met


@inlined
def unit_input(units: Array, i: int, first: float, second: float, lean_rate: float,
               command: float) -> tuple[float, float, int]:
    """Return (input of the equations of motion, rate of the second state, limit met) of one unit.

    `first, second`: the unit's two states. The rate of the second state is the motor current's, 0 for a gimbal
    (its second state is mechanical and belongs to `equations`).
    """
    if units[i, KIND] == WHEEL:
        if units[i, ROLE] == LEGS:
            return command, first, outcome.NO_LIMIT
        if units[i, ROLE] != MOTOR:
            return 0.0, 0.0, outcome.NO_LIMIT
        target, met = current_target(units, i, first, command)
        if units[i, CURRENT_LAG] == np.inf:
            return units[i, TORQUE_PER_AMP] * target, 0.0, met
        return units[i, TORQUE_PER_AMP] * second, units[i, CURRENT_LAG] * (target - second), met
    if units[i, KIND] == GIMBAL_SERVO:
        rate, met = gimbal_rate(units, i, command)
        return rate, 0.0, met
    torque, met = gimbal_torque(units, i, first, second, lean_rate, command)
    return torque, 0.0, met


@part
def torque_available(units: Array, i: int, first: float, share: float, sign: float) -> float:
    """Return the torque about the line in N·m one unit could give now toward `sign`, as a magnitude.

    `first`: wheel speed or gimbal angle; `share`: torque about the line per N·m on the wheel, for gimbals per
    rad/s of gimbal rate.
    """
    if units[i, KIND] == WHEEL:
        if units[i, ROLE] != MOTOR:
            return 0.0
        way = 1.0 if sign * share >= 0.0 else -1.0
        room = units[i, SPEED_LIMIT] - way * first
        turned = units[i, OWN_INERTIA] + units[i, BEHIND_PLAY]
        cap = min(units[i, TORQUE_LIMIT], max(turned * limiter_gain(units, i) * room, 0.0))
        low, high = current_window(units, i, first)
        current = high if way * units[i, TORQUE_PER_AMP] > 0.0 else -low
        return float(abs(share) * max(min(cap, current * abs(units[i, TORQUE_PER_AMP])), 0.0))
    way = 1.0 if sign * share >= 0.0 else -1.0
    if way * first >= units[i, ANGLE_STOP]:
        return 0.0
    return float(abs(share) * units[i, RATE_LIMIT])
