"""The complementary filter in front of a law: what it passes, what it costs, and the accelerometer's lie."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.complementary import complementary
from balance.design.loop import close, sample_plant
from balance.goal.goal import Complementary, PidControl
from balance.kernel.layout import COULOMB
from balance.kernel.sensing import UP
from balance.machine.machine import Imu
from balance.simulate.run import run_trials
from tests.design.machines import goal, plant_of, shipped, wheel_machine


def run(law, readings):
    """Return v over time of a law fed with rows of measurements: plain arithmetic, no limit met."""
    x, out = np.zeros(len(law.memory)), []
    for y in readings:
        v = law.C @ x + law.D @ y
        x = law.A @ x + law.B @ y + law.E * v
        out.append(v)
    return np.array(out)


def lean_only(law):
    """Return a law that only repeats its lean, so that the filter can be seen alone."""
    none = np.zeros(0)
    return replace(law, A=np.zeros((0, 0)), B=np.zeros((0, 3)), E=none, C=none, D=np.array([1.0, 0, 0]), memory=())


def test_consistent_sensors_change_nothing():
    """When tilt is the true lean and the gyro its exact difference, the filtered law gives the law's own command."""
    law = design_stance(plant_of(wheel_machine()), goal()).law
    T, rng = law.sample_time, np.random.default_rng(3)
    rate = np.cumsum(rng.standard_normal(400)) * 1e-2
    lean = np.cumsum(rate) * T                                         # lean[k] = lean[k-1] + T rate[k]
    states = np.column_stack([lean, rate, rng.standard_normal(400)])
    assert run(complementary(law, 0.3), states) == pytest.approx(run(law, states), rel=1e-9, abs=1e-9)
    biased = states + np.array([0.0, 0.01, 0.0])
    assert np.abs(run(complementary(law, 0.3), biased) - run(law, states)).max() > 1e-3          # the twin


def test_filter_splits_at_the_crossover():
    """Tilt alone passes slow changes, the gyro alone fast ones, equally at the crossover (−3 dB each, first order)."""
    law = design_stance(plant_of(wheel_machine()), goal()).law
    bare = lean_only(law)
    filtered = complementary(bare, 0.5)
    z = np.exp(2j * np.pi * 0.5 * law.sample_time)
    tilt = filtered.D[0] + filtered.C[0] / (z - filtered.A[0, 0]) * filtered.B[0, 0]
    assert abs(tilt) == pytest.approx(np.sqrt(0.5), rel=5e-3)          # sampling moves it by half of ω T
    constant = run(filtered, np.tile([0.01, 0.0, 0.0], (3000, 1)))
    assert constant[-1] == pytest.approx(0.01, rel=1e-6)


def test_gyro_bias_leaves_bias_over_crossover():
    """A standing gyro bias b becomes a lean error of about b/ω_c (references 13.02 uses τ b)."""
    law = design_stance(plant_of(wheel_machine()), goal()).law
    bare = lean_only(law)
    out = run(complementary(bare, 0.25), np.tile([0.0, 0.002, 0.0], (8000, 1)))
    assert out[-1] == pytest.approx(0.002 / (2 * np.pi * 0.25), rel=2e-3)


def test_the_accelerometer_lies_while_it_accelerates():
    """Trap 8: higher above the line the tilt lies more; at a crossover of 1 Hz that costs most of the margin."""
    at = {}
    for height in (0.0, 0.25):
        machine = replace(wheel_machine(), imu=Imu(at=(0.0, 0.0, height)))
        plant = plant_of(machine)
        slow, quick = (design_stance(plant, goal(estimator=Complementary(c))).margins for c in (0.25, 1.0))
        at[height] = slow.disk, quick.disk
    assert at[0.25][1] < 0.3 * at[0.0][1]
    assert at[0.25][0] > 0.5 * at[0.0][0]


@pytest.mark.parametrize(("name", "stance", "control", "lever"), [
    ("bench-rig", "line", None, 1.0), ("scout-wheels", "on-fore-left", None, 1.0),
    ("quay-gyros", "on-left-right", None, 1.0),
    ("bench-rig-pid", "line", PidControl(), 0.0)])
def test_the_linear_loop_is_what_the_simulator_does(name, stance, control, lever):
    """Small, noise-free recovery through tilt and gyro in the nonlinear kernel against the closed-loop matrix."""
    plant, g = shipped(name, stance, estimator=Complementary(0.2))
    g = replace(g, control=control or g.control)
    quiet = np.array(plant.sensor_parameters)
    quiet[2:8] = 0.0                                                    # no bias, no noise, no counts
    quiet[UP] *= lever
    dragless = plant.unit_parameters.copy()
    if plant.units[0].kind == "reaction wheel":
        dragless[:, COULOMB] = 0.0                                      # Coulomb drag is not in the matrix
    plant = replace(plant, sensor_parameters=quiet, unit_parameters=dragless)
    g = replace(g, loop=replace(g.loop, jitter=0.0))                    # nor is any jitter
    design = design_stance(plant, g)
    trial = next(t for t in g.trials.values() if t.start)
    small = replace(trial, start=replace(trial.start, lean=1e-4, toward="outward"), lasts=1.0)
    result = run_trials(design, replace(g, trials={"small": small}), None, True)[0]
    sampled = sample_plant(plant, design.law.sample_time, design.law.latency)
    x = np.zeros(len(sampled.A) + len(design.law.memory))
    x[0] = 1e-4
    x[len(sampled.A) + design.law.memory.index("lean_estimate")] = 1e-4
    closed, lean = close(sampled, design.law), []
    for _ in range(len(result.trace.lean)):
        lean.append(x[0])
        x = closed @ x
    # sine and the tilt's angle deviate with the cube of 1e-4; a wrong row of the sensor shows at 1e-5
    assert np.abs(result.trace.lean - np.array(lean)).max() < 1e-7
    assert np.abs(np.array(lean)).max() < 1.2e-4
