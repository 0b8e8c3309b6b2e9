"""Legs that give in the linear model: against the kernel's own Jacobian, critical stiffness, the limit of stiff legs."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.linalg import expm

from balance.base.errors import InputError
from balance.kernel import layout as at
from balance.kernel.equations import derivative
from balance.machine.legs import LegCompliance
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.plant.legs import balance_on, bound_scales
from balance.plant.statespace import to_statespace
from balance.simulate.setup import kernel_units
from balance.stance.build import build_stance
from tests.plant.random_plants import random_plant_on_legs
from tests.plant.test_linear import STEP, TOLERANCE


def numeric(plant):
    """Return A, [B, trunk, legs] by central differences about the balance, and the rates there."""
    units = kernel_units(plant)[: len(plant.units) + 1]
    body, k = plant.body_parameters, len(plant.units)
    kept = [0, 1] + [2 + 2 * i + j for i in range(k) for j in range(1 if units[i, at.KIND] == at.WHEEL else 2)]
    kept += [3 + 2 * k, 2 + 2 * k]                                         # legs' lean, then its rate
    psi, chi = balance_on(body, units[-1])
    n = len(kept)

    def rates(z):
        X, out = np.zeros(2 + 2 * len(units)), np.zeros(2 + 2 * len(units))
        X[0], X[3 + 2 * k] = psi, chi
        X[kept] += z[:n]
        derivative(X, np.append(z[n:n + k], z[n + k + 1]), z[n + k], body, units, out)
        return out[kept]

    size = n + k + 2
    slopes = np.column_stack([(rates(STEP * c) - rates(-STEP * c)) / (2 * STEP) for c in np.eye(size)])
    return slopes, rates(np.zeros(size))


@pytest.mark.parametrize("block", range(5))
def test_the_linear_model_is_the_kernel_s_jacobian(block):
    for seed in range(20 * block, 20 * block + 20):
        _, plant = random_plant_on_legs(seed)
        theirs, still = numeric(plant)
        model = plant.model
        ours = np.column_stack([model.A, model.B, model.disturbance, model.on_legs])
        assert model.states[-2:] == ("legs_lean", "legs_lean_rate")
        assert np.abs(still).max() <= 1e-10 * max(plant.unstable_pole, plant.pole) ** 2, seed
        # rounding of a central difference stands against the largest entry of a row, which stiff legs make large
        least = 1e-6 * np.abs(theirs).max(axis=1, keepdims=True) + 1e-300
        assert (np.abs(ours - theirs) / np.maximum(np.abs(theirs), least)).max() <= TOLERANCE, seed
        off = np.abs(1.001 * ours - theirs) / np.maximum(np.abs(theirs), least)
        assert off.max() > 5e-4                                            # the twin


def rig(**give):
    machine = read_machine("plants/bench-rig.yaml")
    machine = replace(machine, leg_compliance=LegCompliance(**give) if give else None)
    return build_plant(machine, build_stance(machine, "line"))


@pytest.mark.parametrize(("share", "count"), [(0.97, 2), (1.03, 1)])
def test_two_poles_are_unstable_below_the_critical_stiffness(share, count):
    """k_crit = m g c L/(L + c), the agreement's; c = 0.13 m, L = 0.15 m here."""
    critical = 3.2 * 9.80665 * 0.13 * 0.15 / 0.28
    plant = rig(height=0.15, stiffness=share * critical)
    assert plant.legs.critical == pytest.approx(critical, rel=1e-12)
    assert len(plant.legs.unstable) == count


