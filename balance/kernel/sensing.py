"""What an inertial sensor reads: rate and tilt with lever arm, bias, noise, resolution and range.

Noise is a function of (seed, sample, channel) alone, so that a trial's noise depends on nothing that runs beside it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined, part
from balance.kernel.layout import BALANCED, GRAVITY
from balance.kernel.series import cosine_of_turns, logarithm

Array = NDArray[np.float64]

# places in the sensor's flat array
UP = 0             # m: the sensor's height above the contact line, along u at θ = 0
ACROSS = 1         # m: along w
GYRO_BIAS = 2      # rad/s
TILT_BIAS = 3      # rad
GYRO_NOISE = 4     # rad/s, standard deviation of one sample
ACCEL_NOISE = 5    # m/s², standard deviation of one sample
GYRO_STEP = 6      # rad/s per count; 0: not quantised
ACCEL_STEP = 7     # m/s² per count; 0: not quantised
GYRO_RANGE = 8     # rad/s
ACCEL_RANGE = 9    # m/s²
SENSOR_SIZE = 12

# places of measurements that are not states
TILT = -1
GYRO = -2


@inlined
def scrambled(seed: int, count: int) -> float:
    """Return a uniform number in (0, 1) from two whole numbers.

    The finaliser of SplitMix64 on seed + count·golden ratio: Steele, Lea, Flood, "Fast splittable pseudorandom number
    generators", OOPSLA 2014 (constants from memory; the tests judge the result).
    """
    z = np.uint64(seed) + np.uint64(count + 1) * np.uint64(0x9E3779B97F4A7C15)
    z = (z ^ (z >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
    z = (z ^ (z >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
    z = z ^ (z >> np.uint64(31))
    return (float(z >> np.uint64(11)) + 0.5) * 2.0**-53


@inlined
def normal(seed: int, sample: int, channel: int) -> float:
    """Return a standard normal number of (seed, sample, channel), channel 0 to 3: Box and Muller."""
    radius = np.sqrt(-2.0 * logarithm(scrambled(seed, 8 * sample + 2 * channel)))
    return float(radius * cosine_of_turns(scrambled(seed, 8 * sample + 2 * channel + 1)))


@part
def digitised(value: float, step: float, most: float) -> float:
    """Return the value within ±most, on the nearest count."""
    value = min(max(value, -most), most)
    return float(step * np.floor(value / step + 0.5)) if step > 0.0 else value


@part
def read_gyro(lean_rate: float, sensor: Array, seed: int, sample: int) -> float:
    """Return the rate about the line in rad/s as the gyro shows it."""
    value = lean_rate + sensor[GYRO_BIAS]
    if sensor[GYRO_NOISE] > 0.0:
        value += sensor[GYRO_NOISE] * normal(seed, sample, 0)
    return float(digitised(value, sensor[GYRO_STEP], sensor[GYRO_RANGE]))


@inlined
def force_at(sine: float, cosine: float, lean_rate: float, acceleration: float, g: float, r: float,
             s: float) -> tuple[float, float]:
    """Return the specific force along w and u in m/s² at the place r u + s w of a body that leans on stiff legs."""
    square = lean_rate * lean_rate
    return r * acceleration - g * sine - s * square, g * cosine - s * acceleration - r * square


@inlined
def specific_force(X: Array, acceleration: float, hinge: tuple[float, float], body: Array,
                   sensor: Array) -> tuple[float, float]:
    """Return what an accelerometer without faults shows along w and u in m/s².

    At the place r u + s w of the leaning body: along w: -g sin θ + r θ̈ - s θ̇²; along u: g cos θ - s θ̈ - r θ̇².
    `hinge`: what the hinge of legs that give adds in the world's axes, m/s² (`legs.hinge_moves`).
    """
    g = body[GRAVITY] + hinge[1]
    sine, cosine = np.sin(X[0]), np.cos(X[0])
    across, up = force_at(sine, cosine, X[1], acceleration, g, sensor[UP], sensor[ACROSS])
    return across + hinge[0] * cosine, up + hinge[0] * sine


@part
def out_of_range(X: Array, acceleration: float, hinge: tuple[float, float], body: Array, sensor: Array) -> bool:
    """Return whether gyro or accelerometer would have to show more than they can, noise apart."""
    across, up = specific_force(X, acceleration, hinge, body, sensor)
    return bool(abs(X[1] + sensor[GYRO_BIAS]) > sensor[GYRO_RANGE] or max(abs(across), abs(up)) > sensor[ACCEL_RANGE])


@part
def read_tilt(X: Array, acceleration: float, hinge: tuple[float, float], body: Array, sensor: Array, seed: int,
              sample: int) -> float:
    """Return the lean in rad that the accelerometer shows, counted from the balanced lean.

    The tilt is the angle of the specific force. Near the upright: θ - r θ̈/g (the faster the fall is caught, the more it
    lies).
    """
    across, up = specific_force(X, acceleration, hinge, body, sensor)
    if sensor[ACCEL_NOISE] > 0.0:
        across += sensor[ACCEL_NOISE] * normal(seed, sample, 1)
        up += sensor[ACCEL_NOISE] * normal(seed, sample, 2)
    across = digitised(across, sensor[ACCEL_STEP], sensor[ACCEL_RANGE])
    up = digitised(up, sensor[ACCEL_STEP], sensor[ACCEL_RANGE])
    return float(np.arctan2(-across, up) + sensor[TILT_BIAS] - body[BALANCED])
