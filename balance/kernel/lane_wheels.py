"""One and two reaction wheels in lanes: rates, and classic Runge-Kutta of order four over all lanes at once.

The components are those of the single trace (`equations`, `drive`), lowered once more with fused products.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import drive, equations, series
from balance.kernel import lane_rows as at
from balance.kernel.compiled import fused
from balance.kernel.drive import SLACK
from balance.kernel.lane_rows import LANES

Array = NDArray[np.float64]
Motor = tuple[float, ...]

sliding_drag = fused(equations.sliding_drag)
speed_cap = fused(drive.speed_cap)
current_reach = fused(drive.current_reach)
sine = fused(series.sine)


@fused
def motor_in(X: Array, base: int, lane: int) -> Motor:
    """Return one motor's numbers, in the order of `lane_rows`."""
    return (X[(base + at.COUPLING) * LANES + lane], X[(base + at.PER_OWN) * LANES + lane],
            X[(base + at.SHARE) * LANES + lane], X[(base + at.MOMENT) * LANES + lane],
            X[(base + at.COULOMB) * LANES + lane], X[(base + at.VISCOUS) * LANES + lane],
            X[(base + at.TORQUE_LIMIT) * LANES + lane], X[(base + at.SPEED_LIMIT) * LANES + lane],
            X[(base + at.SPEED_GAIN) * LANES + lane], X[(base + at.PER_TORQUE) * LANES + lane],
            X[(base + at.PER_AMP) * LANES + lane], X[(base + at.EMF) * LANES + lane],
            X[(base + at.OHMS) * LANES + lane], X[(base + at.PER_OHM) * LANES + lane],
            X[(base + at.VOLTS) * LANES + lane], X[(base + at.AMPS) * LANES + lane], X[(base + at.LAG) * LANES + lane])


@fused
def body_in(X: Array, lane: int) -> tuple[float, float, float, float]:
    """Return (gravity's stiffness, θ without its torque, drag, 1/mass) of one lane."""
    return (X[at.STIFFNESS * LANES + lane], X[at.UPRIGHT * LANES + lane], X[at.BODY_DRAG * LANES + lane],
            X[at.PER_MASS * LANES + lane])


@fused
def net_torque(speed: float, current: float, motor: Motor) -> float:
    """Return what speeds the wheel up in N·m: the motor's torque less the drag."""
    return float(motor[at.PER_AMP] * current - sliding_drag(speed, motor[at.COULOMB], motor[at.VISCOUS]))


@fused
def current_slope(speed: float, current: float, command: float, motor: Motor) -> tuple[float, bool]:
    """Return (the current's rate in A/s, whether a limit was met) under a torque command: `drive.current_target`."""
    most = motor[at.TORQUE_LIMIT]
    torque = min(max(command, -most), most)
    cap = speed_cap(torque, speed, motor[at.SPEED_LIMIT], motor[at.SPEED_GAIN])
    limited = (abs(command) > most * (1.0 + SLACK)) | (abs(torque) > cap)
    wanted = min(max(torque, -cap), cap) * motor[at.PER_TORQUE]
    low, high = current_reach(motor[at.EMF] * speed, motor[at.VOLTS], motor[at.PER_OHM], motor[at.AMPS])
    slack = SLACK * motor[at.AMPS]
    limited = limited | (wanted > high + slack) | (wanted < low - slack)
    return motor[at.LAG] * (min(max(wanted, low), high) - current), limited


@fused
def lean_rate_change(theta: float, rate: float, load: float, taken: float, body: Motor) -> float:
    """Return θ̈ under a torque about the line and what the wheels take from it, both in N·m.

    G_s sin θ + G_c cos θ = √(G_s² + G_c²) sin(θ − θ₀): one series instead of two, the cosine is left out.
    """
    return float((body[0] * sine(theta - body[1]) + load - body[2] * rate - taken) * body[3])


@fused
def one_rates(theta: float, rate: float, a: float, i: float, u: float, load: float, body: Motor,
              motor: Motor) -> tuple[float, float, float, float, bool]:
    """Return (θ̈, Ω̇, current's rate, torque the wheel takes about the line, limited) of a machine with one wheel."""
    net = net_torque(a, i, motor)
    taken = motor[at.SHARE] * net
    acceleration = lean_rate_change(theta, rate, load, taken, body)
    slope, limited = current_slope(a, i, u, motor)
    return acceleration, (net - motor[at.COUPLING] * acceleration) * motor[at.PER_OWN], slope, taken, limited


