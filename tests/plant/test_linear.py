"""The closed-form linear model against the kernel's own Jacobian, on random machines of every kind."""

from __future__ import annotations

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.equations import derivative
from balance.plant.linear import linear_model
from tests.plant.random_plants import random_plant

STEP = 1e-4
"""A central difference then errs by STEP²/6 of the third derivative, some 1e-9 of the slope, and by less in rounding."""

TOLERANCE = 1e-6
"""The agreement's; a term left out stands at 1e-3 and more."""


def kernel_model(plant):
    """Return A (n, n), B (n, m) and the disturbance's column (n,) by central differences about the balanced lean."""
    body, units = plant.body_parameters, plant.unit_parameters
    k = len(units)
    kept = [0, 1] + [2 + 2 * i + j for i in range(k) for j in range(1 if units[i, at.KIND] == at.WHEEL else 2)]
    size = 2 + 2 * k

    def rates(x, u, d):
        X, out = np.zeros(size), np.zeros(size)
        X[0] = body[at.BALANCED]
        X[kept] += x
        derivative(X, u, d, body, units, out)
        return out[kept]

    n = len(kept)

    def slope(column):
        ends = [rates(side * column[:n], side * column[n:n + k], side * column[-1]) for side in (STEP, -STEP)]
        return (ends[0] - ends[1]) / (2 * STEP)

    whole = np.column_stack([slope(c) for c in np.eye(n + k + 1)])
    return whole[:, :n], whole[:, n:n + k], whole[:, -1], rates(np.zeros(n), np.zeros(k), 0.0)


def furthest(model, numeric):
    """Return the largest disagreement, each entry against itself or a millionth of its row's largest."""
    worst = 0.0
    for ours, theirs in zip((model.A, model.B, model.disturbance[:, None]), numeric, strict=True):
        least = 1e-6 * np.abs(theirs).max(axis=1, keepdims=True) + 1e-300
        worst = max(worst, float((np.abs(ours - theirs) / np.maximum(np.abs(theirs), least)).max()))
    return worst


@pytest.mark.parametrize("block", range(10))
def test_random_machines(block):
    """Wheels at any axis, geared in both senses, pairs and single flywheels at any axes, both drives, rounded feet."""
    for seed in range(20 * block, 20 * block + 20):
        _, plant = random_plant(seed)
        A, B, d, still = kernel_model(plant)
        assert np.abs(still).max() <= 1e-12 * plant.pole**2, seed          # the balanced lean is an equilibrium
        assert furthest(plant.model, (A, B, d[:, None])) <= TOLERANCE, seed


def test_the_machines_are_of_every_kind():
    """Without this the test above could be empty of what it claims."""
    rows = np.concatenate([random_plant(seed)[1].unit_parameters for seed in range(60)])
    kinds = rows[:, at.KIND]
    assert {at.WHEEL, at.GIMBAL_TORQUE, at.GIMBAL_SERVO} <= set(kinds)
    wheels, gyros = rows[kinds == at.WHEEL], rows[kinds != at.WHEEL]
    assert (wheels[:, at.COUPLING] * wheels[:, at.AXIS_SHARE] > 0).any()
    assert (np.abs(wheels[:, at.COUPLING]) < np.abs(wheels[:, at.AXIS_SHARE]) * wheels[:, at.OWN_INERTIA] * 0.99).any()
    assert {1.0, 2.0} <= set(gyros[:, at.COUNT])
    single = gyros[gyros[:, at.COUNT] == 1.0]
    assert (np.abs(single[:, at.KAPPA]) > 0.3).any()
    assert (np.abs(single[:, at.E_S0]) > 0.3).any()
    assert {0.0, 0.02} <= {random_plant(seed)[1].stance.foot_radius for seed in range(60)}


@pytest.mark.parametrize(("entry", "kind"), [
    (at.COUPLING, at.WHEEL), (at.OWN_INERTIA, at.WHEEL), (at.VISCOUS, at.WHEEL), (at.MOMENTUM, at.GIMBAL_TORQUE),
    (at.KAPPA, at.GIMBAL_TORQUE), (at.GIMBAL_INERTIA, at.GIMBAL_TORQUE), (at.GIMBAL_SPRING, at.GIMBAL_TORQUE),
    (at.GIMBAL_DAMPING, at.GIMBAL_TORQUE), (at.TRANSVERSE, at.GIMBAL_TORQUE), (at.RATE_LAG, at.GIMBAL_SERVO),
    (at.KAPPA, at.GIMBAL_SERVO)])
def test_a_wrong_parameter_is_seen(entry, kind):
    """The twin: a machine whose parameter differs by 1 % (the small transverse inertia by half) has another model."""
    for seed in range(400):
        machine, plant = random_plant(seed)
        row = plant.unit_parameters[0]
        if row[at.KIND] == kind and row[entry] != 0.0 and (kind == at.WHEEL or row[at.COUNT] == 1.0):
            break
    else:
        pytest.fail("no such machine")
    wrong = plant.unit_parameters.copy()
    wrong[0, entry] *= 1.5 if entry == at.TRANSVERSE and kind != at.WHEEL else 1.01
    inertia = plant.body_parameters[at.INERTIA]
    names = tuple(machine.stabilisers)
    right = linear_model(plant.body_parameters, plant.unit_parameters, names, plant.stiffness, inertia)
    other = linear_model(plant.body_parameters, wrong, names, plant.stiffness, inertia)
    assert furthest(other, (right.A, right.B, right.disturbance[:, None])) > 100 * TOLERANCE


def test_constants_come_out_of_the_model():
    """G and p by the kernel's own torque: what gravity gives per lean, and θ̈ per lean with every unit free."""
    for seed in range(20):
        _, plant = random_plant(seed)
        A, _, d, _ = kernel_model(plant)
        assert A[1, 0] / d[1] == pytest.approx(plant.stiffness, rel=TOLERANCE)
        eigen = max(np.linalg.eigvals(A).real.max(), 0.0)
        # eigenvalues of a non-normal A move by more than its entries do
        assert plant.unstable_pole == pytest.approx(eigen, rel=1e-4, abs=1e-6)
