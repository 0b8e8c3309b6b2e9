"""The shipped machines' accelerations against an independent multibody engine (MuJoCo) at random states."""

from __future__ import annotations

import mujoco
import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.equations import derivative, servo_torque
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.stance.build import build_stance
from tests.parity.multibody import multibody, rotor_moments

TOLERANCE = 1e-8
"""Of the row's largest term: both compute in doubles; a wrong term of the equations shows at 1e-3 and more."""


def _accelerations(plant, X, inputs, torque):
    out = np.zeros_like(X)
    derivative(X, inputs, torque, plant.body_parameters, plant.unit_parameters, out)
    return out


def _engine(model):
    data = mujoco.MjData(model)
    place = {mujoco.mj_id2name(model, mujoco.mjtObj.mjOBJ_JOINT, j): model.jnt_dofadr[j] for j in range(model.njnt)}
    return data, place


@pytest.mark.parametrize("stance_name", ["on-left-right", "on-fore-right", "on-fore-left"])
def test_wheels_of_the_scout(stance_name):
    machine = read_machine("plants/trellis-scout.yaml")
    stance = build_stance(machine, stance_name)
    plant = build_plant(machine, stance)
    model = multibody(machine, stance)
    data, place = _engine(model)
    rng = np.random.default_rng(41)
    names = list(machine.stabilisers)
    for _ in range(100):
        X = np.concatenate([[rng.uniform(-0.5, 0.5), rng.uniform(-3, 3)],
                            np.column_stack([rng.uniform(-450, 450, 2), np.zeros(2)]).ravel()])
        inputs, torque = rng.uniform(-1.3, 1.3, 2), rng.uniform(-5, 5)
        ours = _accelerations(plant, X, inputs, torque)
        mujoco.mj_resetData(model, data)
        data.qpos[place["line"]], data.qvel[place["line"]] = X[0], X[1]
        data.qfrc_applied[place["line"]] = torque
        for i, name in enumerate(names):
            speed, drag = X[2 + 2 * i], machine.stabilisers[name].drag
            data.qvel[place[name]] = speed
            fade = min(max(speed, -1.0), 1.0)
            data.qfrc_applied[place[name]] = inputs[i] - drag.coulomb * fade - drag.viscous * speed
        mujoco.mj_forward(model, data)
        line = model.opt.gravity[2]
        terms = [plant.stiffness * np.sin(X[0]), torque, 1.3]
        largest = max(abs(t) for t in terms) / plant.inertia_free
        assert line < 0
        assert abs(ours[1] - data.qacc[place["line"]]) <= TOLERANCE * largest
        for i, name in enumerate(names):
            row = max(abs(inputs[i]) / plant.unit_parameters[i, at.OWN_INERTIA], abs(ours[1]))
            assert abs(ours[2 + 2 * i] - data.qacc[place[name]]) <= TOLERANCE * row


@pytest.mark.parametrize("stance_name", ["on-left-right", "on-fore-right", "on-fore-left"])
@pytest.mark.parametrize("servo", [False, True])
def test_gyros_of_the_carrier(stance_name, servo):
    """Pair at gimbal angles to ±70°: torque-driven, and a servo that is given the torque it asks for."""
    machine = read_machine("plants/quay-carrier.yaml")
    stance = build_stance(machine, stance_name)
    plant = build_plant(machine, stance)
    pair = machine.stabilisers["gyros"]
    spin, _ = rotor_moments(pair.rotor)
    model = multibody(machine, stance)
    data, place = _engine(model)
    rng = np.random.default_rng(43)
    unit = plant.unit_parameters[0]
    unit[at.KIND] = at.GIMBAL_SERVO if servo else at.GIMBAL_TORQUE
    unit[at.DRIVE_TORQUE] = np.inf
    for _ in range(100):
        X = np.array([rng.uniform(-0.5, 0.5), rng.uniform(-1, 1), rng.uniform(-1.22, 1.22), rng.uniform(-4, 4)])
        given, torque = rng.uniform(-6, 6), rng.uniform(-20, 20)
        ours = _accelerations(plant, X, np.array([given]), torque)
        drive = servo_torque(0, X, given, ours[1], plant.unit_parameters) if servo else given
        mujoco.mj_resetData(model, data)
        data.qpos[place["line"]], data.qvel[place["line"]] = X[0], X[1]
        data.qfrc_applied[place["line"]] = torque
        share = np.sin(X[2])                                   # σ = e·s, both rotors: H σ adds up
        for k, side in enumerate((1.0, -1.0)):
            gimbal = place[f"gyros.gimbal.{k}"]
            data.qpos[gimbal], data.qvel[gimbal] = side * X[2], side * X[3]
            data.qfrc_applied[gimbal] = side * (drive - pair.gimbal.damping * X[3])
            # momentum is what is held: the speed relative to the frame makes up for what the body's turning adds
            data.qvel[place[f"gyros.spin.{k}"]] = side * (pair.spin_speed - share * X[1])
        mujoco.mj_forward(model, data)
        momentum = spin * pair.spin_speed
        largest = max(abs(2 * momentum * X[3]), abs(torque), plant.stiffness * 0.1) / plant.inertia_free
        assert abs(ours[1] - data.qacc[place["line"]]) <= TOLERANCE * largest
        row = max(abs(momentum * X[1]), abs(drive), 1.0) / unit[at.GIMBAL_INERTIA]
        for k, side in enumerate((1.0, -1.0)):
            assert abs(ours[3] - side * data.qacc[place[f"gyros.gimbal.{k}"]]) <= TOLERANCE * row