@fused
def two_rates(theta: float, rate: float, a: float, i: float, b: float, j: float, u: float, w: float, load: float,
              body: Motor, first: Motor, second: Motor) -> tuple[float, float, float, float, float, float, bool]:
    """Return (θ̈, then Ω̇ and current's rate of each, torque both take about the line, limited) with two wheels."""
    net, other = net_torque(a, i, first), net_torque(b, j, second)
    taken = first[at.SHARE] * net + second[at.SHARE] * other
    acceleration = lean_rate_change(theta, rate, load, taken, body)
    slope, limited = current_slope(a, i, u, first)
    steep, cut = current_slope(b, j, w, second)
    return (acceleration, (net - first[at.COUPLING] * acceleration) * first[at.PER_OWN], slope,
            (other - second[at.COUPLING] * acceleration) * second[at.PER_OWN], steep, taken, limited | cut)


@fused
def momentum_of(rate: float, speed: float, motor: Motor) -> float:
    """Return the momentum about the line in N·m·s that a wheel stores."""
    return motor[at.COUPLING] * speed + motor[at.MOMENT] * rate


@fused
def power_of(speed: float, current: float, motor: Motor) -> float:
    """Return a motor's electrical power in W."""
    return current * (motor[at.OHMS] * current + motor[at.EMF] * speed)


@fused
def watch(X: Array, lane: int, h: float, torque: float, stored: float, current: float, power: float,
          limited: bool) -> None:
    """Gather one lane's metrics of a sub-step of length h (0: the trial has ended)."""
    alive = X[at.ALIVE * LANES + lane]
    lean, rate = X[at.THETA * LANES + lane] - X[at.BALANCED * LANES + lane], X[at.RATE * LANES + lane]
    X[at.PEAK_LEAN * LANES + lane] = max(X[at.PEAK_LEAN * LANES + lane], abs(lean))
    X[at.PEAK_RATE * LANES + lane] = max(X[at.PEAK_RATE * LANES + lane], abs(rate) * alive)
    X[at.PEAK_TORQUE * LANES + lane] = max(X[at.PEAK_TORQUE * LANES + lane], abs(torque) * alive)
    X[at.PEAK_MOMENTUM * LANES + lane] = max(X[at.PEAK_MOMENTUM * LANES + lane], abs(stored))
    X[at.PEAK_CURRENT * LANES + lane] = max(X[at.PEAK_CURRENT * LANES + lane], current * alive)
    X[at.PEAK_POWER * LANES + lane] = max(X[at.PEAK_POWER * LANES + lane], power * alive)
    X[at.TORQUE_SQUARED * LANES + lane] += h * torque * torque
    X[at.SATURATED * LANES + lane] += h if limited else 0.0


@fused
def look_for_end(X: Array, lane: int, theta: float, t: float) -> None:
    """End a lane's trial where its state at time t has fallen or touched down: `integrate.ended`."""
    alive = X[at.ALIVE * LANES + lane]
    lean, most = theta - X[at.BALANCED * LANES + lane], X[at.FELL * LANES + lane]
    touched = (theta <= -X[at.TOUCH_DOWN * LANES + lane]) | (theta >= X[at.LANDS_OUTWARD * LANES + lane])
    end = 1.0 if lean > most else (0.0 if lean >= -most else 2.0)
    end = 3.0 if touched else end
    ends_now = (end > 0.0) & (alive > 0.0)
    X[at.END * LANES + lane] = end if ends_now else X[at.END * LANES + lane]
    X[at.END_TIME * LANES + lane] = t if ends_now else X[at.END_TIME * LANES + lane]
    X[at.ALIVE * LANES + lane] = 0.0 if ends_now else alive


