"""Several units under one command about the line; units square to it; the names the model carries."""

from __future__ import annotations

from dataclasses import replace
from math import inf

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.equations import derivative
from balance.machine.machine import Lumped, Machine
from balance.machine.motors import Gear, Motor
from balance.machine.stabilisers import Drag, Gimbal, ReactionWheel, Rotor, ScissoredPair
from balance.plant.build import build_plant
from balance.plant.sharing import LEVELLING_TIME, line_torque_per_input
from balance.plant.statespace import to_statespace
from balance.stance.build import build_stance
from tests.plant.random_plants import random_plant


def rig(**stabilisers):
    """Return the plant of a body by three numbers with any stabilisers; the line is the trunk's x."""
    motor = Motor(torque_constant=0.05, resistance=0.3, peak_current=12.0, continuous_current=5.0, rotor_inertia=2e-5)
    machine = Machine(1, "rig", stabilisers, lumped=Lumped(5.0, 0.4, 0.9), motors={"m": motor})
    return build_plant(machine, build_stance(machine, "line"))


def wheel(axis=(1.0, 0.0, 0.0), spin=3e-3, gear=None, limit=inf):
    return ReactionWheel(rotor=Rotor(spin=spin), motor="m", axis=axis, gear=gear, torque_limit=limit, speed_limit=400.0)


def pair(**more):
    gimbal = Gimbal(angle_limit=1.0, rate_limit=4.0, torque_limit=5.0, inertia=1e-4, **more)
    return ScissoredPair(rotor=Rotor(mass=0.3, spin=5e-4, transverse=3e-4), spin_speed=900.0, gimbal=gimbal)


THREE = {"a": wheel(), "b": wheel((0.6, 0.8, 0.0), 2e-3, Gear(3.0, "reversed")),
         "c": wheel((-0.8, 0.0, 0.6), 4e-3, limit=0.2)}


def accelerations(plant, inputs, speeds=None):
    k = len(plant.units)
    X, out = np.zeros(2 + 2 * k), np.zeros(2 + 2 * k)
    X[0] = plant.balanced_lean
    if speeds is not None:
        X[2::2] = speeds
    derivative(X, inputs, 0.0, plant.body_parameters, plant.unit_parameters, out)
    return out


def test_shares_give_one_torque_about_the_line():
    """By the kernel: J_rest θ̈ = −v, whatever the axes, gears and limits."""
    plant = rig(**THREE)
    gains = line_torque_per_input(plant.unit_parameters)
    assert gains @ plant.allotment == pytest.approx(1.0, rel=1e-12)
    for v in (0.3, -0.7):
        assert accelerations(plant, plant.allotment * v)[1] == pytest.approx(-v / plant.inertia_free, rel=1e-12)
    # the twin: equal inputs do not add up to v
    assert accelerations(plant, np.full(3, 1 / 3))[1] != pytest.approx(-1.0 / plant.inertia_free, rel=0.05)


def test_all_wheels_are_limited_together():
    """At the plant's own torque limit every wheel stands at its own."""
    plant = rig(**THREE)
    share = np.abs(plant.allotment) * plant.torque_limit
    assert share == pytest.approx([u.input_limit for u in plant.units], rel=1e-12)
    assert plant.units[2].input_limit == 0.2


def test_random_machines_share_one_torque():
    several = 0
    for seed in range(60):
        _, plant = random_plant(seed)
        gains = line_torque_per_input(plant.unit_parameters)
        if len(plant.units) < 2 or not gains.any():
            continue
        several += 1
        assert gains @ plant.allotment == pytest.approx(1.0, rel=1e-9), seed
        assert np.abs(gains @ plant.levelling).max() <= 1e-12 * max(np.abs(plant.levelling).max(), 1.0), seed
    assert several >= 20


