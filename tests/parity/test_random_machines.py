"""Accelerations of random machines against an independent multibody engine (MuJoCo) at random states."""

from __future__ import annotations

from dataclasses import replace
from math import radians

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.equations import derivative, servo_torque
from balance.kernel.feet import each_foot
from balance.machine.stabilisers import ReactionWheel
from balance.stance.facing import faced_axes
from tests.parity.reduced import reduced
from tests.plant.random_plants import random_plant

TOLERANCE = 1e-8
"""Of the row's largest term: both compute in doubles; a wrong term of the equations shows at 1e-4 and more."""

STATES = 3


def random_state(rng, plant):
    """Return (X, inputs, torque about the line): gimbals to ±70°, leans to ±40°, drives strong enough to follow."""
    units = plant.unit_parameters
    X, inputs = np.zeros(2 + 2 * len(units)), rng.uniform(-1.0, 1.0, len(units))
    X[0], X[1] = rng.uniform(-0.7, 0.7), rng.uniform(-3.0, 3.0)
    for i, row in enumerate(units):
        if row[at.KIND] == at.WHEEL:
            X[2 + 2 * i] = rng.uniform(-400.0, 400.0)
        else:
            X[2 + 2 * i], X[3 + 2 * i] = rng.uniform(-radians(70), radians(70)), rng.uniform(-4.0, 4.0)
            inputs[i] *= 5.0
    return X, inputs, rng.uniform(-20.0, 20.0)


def motion(machine, plant, engine, X, inputs, torque, units):
    """Return joint angles, rates, the kernel's accelerations and what is applied, by the engine's names."""
    dX = np.zeros_like(X)
    derivative(X, inputs, torque, plant.body_parameters, units, dX)
    e_T = plant.stance.R_WT.T @ plant.stance.e_W
    angles, rates, a, applied = {"line": X[0]}, {"line": X[1]}, {"line": dX[1]}, {"line": torque}
    for i, (name, unit) in enumerate(machine.stabilisers.items()):
        x, v, given = X[2 + 2 * i], X[3 + 2 * i], inputs[i]
        if isinstance(unit, ReactionWheel):
            rates[name], a[name], applied[name] = x, dX[2 + 2 * i], given - unit.drag.viscous * x
            continue
        gimbal = f"{name}.gimbal"
        drive = servo_torque(i, X, given, dX[1], units) if units[i, at.KIND] == at.GIMBAL_SERVO else given
        count = 2 if f"{name}.spin.1" in engine.columns else 1
        angles[gimbal], rates[gimbal], a[gimbal] = x, v, dX[3 + 2 * i]
        applied[gimbal] = count * (drive - unit.gimbal.damping * v - unit.gimbal.spring * x)
        s, g, _ = faced_axes(unit, e_T)
        for k, way in enumerate((1.0, -1.0)[:count]):
            # the momentum H = I_s(φ̇ + σ θ̇) is what is held, with no torque about the spin axis
            c, n = np.cos(way * x), np.sin(way * x)
            share, slope = e_T @ (s * c + np.cross(g, s) * n), e_T @ (np.cross(g, s) * c - s * n)
            rates[f"{name}.spin.{k}"] = way * unit.spin_speed - share * X[1]
            a[f"{name}.spin.{k}"] = -slope * way * v * X[1] - share * dX[1]
            applied[f"{name}.spin.{k}"] = 0.0
    return angles, rates, a, applied, dX


def residuals(machine, plant, engine, X, inputs, torque, units):
    """Return each row's |M a + bias − applied| over its largest term, a being the kernel's accelerations."""
    angles, rates, a, applied, _ = motion(machine, plant, engine, X, inputs, torque, units)
    return unbalanced(engine, angles, rates, a, applied)


def unbalanced(engine, angles, rates, a, applied):
    """Return each row's |M a + bias − applied| over its largest term."""
    M, bias = engine.equations(angles, rates)
    terms = np.column_stack([M * [a[n] for n in engine.columns], bias, [-applied[n] for n in engine.columns]])
    return np.abs(terms.sum(axis=1)) / np.abs(terms).max(axis=1)


@pytest.mark.parametrize("block", range(10))
def test_two_hundred_machines(block):
    """Random parts, legs, feet of both kinds; wheels geared in both senses; single flywheels, linked pairs, any axes."""
    for seed in range(20 * block, 20 * block + 20):
        machine, plant = random_plant(seed)
        engine = reduced(machine, plant.stance)
        rng = np.random.default_rng(1000 + seed)
        for _ in range(STATES):
            X, inputs, torque = random_state(rng, plant)
            worst = residuals(machine, plant, engine, X, inputs, torque, plant.unit_parameters)
            assert worst.max() <= TOLERANCE, (seed, dict(zip(engine.columns, worst, strict=True)))


@pytest.mark.parametrize(("entry", "kind", "count"), [
    (at.COUPLING, at.WHEEL, 0), (at.OWN_INERTIA, at.WHEEL, 0), (at.MOMENTUM, at.GIMBAL_TORQUE, 1),
    (at.KAPPA, at.GIMBAL_TORQUE, 1), (at.KAPPA, at.GIMBAL_SERVO, 1), (at.GIMBAL_INERTIA, at.GIMBAL_TORQUE, 1),
    (at.TRANSVERSE, at.GIMBAL_TORQUE, 1), (at.SPIN_HELD, at.GIMBAL_TORQUE, 1), (at.SPIN_HELD, at.GIMBAL_TORQUE, 2),
    (at.E_S0, at.GIMBAL_TORQUE, 2), (at.E_GXS0, at.GIMBAL_SERVO, 2),
    (at.TRANSVERSE, at.GIMBAL_TORQUE, 2)])