@fused
def march_one(X: Array, t: float, h: float, torque: tuple[float, float, float]) -> None:
    """Make one sub-step of all lanes with one wheel; `torque`: what is scaled per lane at its start, middle and end."""
    for lane in range(LANES):
        body, motor = body_in(X, lane), motor_in(X, at.MOTOR, lane)
        x, v = X[at.THETA * LANES + lane], X[at.RATE * LANES + lane]
        a, i = X[at.SPEED * LANES + lane], X[at.CURRENT * LANES + lane]
        u, scale = X[at.ASKED * LANES + lane], X[at.SCALE * LANES + lane]
        d = h * X[at.ALIVE * LANES + lane]
        e, sixth = 0.5 * d, d * (1.0 / 6.0)
        p1, a1, i1, taken, limited = one_rates(x, v, a, i, u, torque[0] * scale, body, motor)
        watch(X, lane, d, taken, momentum_of(v, a, motor), abs(i), power_of(a, i, motor), limited)
        v2 = v + e * p1
        p2, a2, i2, _, _ = one_rates(x + e * v, v2, a + e * a1, i + e * i1, u, torque[1] * scale, body, motor)
        v3 = v + e * p2
        p3, a3, i3, _, _ = one_rates(x + e * v2, v3, a + e * a2, i + e * i2, u, torque[1] * scale, body, motor)
        v4 = v + d * p3
        p4, a4, i4, _, _ = one_rates(x + d * v3, v4, a + d * a3, i + d * i3, u, torque[2] * scale, body, motor)
        x += sixth * (v + 2.0 * (v2 + v3) + v4)
        X[at.THETA * LANES + lane] = x
        X[at.RATE * LANES + lane] = v + sixth * (p1 + 2.0 * (p2 + p3) + p4)
        X[at.SPEED * LANES + lane] = a + sixth * (a1 + 2.0 * (a2 + a3) + a4)
        X[at.CURRENT * LANES + lane] = i + sixth * (i1 + 2.0 * (i2 + i3) + i4)
        look_for_end(X, lane, x, t + h)


@fused
def march_two(X: Array, t: float, h: float, torque: tuple[float, float, float]) -> None:
    """Make one sub-step of all lanes with two wheels, as `march_one`."""
    for lane in range(LANES):
        body, first = body_in(X, lane), motor_in(X, at.MOTOR, lane)
        second = motor_in(X, at.MOTOR + at.MOTOR_SIZE, lane)
        x, v = X[at.THETA * LANES + lane], X[at.RATE * LANES + lane]
        a, i = X[at.SPEED * LANES + lane], X[at.CURRENT * LANES + lane]
        b, j = X[(at.SPEED + at.WHEEL_STATES) * LANES + lane], X[(at.CURRENT + at.WHEEL_STATES) * LANES + lane]
        u, w = X[at.ASKED * LANES + lane], X[(at.ASKED + 1) * LANES + lane]
        scale = X[at.SCALE * LANES + lane]
        d = h * X[at.ALIVE * LANES + lane]
        e, sixth = 0.5 * d, d * (1.0 / 6.0)
        p1, a1, i1, b1, j1, taken, limited = two_rates(x, v, a, i, b, j, u, w, torque[0] * scale, body, first, second)
        watch(X, lane, d, taken, momentum_of(v, a, first) + momentum_of(v, b, second), max(abs(i), abs(j)),
              power_of(a, i, first) + power_of(b, j, second), limited)
        v2 = v + e * p1
        p2, a2, i2, b2, j2, _, _ = two_rates(x + e * v, v2, a + e * a1, i + e * i1, b + e * b1, j + e * j1, u, w,
                                             torque[1] * scale, body, first, second)
        v3 = v + e * p2
        p3, a3, i3, b3, j3, _, _ = two_rates(x + e * v2, v3, a + e * a2, i + e * i2, b + e * b2, j + e * j2, u, w,
                                             torque[1] * scale, body, first, second)
        v4 = v + d * p3
        p4, a4, i4, b4, j4, _, _ = two_rates(x + d * v3, v4, a + d * a3, i + d * i3, b + d * b3, j + d * j3, u, w,
                                             torque[2] * scale, body, first, second)
        x += sixth * (v + 2.0 * (v2 + v3) + v4)
        X[at.THETA * LANES + lane] = x
        X[at.RATE * LANES + lane] = v + sixth * (p1 + 2.0 * (p2 + p3) + p4)
        X[at.SPEED * LANES + lane] = a + sixth * (a1 + 2.0 * (a2 + a3) + a4)
        X[at.CURRENT * LANES + lane] = i + sixth * (i1 + 2.0 * (i2 + i3) + i4)
        X[(at.SPEED + at.WHEEL_STATES) * LANES + lane] = b + sixth * (b1 + 2.0 * (b2 + b3) + b4)
        X[(at.CURRENT + at.WHEEL_STATES) * LANES + lane] = j + sixth * (j1 + 2.0 * (j2 + j3) + j4)
        look_for_end(X, lane, x, t + h)
