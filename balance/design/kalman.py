"""Steady-state Kalman filter before any law: lean, lean rate, gyro bias and balance offset from gyro and accelerometer.

The body's own motion is the model: it topples about a balance point that nobody has measured, under a torque that is known.
That makes four numbers observable from two sensors::

    lean      counted from where the machine really balances, not from where the file says it does
    lean rate
    b         the gyro's bias: it shows lean rate + b
    o         the balance offset: the accelerometer shows tilt = lean + o − r θ̈/g (trap 8)

A centre-of-mass error and a misread tilt both stand in o; they cannot be told apart from inside, and need not be: with the
lean counted from the true balance the law asks for no standing momentum. Wheel speeds and gimbal angles are measured as
they are; what lies between command and torque is known exactly, for the commands are.

Noise: gyro and accelerometer as the machine file says; an unknown torque on the body (white), and slow drift of b and o.
Prediction and correction of the sampled plant (R. E. Kalman 1960; Anderson & Moore, "Optimal Filtering", from memory).
Fails (LinAlgError) where the Riccati equation has no solution.  While the machine is held (more feet down) it does not fall
as the model says: a filter that went on would take the lean it is held at for its balance. Held, the lean is the
accelerometer's less the offset learned before, the gyro shows its bias, and the offset stays.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_discrete_are

from balance.design.law import Law
from balance.design.loop import SampledPlant
from balance.design.noise import sampled_noise
from balance.goal.goal import Kalman
from balance.kernel.layout import GRAVITY
from balance.kernel.sensing import ACCEL_NOISE, GYRO_NOISE
from balance.plant.record import Plant

Array = NDArray[np.float64]

PREDICTED = "lean_predicted"
MEMORY = (PREDICTED, "lean_rate_predicted", "gyro_bias", "balance_offset")
"""Names of the filter's places in the law's memory: the prediction for the next sample."""

TORQUE_SHARE = 0.01
"""Unknown torque where the file states none: this share of the torque limit about the line, per √Hz."""


@dataclass(frozen=True)
class Filter:
    """ξ⁺ = F ξ + …, y = H ξ + …, with ξ = (lean, lean rate, b, o) and y = (tilt, gyro); L corrects a prediction."""

    F: Array       # (4, 4)
    H: Array       # (2, 4)
    L: Array       # (4, 2)
    P: Array       # (4, 4) covariance of the prediction
    process: Array # (4, 4) per sample
    noise: Array   # (2, 2) per sample

    @property
    def residual(self) -> float:
        """How well P solves F P Fᵀ − F L H P Fᵀ + process − P = 0, largest entry relative to P's."""
        rest = self.F @ (self.P - self.L @ self.H @ self.P) @ self.F.T + self.process - self.P
        return float(np.abs(rest).max() / np.abs(self.P).max())


def kalman_filter(plant: Plant, sampled: SampledPlant, given: Kalman) -> Filter:
    """Return the filter; raises numpy.linalg.LinAlgError where there is none."""
    n, T = len(plant.model.states), sampled.sample_time
    tilt = sampled.rows(("tilt",))[0]
    F = np.eye(4)
    F[:2, :2] = sampled.A[:2, :2]
    H = np.array([[tilt[0], tilt[1], 0.0, 1.0], [0.0, 1.0, 1.0, 0.0]])
    torque = given.unknown_torque if given.unknown_torque is not None else TORQUE_SHARE * plant.torque_limit
    d = plant.model.disturbance[:2]
    process = np.zeros((4, 4))
    process[:2, :2] = sampled_noise(plant.model.A[:2, :2], 0.5 * torque**2 * np.outer(d, d), T)[1]
    process[2, 2], process[3, 3] = given.bias_drift**2 * T, given.offset_drift**2 * T
    assert n >= 2
    noise = np.diag(sensor_sigma(plant) ** 2)
    P = np.asarray(solve_discrete_are(F.T, H.T, process, noise), dtype=np.float64)
    L = np.linalg.solve(H @ P @ H.T + noise, H @ P).T
    return Filter(F, H, np.asarray(L, dtype=np.float64), P, process, noise)


