"""What sensor noise alone keeps in motion at rest: lean, torque and stored momentum of the closed loop, RMS."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.kalman import sensor_sigma
from balance.design.loop import close, sample_plant
from balance.design.noise import output_rms
from balance.design.records import Design

Array = NDArray[np.float64]

SENSORS = ("tilt", "gyro")


@dataclass(frozen=True)
class NoiseRms:
    """RMS at rest under the sensors' white noise, no limit met; torque is the mean over a sample, taken from the body."""

    lean: float        # rad
    lean_rate: float   # rad/s
    torque: float      # N·m about the line
    momentum: float    # N·m·s about the line


def noise_rms(design: Design) -> NoiseRms | None:
    """Return what noise keeps in motion; None where the law reads no sensor that has noise, or the loop is unstable.

    The closed loop x⁺ = A x + N w with white w: covariance from the discrete Lyapunov equation (`noise.output_rms`).
    Resolution of the sensors is not in it.
    """
    law, plant = design.law, design.plant
    if design.refused or not design.margins.stable or "tilt" not in law.measurements:
        return None
    sigma = sensor_sigma(plant)
    sampled = sample_plant(plant, law.sample_time, law.latency)
    places = [law.measurements.index(name) for name in SENSORS]
    A = close(sampled, law)
    D, B = law.D[places], law.B[:, places]                                # (2,), (k, 2): what noise on a reading does
    N = np.vstack([np.outer(sampled.B, D), B + np.outer(law.E, D)])       # (N + k, 2)
    n = len(plant.model.states)
    rows = np.zeros((4, len(A)))
    rows[0, 0] = rows[1, 1] = 1.0
    rows[3, :n] = plant.momentum_row
    rows[2] = (rows[3] @ A - rows[3]) / law.sample_time                   # mean torque of the coming sample
    through = np.zeros((4, 2))
    through[2] = rows[3] @ N / law.sample_time
    lean, rate, torque, momentum = output_rms(A, N, sigma, rows, through)
    return NoiseRms(float(lean), float(rate), float(torque), float(momentum))
