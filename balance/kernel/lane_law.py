"""The sampled law in lanes: what the sensors show, the law's matrices, limits, sharing out, the commands on their way.

The matrices are the same for all lanes; each of their elements meets one row of 64 numbers.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import lane_rows as at
from balance.kernel import sensing, series, tick
from balance.kernel.bundles import LawArrays
from balance.kernel.compiled import fused
from balance.kernel.lane_rows import LANES
from balance.kernel.lane_wheels import body_in, lean_rate_change, motor_in, net_torque, sine
from balance.kernel.sensing import (
    ACCEL_NOISE,
    ACCEL_RANGE,
    ACCEL_STEP,
    ACROSS,
    GYRO,
    GYRO_BIAS,
    GYRO_NOISE,
    GYRO_RANGE,
    GYRO_STEP,
    TILT,
    TILT_BIAS,
    UP,
)

Array = NDArray[np.float64]

normal = fused(sensing.normal)
digitised = fused(sensing.digitised)
cosine = fused(series.cosine)
force_at = fused(sensing.force_at)
tilt_of = fused(series.tilt_of)
room_of = fused(tick.room_of)


@fused
def span(row: int) -> slice:
    """Return where one row's lanes stand."""
    return slice(row * LANES, (row + 1) * LANES)


@fused
def accelerate(X: Array, wheels: int, torque: float) -> None:
    """Put each lane's θ̈ under `torque` (N·m, scaled per lane) into its row."""
    two = 1.0 if wheels == 2 else 0.0
    for lane in range(LANES):
        taken = two * taken_by(X, lane, at.MOTOR + at.MOTOR_SIZE, at.SPEED + at.WHEEL_STATES)
        taken += taken_by(X, lane, at.MOTOR, at.SPEED)
        X[at.ACCELERATION * LANES + lane] = lean_rate_change(
            X[at.THETA * LANES + lane], X[at.RATE * LANES + lane], torque * X[at.SCALE * LANES + lane], taken,
            body_in(X, lane))


@fused
def taken_by(X: Array, lane: int, motor: int, state: int) -> float:
    """Return the torque about the line in N·m one wheel takes from the body."""
    numbers = motor_in(X, motor, lane)
    return float(numbers[at.SHARE] * net_torque(X[state * LANES + lane], X[(state + 1) * LANES + lane], numbers))


@fused
def read_tilts(X: Array, sensor: Array, sample: int, out: Array) -> None:
    """Fill `out` with the lean in rad each lane's accelerometer shows: `sensing.read_tilt`."""
    up, across, noise, step = sensor[UP], sensor[ACROSS], sensor[ACCEL_NOISE], sensor[ACCEL_STEP]
    most, bias = sensor[ACCEL_RANGE], sensor[TILT_BIAS]
    if noise > 0.0:
        for lane in range(LANES):
            X[at.NOISE * LANES + lane] = noise * normal(np.int64(X[at.SEED * LANES + lane]), sample, 1)
            X[(at.NOISE + 1) * LANES + lane] = noise * normal(np.int64(X[at.SEED * LANES + lane]), sample, 2)
    for lane in range(LANES):
        theta = X[at.THETA * LANES + lane]
        along, high = force_at(sine(theta), cosine(theta), X[at.RATE * LANES + lane], X[at.ACCELERATION * LANES + lane],
                               X[at.GRAVITY * LANES + lane], up, across)
        along = digitised(along + X[at.NOISE * LANES + lane], step, most)
        high = digitised(high + X[(at.NOISE + 1) * LANES + lane], step, most)
        X[at.SHOWN * LANES + lane] = tilt_of(-along, high) + bias - X[at.BALANCED * LANES + lane]
    for lane in range(LANES):
        out[lane] = X[at.SHOWN * LANES + lane]


@fused
def read_gyros(X: Array, sensor: Array, sample: int, out: Array) -> None:
    """Fill `out` with the lean rate in rad/s each lane's gyro shows: `sensing.read_gyro`."""
    bias, noise, step, most = sensor[GYRO_BIAS], sensor[GYRO_NOISE], sensor[GYRO_STEP], sensor[GYRO_RANGE]
    for lane in range(LANES):
        X[at.SHOWN * LANES + lane] = X[at.RATE * LANES + lane] + bias
    if noise > 0.0:
        for lane in range(LANES):
            X[at.SHOWN * LANES + lane] += noise * normal(np.int64(X[at.SEED * LANES + lane]), sample, 0)
    for lane in range(LANES):
        out[lane] = digitised(X[at.SHOWN * LANES + lane], step, most)


