"""The linear model about the balanced lean, in closed form: M a = F x + B u, solved for the accelerations.

Rows and columns of M: θ̈, then one acceleration per unit (Ω̇ or γ̈), then the legs' where they give.
Coulomb drag is left out (it has no slope).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.plant.legs import add_legs
from balance.plant.record import LinearModel

Array = NDArray[np.float64]

LEGS_STATES = ("legs_lean", "legs_lean_rate")


def linear_model(body: Array, units: Array, names: tuple[str, ...], stiffness: float, inertia: float,
                 legs: Array | None = None) -> LinearModel:
    """Return the model of a machine from the kernel's arrays.

    `body` (BODY_SIZE,), `units` (k, UNIT_SIZE), `stiffness` G in N·m/rad and `inertia` in kg·m²: about the line at the
    balanced lean, wheels locked, without the gimballed rotors' own rotation; `legs` (UNIT_SIZE,): the row of legs that give.
    """
    states, first = _states(units, names, legs is not None)
    n, k, rows = len(states), len(units), len(units) + (1 if legs is None else 2)
    M, F = np.zeros((rows, rows)), np.zeros((rows, n))                  # accelerations; forces from states
    U, d = np.zeros((rows, k)), np.eye(rows)[:, [0, -1]]                # torques on trunk and (last row) legs
    M[0, 0], F[0, 0], F[0, 1] = inertia, stiffness, -body[at.BODY_DRAG]
    for i, row in enumerate(units):
        _add_unit(1 + i, first[i], row, M, F, U)
    if legs is not None:
        add_legs(body, legs, M, F)
    a, b, c = np.linalg.solve(M, F), np.linalg.solve(M, U), np.linalg.solve(M, d)
    A, B, E = np.zeros((n, n)), np.zeros((n, k)), np.zeros((n, 2))
    A[0, 1] = 1.0
    A[1], B[1], E[1] = a[0], b[0], c[0]
    for i, row in enumerate(units):
        last = first[i] if row[at.KIND] == at.WHEEL else first[i] + 1
        if row[at.KIND] != at.WHEEL:
            A[first[i], last] = 1.0
        A[last], B[last], E[last] = a[1 + i], b[1 + i], c[1 + i]
    if legs is None:
        return LinearModel(states, _inputs(units, names), A, B, E[:, 0])
    A[-2, -1] = 1.0
    A[-1], B[-1], E[-1] = a[-1], b[-1], c[-1]
    return LinearModel(states, _inputs(units, names), A, B, E[:, 0], E[:, 1])


def _add_unit(i: int, x: int, row: Array, M: Array, F: Array, U: Array) -> None:
    """Write unit i's row of M, F, U; its first state stands at x."""
    if row[at.KIND] == at.WHEEL:
        M[0, i] = M[i, 0] = row[at.COUPLING]
        M[i, i], U[i, i - 1], F[i, x] = row[at.OWN_INERTIA], 1.0, -row[at.VISCOUS]
        return
    count, H, slope = row[at.COUNT], row[at.MOMENTUM], row[at.E_GXS0]
    M[0, 0] += count * (row[at.TRANSVERSE] - (row[at.TRANSVERSE] - row[at.SPIN_HELD]) * row[at.E_S0] ** 2)
    F[0, x + 1] = -count * H * slope
    coupling = row[at.KAPPA] * row[at.GIMBAL_INERTIA] if count == 1 else 0.0
    M[0, i] = coupling
    if row[at.KIND] == at.GIMBAL_SERVO:                                 # the servo imposes its own acceleration
        M[i, i], U[i, i - 1], F[i, x + 1] = 1.0, row[at.RATE_LAG], -row[at.RATE_LAG]
        return
    M[i, 0], M[i, i], U[i, i - 1] = coupling, row[at.GIMBAL_INERTIA], 1.0
    F[i, 1], F[i, x], F[i, x + 1] = H * slope, -row[at.GIMBAL_SPRING], -row[at.GIMBAL_DAMPING]


def _states(units: Array, names: tuple[str, ...], legs: bool) -> tuple[tuple[str, ...], list[int]]:
    """Return the state names and the index of each unit's first state."""
    states, first = ["lean", "lean_rate"], []
    for row, name in zip(units, names, strict=True):
        first.append(len(states))
        own = ["wheel_speed"] if row[at.KIND] == at.WHEEL else ["gimbal_angle", "gimbal_rate"]
        states += [_named(name, word, names) for word in own]
    return (*states, *(LEGS_STATES if legs else ())), first


def _inputs(units: Array, names: tuple[str, ...]) -> tuple[str, ...]:
    words = {at.WHEEL: "wheel_torque", at.GIMBAL_TORQUE: "gimbal_torque", at.GIMBAL_SERVO: "gimbal_rate_command"}
    return tuple(_named(name, words[int(row[at.KIND])], names) for row, name in zip(units, names, strict=True))


def _named(name: str, word: str, names: tuple[str, ...]) -> str:
    return word if len(names) == 1 else f"{name}.{word}"