def test_stiff_legs_are_the_limit():
    """Everything that the law and the bounds use goes to the stiff machine's as 1/k."""
    stiff = rig()
    away = []
    for k in (1e4, 1e5):
        plant = rig(height=0.15, stiffness=k)
        ours, theirs = plant.bounds, stiff.bounds
        away.append([plant.unstable_pole / stiff.unstable_pole - 1.0, ours.lean / theirs.lean - 1.0,
                     ours.lean_rate / theirs.lean_rate - 1.0, ours.impulse / theirs.impulse - 1.0])
    # the drag of the rig's bearings is in the pole of the compliant machine's bounds and not in the stiff one's √(G/J)
    soft, hard = np.array(away)
    assert 0 < hard[0] < 0.2 * soft[0] < 1e-4
    assert np.abs(hard[1:]).max() < 0.01
    assert plant.for_law.model.states == stiff.model.states
    np.testing.assert_array_equal(plant.for_law.model.A, stiff.model.A)


def test_a_sagging_machine_balances_further_in():
    """With the centre of mass off the line the legs bend: the trunk's own balance moves by the bend, ΔL against k."""
    machine = read_machine("plants/bench-rig.yaml")
    machine = replace(machine, lumped=replace(machine.lumped, offset=0.01))
    stiff = build_plant(machine, build_stance(machine, "line"))
    plant = build_plant(replace(machine, leg_compliance=LegCompliance(0.15, 60.0)), stiff.stance)
    psi, chi = balance_on(plant.body_parameters, plant.legs_parameters)
    weight = 3.2 * machine.gravity
    # moments about the hinge, then about the line, written out: nothing of the kernel
    assert weight * (0.13 * np.sin(psi) + 0.01 * np.cos(psi)) == pytest.approx(60.0 * (psi - chi), abs=1e-12)
    assert weight * (0.15 * np.sin(chi) + 0.13 * np.sin(psi) + 0.01 * np.cos(psi)) == pytest.approx(0.0, abs=1e-12)
    assert plant.balanced_lean == psi
    assert abs(psi - stiff.balanced_lean) > 1e-3


@pytest.mark.parametrize("height", [0.28, 0.4])
def test_a_hinge_above_the_centre_of_mass_is_refused(height):
    with pytest.raises(InputError, match="below the centre of mass"):
        rig(height=height, stiffness=100.0)


def test_a_point_mass_cannot_turn_on_a_hinge():
    machine = read_machine("plants/bench-rig.yaml")
    machine = replace(machine, lumped=replace(machine.lumped, inertia=3.2 * 0.28**2),
                      leg_compliance=LegCompliance(0.15, 100.0))
    with pytest.raises(InputError, match="inertia about its own centre"):
        build_plant(machine, build_stance(machine, "line"))


@pytest.mark.parametrize("start", ["lean", "lean_rate", "impulse"])
def test_the_bound_is_where_full_torque_just_turns_the_fall(start):
    """The linear model on soft legs under all the torque for ever, by exponentials: 1 % below comes back, above not."""
    plant = rig(height=0.15, stiffness=25.0, damping=0.3)
    model, torque = plant.model, 0.5
    p = plant.unstable_pole
    _, lean, rate, moment = bound_scales(model.A, model.disturbance, model.on_legs, 0.15 / 0.28, plant.stiff.pole)
    n = len(model.states)
    piece = np.zeros(n)
    piece[[0, n - 2] if start == "lean" else [1, n - 1]] = 1.0
    share = 0.15 / 0.28
    x0 = {"lean": lean * piece, "lean_rate": rate * piece,
          "impulse": moment * ((1 - share) * model.disturbance + share * model.on_legs)}[start] * torque / p
    A = np.block([[model.A, -torque * model.disturbance[:, None]], [np.zeros((1, n + 1))]])
    for part, back in ((0.99, True), (1.01, False)):
        end = expm(A * 3.0) @ np.append(part * x0, 1.0)                     # e^{3 p} = 5e6: the mode alone is left
        assert (end[0] < 0.0) == back


def test_the_state_space_names_the_legs():
    plant = rig(height=0.15, stiffness=25.0, damping=0.3)
    model = to_statespace(plant)
    assert model.state_labels == ["lean", "lean_rate", "wheel_speed", "legs_lean", "legs_lean_rate"]
    assert sorted(model.poles().real)[-1] == pytest.approx(plant.unstable_pole)