def test_levelling_moves_no_torque_and_levels():
    """The lean does not feel it, and what is off the common direction dies with the stated time constant."""
    plant = rig(**THREE)
    rng = np.random.default_rng(5)
    x = np.concatenate([np.zeros(2), rng.uniform(-300, 300, 3)])
    inputs = -plant.levelling @ x
    assert np.abs(inputs).max() > 0.1
    assert abs(accelerations(plant, inputs, x[2:])[1]) <= 1e-12 * np.abs(inputs).max() / plant.inertia_free
    own = plant.unit_parameters[:, at.OWN_INERTIA]
    decay = np.sort(np.linalg.eigvals(-plant.levelling[:, 2:] / own[:, None]).real)
    assert decay == pytest.approx([-1 / LEVELLING_TIME, -1 / LEVELLING_TIME, 0.0], abs=1e-9)
    # speeds that the common command itself makes are left alone
    along = plant.allotment / own
    assert np.abs(plant.levelling[:, 2:] @ along).max() <= 1e-12
    # the twin: braking one wheel alone is felt
    alone = np.array([inputs[0], 0.0, 0.0])
    assert abs(accelerations(plant, alone, x[2:])[1]) > 0.01


def test_two_axes_in_line_share_by_what_they_can_give():
    plant = rig(a=wheel(), b=wheel(limit=0.1))
    assert plant.allotment[0] / plant.allotment[1] == pytest.approx(0.6 / 0.1, rel=1e-12)   # 0.05 N·m/A × 12 A


@pytest.mark.parametrize(("square", "tilted"), [
    (wheel((0.0, 1.0, 0.0)), wheel((1e-3, 1.0, 0.0))), (wheel((0.0, 0.0, 1.0)), wheel((0.0, -1e-3, 1.0)))])
def test_a_wheel_square_to_the_line_does_not_act(square, tilted):
    plant = rig(a=square)
    assert not plant.acts
    assert plant.torque_limit == plant.momentum_capacity == plant.bounds.lean == 0.0
    assert np.abs(plant.model.B[1]).max() == 0.0
    assert plant.unstable_pole == pytest.approx(plant.pole, rel=1e-9)
    assert rig(a=replace(tilted, axis=(tilted.axis[0] or -tilted.axis[1], *tilted.axis[1:]))).acts      # the twin
    assert rig(a=square, b=wheel()).acts
    assert rig(a=square, b=wheel()).allotment[0] == 0.0


def test_a_pair_whose_torque_lies_across_does_not_act():
    across = replace(pair(), spin_axis=(1.0, 0.0, 0.0), gimbal_axis=(0.0, 0.0, 1.0))
    assert not rig(a=across).acts
    assert rig(a=pair()).acts


def test_names_in_control_s_own_type():
    """One unit has short names, several carry theirs; the last input is the disturbance."""
    one = to_statespace(rig(w=wheel()))
    assert one.state_labels == ["lean", "lean_rate", "wheel_speed"]
    assert one.input_labels == ["wheel_torque", "disturbance"]
    assert one.output_labels == one.state_labels
    assert one.name == "line"
    plant = rig(w=replace(wheel(), drag=Drag(viscous=1e-4)), g=pair(drive="position servo"), t=pair(drive="torque motor"))
    many = to_statespace(plant)
    assert many.state_labels == ["lean", "lean_rate", "w_wheel_speed", "g_gimbal_angle", "g_gimbal_rate", "t_gimbal_angle",
                                 "t_gimbal_rate"]
    assert many.input_labels == ["w_wheel_torque", "g_gimbal_rate_command", "t_gimbal_torque", "disturbance"]
    assert many.output_labels == many.state_labels
    assert plant.model.states[2] == "w.wheel_speed"                 # our own names keep the dot
    assert np.array_equal(many.A, plant.model.A)
    assert np.array_equal(many.B[:, :-1], plant.model.B)
    assert np.array_equal(many.B[:, -1], plant.model.disturbance)
    # a constant torque about the line speeds the lean up by 1/J_rest: the column is the one it says it is
    assert plant.model.disturbance[1] == pytest.approx(1.0 / plant.inertia_free, rel=1e-12)


def test_momentum_row_is_what_the_kernel_stores():
    """dq/dt = T along the linear model: q̇ = row (A x + B u) at the balanced lean, all units at rest."""
    plant = rig(**THREE)
    u = np.array([0.2, -0.1, 0.05])
    taken = line_torque_per_input(plant.unit_parameters) @ u
    assert plant.momentum_row @ plant.model.B @ u == pytest.approx(taken, rel=1e-12)
    full = np.zeros(5)
    senses = np.sign(plant.unit_parameters[:, at.COUPLING])
    full[2:] = senses * [unit.speed_limit for unit in plant.units]
    assert plant.momentum_row @ full == pytest.approx(plant.momentum_capacity, rel=1e-12)