def test_a_wrong_sign_is_seen():
    """The twin: the wheel's coupling reversed must not pass the comparison."""
    machine = read_machine("plants/trellis-scout.yaml")
    stance = build_stance(machine, "on-left-right")
    plant = build_plant(machine, stance)
    model = multibody(machine, stance)
    data, place = _engine(model)
    X, inputs = np.array([0.1, 0.0, 0.0, 0.0, 0.0, 0.0]), np.array([0.0, 1.0])
    data.qpos[place["line"]] = X[0]
    data.qfrc_applied[place["side-wheel"]] = 1.0
    mujoco.mj_forward(model, data)
    right = _accelerations(plant, X, inputs, 0.0)[1]
    plant.unit_parameters[:, at.COUPLING] *= -1.0
    wrong = _accelerations(plant, X, inputs, 0.0)[1]
    assert right == pytest.approx(data.qacc[place["line"]], rel=TOLERANCE)
    assert abs(wrong - data.qacc[place["line"]]) > 0.1 * abs(right)


def test_wheel_of_the_bench_rig():
    """Three numbers and a wheel: one hinged body of the stated mass, height and inertia."""
    machine = read_machine("plants/bench-rig.yaml")
    plant = build_plant(machine, build_stance(machine, "line"))
    lumped, wheel = machine.lumped, machine.stabilisers["wheel"]
    spin = wheel.rotor.spin + machine.motors[wheel.motor].rotor_inertia
    own = lumped.inertia - lumped.mass * lumped.height**2
    flat = 1e-9                                                # the wheel's mass is part of the body's three numbers
    model = mujoco.MjModel.from_xml_string(f"""
    <mujoco><option gravity="0 0 -{machine.gravity}"/><compiler inertiafromgeom="false"/><worldbody>
    <body name="body"><joint name="line" type="hinge" axis="1 0 0"/>
    <inertial mass="{lumped.mass}" pos="0 0 {lumped.height}" diaginertia="{own} {own} {own}"/>
    <body name="wheel"><joint name="wheel" type="hinge" axis="1 0 0"/>
    <inertial mass="{flat}" pos="0 0 0" diaginertia="{spin} {spin} {spin}"/></body></body></worldbody></mujoco>""")
    data, place = _engine(model)
    rng = np.random.default_rng(47)
    for _ in range(100):
        X = np.array([rng.uniform(-0.5, 0.5), rng.uniform(-3, 3), rng.uniform(-370, 370), 0.0])
        given, torque = rng.uniform(-0.8, 0.8), rng.uniform(-2, 2)
        ours = _accelerations(plant, X, np.array([given]), torque)
        mujoco.mj_resetData(model, data)
        data.qpos[place["line"]] = X[0]
        data.qvel[:] = [X[1], X[2]]
        fade = min(max(X[2], -1.0), 1.0)
        data.qfrc_applied[:] = [torque - lumped.drag * X[1],
                                given - wheel.drag.coulomb * fade - wheel.drag.viscous * X[2]]
        mujoco.mj_forward(model, data)
        largest = max(abs(torque), abs(given), plant.stiffness * 0.05)
        assert abs(ours[1] - data.qacc[0]) <= TOLERANCE * largest / plant.inertia_free
        assert abs(ours[2] - data.qacc[1]) <= TOLERANCE * largest / spin
