"""The inertial sensor as the contact line sees it."""

from __future__ import annotations

from math import inf, sqrt

import numpy as np
from numpy.typing import NDArray

from balance.kernel import sensing
from balance.machine.machine import Machine
from balance.stance.record import Stance

Array = NDArray[np.float64]


def sensor_parameters(machine: Machine, stance: Stance) -> Array:
    """Return the sensor's flat array, (SENSOR_SIZE,): lever arm, bias, noise, resolution and range; ideal without an `imu`.

    One sample's deviation is that of a sensor read at its own rate: one-sided density × √(rate/2).
    """
    sensor = np.zeros(sensing.SENSOR_SIZE)
    sensor[[sensing.GYRO_RANGE, sensing.ACCEL_RANGE]] = inf
    imu = machine.imu
    if imu is None:
        return sensor
    arm_W = stance.R_WT @ np.array(imu.at) + stance.p_WT - stance.p_a_W       # (3,)
    sensor[sensing.UP], sensor[sensing.ACROSS] = arm_W @ stance.u_W, arm_W @ stance.w_W
    sensor[sensing.GYRO_BIAS], sensor[sensing.TILT_BIAS] = imu.gyro_bias, imu.tilt_bias
    sensor[sensing.GYRO_NOISE] = imu.gyro_noise * sqrt(imu.rate / 2.0)
    sensor[sensing.ACCEL_NOISE] = imu.accel_noise * sqrt(imu.rate / 2.0)
    sensor[sensing.GYRO_STEP], sensor[sensing.ACCEL_STEP] = imu.gyro_resolution, imu.accel_resolution
    sensor[sensing.GYRO_RANGE], sensor[sensing.ACCEL_RANGE] = imu.gyro_range, imu.accel_range
    return sensor
