"""Batches of bare machines: pendulums with one or two wheels that start in many ways under one law."""

from __future__ import annotations

import numpy as np

from balance.kernel import layout as at
from balance.kernel import sensing
from balance.simulate.batch import Batch
from tests.kernel import rigs

FELL = 0.5


def noisy_sensor(steps=0.0):
    """Return an inertial sensor 0.2 m above the line with noise and bias; `steps`: rad/s per count of the gyro."""
    out = rigs.ideal_sensor()
    out[sensing.UP], out[sensing.ACROSS], out[sensing.GYRO_BIAS] = 0.2, 0.03, 1e-3
    out[sensing.GYRO_NOISE], out[sensing.ACCEL_NOISE] = 3e-3, 0.02
    out[sensing.GYRO_RANGE], out[sensing.ACCEL_RANGE], out[sensing.GYRO_STEP] = 10.0, 40.0, steps
    return out


def wheels(count):
    """Return one or two unlike wheels that meet their torque, current and voltage limits."""
    first = rigs.wheel(lag=1500.0, volts=24.0, amps=12.0, coulomb=0.01, viscous=1e-5)
    if count == 1:
        return first
    return np.vstack([first, rigs.wheel(lag=1200.0, share=0.7, volts=18.0, amps=9.0, coulomb=0.02, torque=0.5)])


def control(count, places=(0, 1, 2), latency=0.0013):
    """Return a law that balances them; two wheels share one command, lie on limits and level each other."""
    law = rigs.law((-60.0, -10.3, -0.008), latency=latency, limit=0.9, places=places)
    if count == 1:
        return law
    return law._replace(allotment=np.array([0.6, 0.5]), levelling=np.array([[0.0, 0.0, 1e-4], [0.0, 0.0, -1e-4]]),
                        input_limits=np.array([0.5, 0.3]), line_share=np.array([1.0, 0.7]), input_steps=np.zeros(2))


def disturbed(sensor=None, lasts=0.6, longest=0.5e-3):
    """Return a torque that begins and ends between samples, and a blow."""
    return rigs.events(lasts, torques=[(0.1, 0.2303, 0.4, 0.3)], jumps=[(0.15, 0.03, 0.0, np.inf)], longest=longest,
                       sensor=sensor)


def many(n, count, spread=0.1, seed=3):
    """Return n starts and sizes; every third machine is 5 % stiffer than the rest."""
    rng = np.random.default_rng(seed)
    body, units = rigs.body(side=0.3, fell=FELL), wheels(count)
    bodies = np.tile(body, (n, 1))
    bodies[::3, [at.STIFF_SIN, at.STIFF_COS]] *= 1.05
    states = np.zeros((n, 2 + 2 * count))
    states[:, 0] = body[at.BALANCED] + rng.uniform(-spread, spread, n)
    states[:, 1] = rng.uniform(-0.2, 0.2, n)
    return Batch(bodies, np.tile(units, (n, 1, 1)), states, np.zeros((n, 1)), rng.uniform(0.0, 2.0, n),
                 np.arange(n) + 7, np.full(n, 2.0))