@fused
def sense_lanes(X: Array, law: LawArrays, sensor: Array, sample: int) -> None:
    """Fill the measured rows; the accelerations are in their row where a tilt is read."""
    for j in range(law.places.size):
        out, place = X[span(at.MEASURED + j)], law.places[j]
        if place == TILT:
            read_tilts(X, sensor, sample, out)
        elif place == GYRO:
            read_gyros(X, sensor, sample, out)
        else:
            state, balanced = X[span(at.THETA + place)], X[span(at.BALANCED)]
            from_balance = 1.0 if place == 0 else 0.0
            for lane in range(LANES):
                out[lane] = state[lane] - from_balance * balanced[lane]
        resting = law.resting[j]
        for lane in range(LANES):
            out[lane] -= resting


@fused
def add_rows(X: Array, weights: Array, first: int, out: Array) -> None:
    """Add Σ weights[j] · row (first + j) to `out`."""
    for j in range(weights.size):
        row, weight = X[span(first + j)], weights[j]
        for lane in range(LANES):
            out[lane] += weight * row[lane]


@fused
def tick_lanes(X: Array, law: LawArrays) -> None:
    """One step of the law in all lanes: `tick.law_tick`; the limited line command stands in its row."""
    v = X[span(at.LINE)]
    for lane in range(LANES):
        v[lane] = 0.0
    add_rows(X, law.C, at.MEMORY, v)
    add_rows(X, law.D, at.MEASURED, v)
    most = law.output_limit
    for lane in range(LANES):
        asked = X[at.LINE * LANES + lane]
        X[at.CLIPPED * LANES + lane] = 1.0 if abs(asked) > most * (1.0 + 1e-9) else 0.0
        X[at.LINE * LANES + lane] = min(max(asked, -most), most)
    for i in range(law.C.size):
        out, limited, weight = X[span(at.NEXT_MEMORY + i)], X[span(at.LINE)], law.E[i]
        for lane in range(LANES):
            out[lane] = weight * limited[lane]
        add_rows(X, law.A[i], at.MEMORY, out)
        add_rows(X, law.B[i], at.MEASURED, out)
    for k in range(law.C.size):
        memory, following = X[span(at.MEMORY + k)], X[span(at.NEXT_MEMORY + k)]
        for lane in range(LANES):
            memory[lane] = following[lane]


@fused
def share_lanes(X: Array, law: LawArrays) -> None:
    """Put the units' inputs into the newest rows of the queue: `tick.share_out`, then rounding."""
    count = law.allotment.size
    for i in range(count):
        out, v, weight = X[span(at.INPUT + i)], X[span(at.LINE)], law.allotment[i]
        for lane in range(LANES):
            out[lane] = weight * v[lane]
        for j in range(law.levelling.shape[1]):
            y, level = X[span(at.MEASURED + j)], law.levelling[i, j]
            for lane in range(LANES):
                out[lane] -= level * y[lane]
    if count == 1:
        limit_one(X, law.input_limits[0])
    else:
        limit_two(X, (law.input_limits[0], law.input_limits[1]), (law.line_share[0], law.line_share[1]))
    for k in range(count):
        given, queued, step = X[span(at.INPUT + k)], X[span(at.QUEUE + k)], law.input_steps[k]
        for lane in range(LANES):
            queued[lane] = digitised(given[lane], step, np.inf)


@fused
def limit_one(X: Array, most: float) -> None:
    """Clip the only unit's input."""
    for lane in range(LANES):
        u = X[at.INPUT * LANES + lane]
        X[at.CLIPPED * LANES + lane] = 1.0 if abs(u) > most * (1.0 + 1e-9) else X[at.CLIPPED * LANES + lane]
        X[at.INPUT * LANES + lane] = min(max(u, -most), most)


@fused
def limit_two(X: Array, most: tuple[float, float], share: tuple[float, float]) -> None:
    """Clip both inputs and offer what is missing about the line to the one that has room."""
    for lane in range(LANES):
        u, w = X[at.INPUT * LANES + lane], X[(at.INPUT + 1) * LANES + lane]
        limited = (abs(u) > most[0] * (1.0 + 1e-9)) | (abs(w) > most[1] * (1.0 + 1e-9))
        X[at.CLIPPED * LANES + lane] = 1.0 if limited else X[at.CLIPPED * LANES + lane]
        p, q = min(max(u, -most[0]), most[0]), min(max(w, -most[1]), most[1])
        missing = share[0] * (u - p) + share[1] * (w - q)
        room, other = room_of(missing, share[0], most[0], p), room_of(missing, share[1], most[1], q)
        part = min(abs(missing) / max(room + other, 1e-300), 1.0)
        side = 1.0 if missing > 0.0 else -1.0
        X[at.INPUT * LANES + lane] = p + (side * part * room / share[0] if room > 0.0 else 0.0)
        X[(at.INPUT + 1) * LANES + lane] = q + (side * part * other / share[1] if other > 0.0 else 0.0)
