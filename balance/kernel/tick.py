"""One tick of the law: measure, compute, limit, share out. The same arithmetic the firmware does."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined, part
from balance.kernel.layout import BALANCED
from balance.kernel.sensing import GYRO, TILT, read_gyro, read_tilt

Array = NDArray[np.float64]
Places = NDArray[np.int64]


@part
def measure(X: Array, acceleration: float, hinge: tuple[float, float], body: Array, places: Places, sensor: Array,
            seed: int, sample: int, y: Array) -> None:
    """Fill y with the states at `places`: place 0 is read as lean, θ - θ_b; TILT and GYRO are read by the sensor."""
    for j in range(places.size):
        if places[j] == TILT:
            y[j] = read_tilt(X, acceleration, hinge, body, sensor, seed, sample)
        elif places[j] == GYRO:
            y[j] = read_gyro(X[1], sensor, seed, sample)
        else:
            y[j] = X[places[j]] - body[BALANCED] if places[j] == 0 else X[places[j]]


@part
def reads_sensor(places: Places) -> bool:
    """Return whether any measurement is the inertial sensor's."""
    found = False
    for j in range(places.size):
        found = found or places[j] < 0
    return found


@part
def law_tick(x: Array, y: Array, A: Array, B: Array, E: Array, C: Array, D: Array, most: float,
             spare: Array) -> tuple[float, float]:
    """Return (v, v' = clip(v, ±most)) and move the memory x on: v = C x + D y, x⁺ = A x + B y + E v'."""
    v = 0.0
    for j in range(C.size):
        v += C[j] * x[j]
    for j in range(D.size):
        v += D[j] * y[j]
    limited = min(max(v, -most), most)
    for i in range(C.size):
        s = E[i] * limited
        for j in range(C.size):
            s += A[i, j] * x[j]
        for j in range(D.size):
            s += B[i, j] * y[j]
        spare[i] = s
    for i in range(C.size):
        x[i] = spare[i]
    return v, limited


@part
def share_out(v: float, y: Array, allotment: Array, levelling: Array, most: Array, line_share: Array,
              out: Array) -> bool:
    """Fill `out` with the units' inputs, allotment·v - levelling·y, each within ±most; return: was one limited.

    What a limited unit cannot give about the line is offered to the units that still have room, in proportion
    to the torque they have left. `line_share`: torque about the line per unit of input; 0: takes nothing over.
    """
    missing = 0.0
    limited = False
    for i in range(allotment.size):
        u = allotment[i] * v
        for j in range(levelling.shape[1]):
            u -= levelling[i, j] * y[j]
        out[i] = min(max(u, -most[i]), most[i])
        if abs(u) > most[i] * (1.0 + 1e-9):
            limited = True
        missing += line_share[i] * (u - out[i])
    if missing == 0.0 or allotment.size < 2:
        return limited
    room = 0.0
    for i in range(allotment.size):
        room += room_of(missing, line_share[i], most[i], out[i])
    if room > 0.0:
        part = min(abs(missing) / room, 1.0)
        for i in range(allotment.size):
            given = part * room_of(missing, line_share[i], most[i], out[i])
            if given > 0.0:
                out[i] += (given if missing > 0.0 else -given) / line_share[i]
    return limited


@part
def room_of(missing: float, line_share: float, most: float, given: float) -> float:
    """Return the torque about the line a unit can still add toward `missing`, as a magnitude."""
    way = 1.0 if missing * line_share >= 0.0 else -1.0
    return abs(line_share) * max(most - way * given, 0.0)


@inlined
def servo_steps(rate: float, sample_time: float, asked: float, sent: float, resolution: float, dead_band: float,
                most: float) -> tuple[float, float, float]:
    """Return (rate its drive turns at, angle asked for, angle sent) of a position servo in one sample.

    The commanded rate adds up to an angle, which the servo knows in whole steps of its resolution and follows only
    where it is further away than its dead band, no faster than `most`: rounding, then play. All in rad and rad/s.
    """
    asked += rate * sample_time
    told = resolution * np.floor(asked / resolution + 0.5) if resolution > 0.0 else asked
    goal = min(max(sent, told - dead_band), told + dead_band)
    way = min(max(goal - sent, -most * sample_time), most * sample_time)
    return way / sample_time, asked, sent + way
