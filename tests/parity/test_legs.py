"""Random machines on legs that give against an independent multibody engine with two hinges in place of one."""

from __future__ import annotations

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.feet import each_foot
from balance.simulate.setup import kernel_units
from tests.parity.reduced import reduced
from tests.parity.test_random_machines import TOLERANCE, feet_of_the_engine, motion, random_state, unbalanced
from tests.plant.random_plants import random_plant_on_legs

STATES = 2


def residuals(machine, plant, engine, X, inputs, torque, units):
    """Return each row's |M a + bias − applied| over its largest term; the last unit row is the legs'."""
    angles, rates, a, applied, dX = motion(machine, plant, engine, X, inputs, torque, units)
    legs, chi, chi_rate = units[-1], X[-1], X[-2]
    spring = legs[at.HINGE_STIFFNESS] * (X[0] - chi) + legs[at.HINGE_DAMPING] * (X[1] - chi_rate)
    angles["legs"], rates["legs"], a["legs"] = chi, chi_rate, dX[-2]
    applied["line"] -= spring
    applied["legs"] = spring + inputs[-1] - plant.body_parameters[at.BODY_DRAG] * chi_rate
    return unbalanced(engine, angles, rates, a, applied)


def on_legs(rng, plant):
    """Return a random state with the legs' own, inputs with a torque on them, torque, and the kernel's rows."""
    units = kernel_units(plant)[: len(plant.units) + 1]                    # no supply, no play
    X, inputs, torque = random_state(rng, plant)
    X = np.concatenate([X, [rng.uniform(-3.0, 3.0), X[0] + rng.uniform(-0.3, 0.3)]])
    return X, np.append(inputs, rng.uniform(-20.0, 20.0)), torque, units


@pytest.mark.parametrize("block", range(5))
def test_hundred_machines(block):
    """Every kind of unit, offsets, slopes; soft and stiff legs; a torque on the trunk and one on the legs."""
    twins = 0
    for seed in range(20 * block, 20 * block + 20):
        machine, plant = random_plant_on_legs(seed)
        engine = reduced(machine, plant.stance)
        rng = np.random.default_rng(1000 + seed)
        for _ in range(STATES):
            X, inputs, torque, units = on_legs(rng, plant)
            worst = residuals(machine, plant, engine, X, inputs, torque, units)
            assert worst.max() <= TOLERANCE, (seed, dict(zip(engine.columns, worst, strict=True)))
        off = units.copy()
        off[-1, at.HINGE] *= 1.001
        twins += residuals(machine, plant, engine, X, inputs, torque, off).max() > 1e-5
    assert twins == 20                  # a hinge 0.1 % too high is seen on every machine


def test_each_foot_s_load_on_legs_that_give():
    """The legs' own motion loads the feet too; forgotten (the twin: the same state without their row) it shows."""
    twins = 0
    for seed in range(40):
        machine, plant = random_plant_on_legs(seed)
        engine = reduced(machine, plant.stance)
        X, inputs, torque, units = on_legs(np.random.default_rng(3000 + seed), plant)
        angles, rates, a, _, dX = motion(machine, plant, engine, X, inputs, torque, units)
        angles["legs"], rates["legs"], a["legs"] = X[-1], X[-2], dX[-2]
        expected = feet_of_the_engine(plant, engine, X[-1], angles, rates, a)
        found = np.array(each_foot(X, dX, 0.0, plant.body_parameters, units))
        assert np.abs(found - expected).max() <= TOLERANCE * np.abs(expected).max(), (seed, found, expected)
        stiff = np.array(each_foot(X[:-2], dX[:-2], 0.0, plant.body_parameters, units[:-1]))
        twins += np.abs(stiff - expected).max() > 1e-3 * np.abs(expected).max()
    assert twins == 40
