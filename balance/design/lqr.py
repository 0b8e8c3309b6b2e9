"""Discrete LQR that knows hold, latency and actuator lag: K from the Riccati equation of the sampled, delayed plant.

Cost Σ(xᵀQx + vᵀRv) over samples, Q and R as given; lag and past-command states weigh nothing, but are fed back.
Fails (a refusal, not an exception) where nothing can be stabilised.  Size: Riccati of order N ≈ 5 to 12, milliseconds.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_discrete_are

from balance.design.command import command_unit, output_limit
from balance.design.law import Law
from balance.design.loop import SampledPlant
from balance.goal.goal import Allow, LqrControl
from balance.plant.record import Plant

Array = NDArray[np.float64]


def lqr_gain(A: Array, B: Array, Q: Array, R: Array) -> tuple[Array, Array]:
    """Return K (m, n) and the Riccati solution P (n, n); raises numpy.linalg.LinAlgError where there is none.

    K = (R + BᵀPB)⁻¹BᵀPA (Anderson & Moore, "Optimal Control").
    """
    P = np.asarray(solve_discrete_are(A, B, Q, R), dtype=np.float64)
    return np.asarray(np.linalg.solve(R + B.T @ P @ B, B.T @ P @ A), dtype=np.float64), P


def riccati_residual(A: Array, B: Array, Q: Array, R: Array, P: Array) -> float:
    """Return the largest entry of AᵀPA − P − AᵀPB(R + BᵀPB)⁻¹BᵀPA + Q relative to Q's largest."""
    K = np.linalg.solve(R + B.T @ P @ B, B.T @ P @ A)
    return float(np.abs(A.T @ P @ A - P - A.T @ P @ B @ K + Q).max() / np.abs(Q).max())


def weights(plant: Plant, control: LqrControl) -> tuple[Array, float]:
    """Return Q (n, n) on the model's states and R on the line command v.

    From `allow` (Bryson's rule: 1/largest², momentum through the stored-momentum row) or from explicit diagonals, where
    the input's weight counts for each unit's own input.
    """
    n = len(plant.model.states)
    if control.weights is not None:
        return np.diag(control.weights.states), control.weights.input * float(plant.allotment @ plant.allotment)
    allow = control.allow
    assert allow is not None
    Q = np.zeros((n, n))
    Q[0, 0], Q[1, 1] = allow.lean**-2, allow.lean_rate**-2
    Q += np.outer(plant.momentum_row, plant.momentum_row) / allow.momentum**2
    return Q, _input_weight(plant, allow, Q)


def _input_weight(plant: Plant, allow: Allow, Q: Array) -> float:
    """Return R on v; a torque-driven gimbal's allowed line torque weighs its gimbal rate in Q (changed in place)."""
    torque = allow.torque if allow.torque is not None else plant.torque_limit
    if len(plant.units) > 1:
        return torque**-2
    unit = plant.units[0]
    if unit.kind == "reaction wheel":
        return (torque * unit.input_limit / unit.torque_limit) ** -2
    rate = allow.gimbal_rate if allow.gimbal_rate is not None else torque / abs(plant.momentum_row[2])
    if unit.drive == "rate":
        return rate**-2
    Q[3, 3] += rate**-2
    return unit.input_limit**-2


def lqr_law(plant: Plant, sampled: SampledPlant, control: LqrControl) -> Law:
    """Return the LQR law; raises numpy.linalg.LinAlgError where the loop cannot be stabilised."""
    if control.trim_time is not None:
        return trimming_law(plant, sampled, control, control.trim_time)
    n, N = len(plant.model.states), len(sampled.states)
    Q = np.zeros((N, N))
    Q[:n, :n], R = weights(plant, control)
    K, residual = _solved(sampled.A, sampled.B, Q, R)                     # (N,)
    return replace(_law(plant, sampled, K), residual=residual)


def _solved(A: Array, b: Array, Q: Array, R: float) -> tuple[Array, float]:
    """Return (K (N,), how well its Riccati equation is solved) for a single input."""
    B, weight = b[:, None], np.array([[R]])
    K, P = lqr_gain(A, B, Q, weight)
    return K[0], riccati_residual(A, B, Q, weight, P)


def _law(plant: Plant, sampled: SampledPlant, K: Array) -> Law:
    """Return the law u = −K x on the sampled plant's states, lag and past commands as its memory."""
    n, N = len(plant.model.states), len(sampled.states)
    return Law(
        kind="lqr", sample_time=sampled.sample_time, latency=sampled.latency, measurements=plant.model.states,
        memory=sampled.states[n:], A=sampled.A[n:, n:], B=sampled.A[n:, :n], E=sampled.B[n:], C=-K[n:N], D=-K[:n],
        output_limit=output_limit(plant), allotment=plant.allotment, levelling=plant.levelling,
        input_limits=np.array([unit.input_limit for unit in plant.units]), unit=command_unit(plant), K=K,
        states=sampled.states, gains={})


TRIM = "momentum_integral"
"""Name of the integral's place in the law's memory, N·m·s²."""


def trimming_law(plant: Plant, sampled: SampledPlant, control: LqrControl, trim_time: float) -> Law:
    """Return the LQR law that also feeds back s, the integral of stored momentum: s⁺ = s + T q.

    At rest q must be zero for s to stand still, so a misread tilt or a centre of mass that is off stands in s instead of in
    the wheel.  Weight of s by Bryson's rule from allowed momentum × trim time.  Back-calculation with a quarter of the
    trim time keeps s from winding up while v is clipped (Åström & Hägglund, "PID Controllers", from memory).
    """
    n, N, T = len(plant.model.states), len(sampled.states), sampled.sample_time
    assert control.allow is not None
    row = np.zeros(N)
    row[:n] = plant.momentum_row
    A = np.block([[sampled.A, np.zeros((N, 1))], [T * row[None, :], np.ones((1, 1))]])
    Q = np.zeros((N + 1, N + 1))
    Q[:n, :n], R = weights(plant, control)
    Q[N, N] = (control.allow.momentum * trim_time) ** -2
    K, residual = _solved(A, np.append(sampled.B, 0.0), Q, R)             # (N + 1,)
    plain = _law(plant, sampled, K[:N])
    C = np.append(plain.C, -K[N])
    track = min(4.0 * T / trim_time, 1.0) / C[-1]                         # s moves by track (v' − v)
    k = N - n
    grown = np.zeros((k + 1, k + 1))
    grown[:k, :k] = plain.A
    grown[k] = -track * C
    grown[k, k] += 1.0
    return replace(
        plain, memory=(*plain.memory, TRIM), A=grown, B=np.vstack([plain.B, T * plant.momentum_row - track * plain.D]),
        E=np.append(plain.E, track), C=C, K=K, states=(*plain.states, TRIM), residual=residual)