def sensor_sigma(plant: Plant) -> Array:
    """Return one sample's deviations of tilt (rad) and gyro (rad/s), (2,)."""
    sensor = plant.sensor_parameters
    return np.array([sensor[ACCEL_NOISE] / plant.body_parameters[GRAVITY], sensor[GYRO_NOISE]])


def kalman(law: Law, plant: Plant, sampled: SampledPlant, given: Kalman) -> Law:
    """Return the same law behind the filter: it reads `tilt` and `gyro` in place of lean and lean rate."""
    n, k = len(plant.model.states), len(law.memory)
    own = sampled.states[n:]
    shared = law.memory[: len(own)] == own                               # an LQR already remembers what is on its way
    extra = () if shared else own
    size = k + len(extra) + 4
    on_way, guess = np.zeros((len(own), size)), np.zeros((4, size))
    on_way[:, (0 if shared else k) :][:, : len(own)] = np.eye(len(own))
    guess[:, -4:] = np.eye(4)
    found = kalman_filter(plant, sampled, given)
    Xz, Xy = _corrected(found, sampled, n, on_way, guess)
    lean_row = np.vstack([Xy[:2], np.eye(n)[2:]])                         # (n, m): model states from measurements …
    from_memory = np.vstack([Xz[:2], np.zeros((n - 2, size))])            # … and from memory
    A, B, E = np.zeros((size, size)), np.zeros((size, n)), np.zeros(size)
    A[:k, :k], E[:k] = law.A, law.E
    A[:k] += law.B @ from_memory
    B[:k] = law.B @ lean_row
    if extra:
        rows = slice(k, k + len(own))
        A[rows] = sampled.A[n:, n:] @ on_way + sampled.A[n:, :n] @ from_memory
        B[rows], E[rows] = sampled.A[n:, :n] @ lean_row, sampled.B[n:]
    A[-4:] = found.F @ Xz
    B[-4:] = found.F @ Xy
    A[-4:-2] += sampled.A[:2, n:] @ on_way
    B[-4:-2] += np.hstack([np.zeros((2, 2)), sampled.A[:2, 2:n]])
    E[-4:-2] = sampled.B[:2]
    C = np.concatenate([law.C, np.zeros(size - k)]) + law.D @ from_memory
    held_A, held_B = _held(A, B, sampled.sample_time, list(law.measurements))
    names = {"lean": "tilt", "lean_rate": "gyro"}
    return replace(law, held_A=held_A, held_B=held_B, measurements=tuple(names.get(name, name) for name in law.measurements),
                   memory=(*law.memory, *extra, *MEMORY), A=A, B=B, E=E, C=C, D=law.D @ lean_row)


HELD_TIME = 0.5
"""s in which a held machine's gyro is averaged into its bias."""


def _held(A: Array, B: Array, sample_time: float, measurements: list[str]) -> tuple[Array, Array]:
    """Return A and B of the memory while the machine is held: the filter's four rows follow the sensors at rest."""
    held_A, held_B = A.copy(), B.copy()
    held_A[-4:], held_B[-4:] = 0.0, 0.0
    tilt, gyro = measurements.index("lean"), measurements.index("lean_rate")
    share = 1.0 - np.exp(-sample_time / HELD_TIME)
    held_B[-4, tilt], held_A[-4, -1] = 1.0, -1.0                          # lean = tilt − o, lean rate 0
    held_A[-2, -2], held_B[-2, gyro] = 1.0 - share, share                 # the gyro's bias
    held_A[-1, -1] = 1.0                                                  # o stays
    return held_A, held_B


def _corrected(found: Filter, sampled: SampledPlant, n: int, on_way: Array, guess: Array) -> tuple[Array, Array]:
    """Return ξ = Xz z + Xy y after the sample: (4, memory), (4, measurements)."""
    tilt = sampled.rows(("tilt",))[0]
    known_y, known_z = np.zeros((2, n)), np.zeros((2, on_way.shape[1]))
    known_y[0, 2:], known_z[0] = tilt[2:n], tilt[n:] @ on_way             # what the accelerometer shows of known torques
    seen = np.zeros((2, n))
    seen[0, 0] = seen[1, 1] = 1.0
    return guess - found.L @ (found.H @ guess + known_z), found.L @ (seen - known_y)