def test_one_percent_off_is_seen(entry, kind, count):
    """The twin of every term: one parameter of the kernel's row 1 % off."""
    for seed in range(300):
        machine, plant = random_plant(seed)
        row = plant.unit_parameters[0]
        if row[at.KIND] == kind and row[entry] != 0.0 and row[at.COUNT] == count:
            break
    else:
        pytest.fail("no such machine")
    engine = reduced(machine, plant.stance)
    X, inputs, torque = random_state(np.random.default_rng(7), plant)
    wrong = plant.unit_parameters.copy()
    wrong[0, entry] *= 1.01
    assert residuals(machine, plant, engine, X, inputs, torque, plant.unit_parameters).max() <= TOLERANCE
    assert residuals(machine, plant, engine, X, inputs, torque, wrong).max() > 20 * TOLERANCE


def geared(machine):
    """Return how the machine's wheels are geared: (sense, is the motor's rotor in the wheel's inertia) each."""
    gears = [unit.gear for unit in machine.stabilisers.values() if isinstance(unit, ReactionWheel) and unit.gear]
    return {(gear.sense, gear.includes_rotor) for gear in gears}


def test_the_two_hundred_are_of_every_kind():
    """Without this the tests here could be empty of what they claim."""
    machines = [random_plant(seed)[0] for seed in range(200)]
    kinds = {type(unit).__name__ for machine in machines for unit in machine.stabilisers.values()}
    assert kinds == {"ReactionWheel", "GimballedFlywheel", "ScissoredPair"}
    for sense in ("same", "reversed"):
        for includes in (True, False):
            assert sum((sense, includes) in geared(machine) for machine in machines) >= 5
    assert sum(len(machine.stabilisers) > 1 for machine in machines) > 50


def test_a_rotor_counted_twice_is_seen():
    """The twin: a wheel whose inertia holds the motor's rotor, read as one weighed without it."""
    seen = 0
    for seed in range(60):
        machine, plant = random_plant(seed)
        if not any(includes for _, includes in geared(machine)):
            continue
        units = {name: replace(unit, gear=replace(unit.gear, includes_rotor=False))
                 if isinstance(unit, ReactionWheel) and unit.gear else unit for name, unit in machine.stabilisers.items()}
        engine = reduced(replace(machine, stabilisers=units), plant.stance)
        X, inputs, torque = random_state(np.random.default_rng(7), plant)
        seen += residuals(machine, plant, engine, X, inputs, torque, plant.unit_parameters).max() > 1e3 * TOLERANCE
    assert seen >= 3


def test_a_point_foot_in_place_of_a_ball_is_seen():
    seed = next(s for s in range(50) if random_plant(s)[1].stance.foot_radius > 0.0)
    machine, plant = random_plant(seed)
    engine = reduced(machine, plant.stance)
    X, inputs, torque = random_state(np.random.default_rng(7), plant)
    assert residuals(machine, plant, engine, X, inputs, torque, plant.unit_parameters).max() <= TOLERANCE
    plant.body_parameters[at.FOOT_RADIUS] = 0.0
    assert residuals(machine, plant, engine, X, inputs, torque, plant.unit_parameters).max() > 1e-4


def feet_of_the_engine(plant, engine, lean, angles, rates, a):
    """Return (normal a, normal b, across a, across b, along) from the engine's inverse dynamics of the held trunk.

    The moments the engine gives are about the foot ball's centre and along u and w turned by the lean of what stands there.
    """
    held, r = engine.held(angles, rates, a), plant.stance.foot_radius
    s, c = np.sin(lean), np.cos(lean)
    along, across, normal = held["along"], held["roll"], held["up"]
    yaw = held["yaw"] * c - held["swerve"] * s                             # along the world's u
    swerve = held["yaw"] * s + held["swerve"] * c - r * along              # along w, about the contact: r u × R
    normal_b, across_b = swerve / plant.stance.length, -yaw / plant.stance.length
    return np.array([normal - normal_b, normal_b, across - across_b, across_b, along])


@pytest.mark.parametrize("block", range(10))
def test_each_foot_s_load(block):
    """Wheels off the line, gyroscopic couples, products of inertia, slopes and rolling feet, in any combination."""
    twin = 0
    for seed in range(20 * block, 20 * block + 20):
        machine, plant = random_plant(seed)
        engine = reduced(machine, plant.stance)
        X, inputs, torque = random_state(np.random.default_rng(2000 + seed), plant)
        units = plant.unit_parameters
        angles, rates, a, _, dX = motion(machine, plant, engine, X, inputs, torque, units)
        expected = feet_of_the_engine(plant, engine, X[0], angles, rates, a)
        # a push about the line is no force: a pure torque that the engine leaves out as the kernel does
        found = np.array(each_foot(X, dX, 0.0, plant.body_parameters, units))
        assert np.abs(found - expected).max() <= TOLERANCE * np.abs(expected).max(), (seed, found, expected)
        off = units.copy()
        off[:, [at.COUPLING_U, at.S0_W, at.GXS0_W, at.AXIS_U]] *= 1.01
        wrong = np.array(each_foot(X, dX, 0.0, plant.body_parameters, off))
        twin += np.abs(wrong - expected).max() > 1e-5 * np.abs(expected).max()
    assert twin > 10                    # the twins: 1 % off in axes square to the line shows on most machines
