"""The Kalman filter before a law: optimal, observing what it says it observes, and the same loop in the simulator."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import control
import numpy as np
import pytest

from balance.base.errors import InputError
from balance.design.at_rest import noise_rms
from balance.design.build import design_stance
from balance.design.kalman import MEMORY, kalman_filter
from balance.design.loop import actuator_break, close, sample_plant
from balance.design.steady import tolerable_offset
from balance.goal.goal import Complementary, Kalman, PidControl
from balance.goal.read import read_goal
from balance.goal.trials import LiftOff, Start, Trial
from balance.kernel.sensing import ACCEL_NOISE, GYRO_BIAS, GYRO_NOISE, TILT_BIAS
from balance.simulate.run import run_one
from tests.design.machines import linear_leans, shipped

RIG = ("bench-rig-sensed", "line")


def designed(design="bench-rig-sensed", stance="line", given=None, **changes):
    plant, goal = shipped(design, stance, estimator=given or Kalman(), **changes)
    return design_stance(plant, goal), goal


def quiet(design):
    """The same design with sensors that have neither noise nor bias."""
    sensor = design.plant.sensor_parameters.copy()
    sensor[[GYRO_NOISE, ACCEL_NOISE, GYRO_BIAS, TILT_BIAS]] = 0.0
    return replace(design, plant=replace(design.plant, sensor_parameters=sensor))


@pytest.mark.parametrize(("design", "stance"), [RIG, ("scout-wheels", "on-left-right"), ("quay-gyros", "on-fore-left")])
def test_the_gain_is_the_libraries_own(design, stance):
    """python-control's dlqe (its Riccati solver is SLICOT's, by slycot, where that is installed)."""
    plant, goal = shipped(design, stance)
    sampled = sample_plant(plant, 1.0 / goal.loop.rate, goal.loop.latency)
    found = kalman_filter(plant, sampled, Kalman())
    assert found.residual < 1e-9
    gain, P, _ = control.dlqe(found.F, np.eye(4), found.H, found.process, found.noise)
    assert pytest.approx(found.P, rel=1e-6, abs=1e-12) == P
    assert gain == pytest.approx(found.F @ found.L, rel=1e-6, abs=1e-9)
    wrong = replace(found, P=1.01 * found.P)                             # the twin
    assert wrong.residual > 1e-5


def settled(design, tilt_error, gyro_error, seconds=200.0):
    """Run the linear closed loop from rest under constant sensor errors; return (plant state, memory) at the end."""
    law, plant = design.law, design.plant
    sampled = sample_plant(plant, law.sample_time, law.latency)
    A = close(sampled, law)
    errors = np.zeros(len(law.measurements))
    errors[law.measurements.index("tilt")], errors[law.measurements.index("gyro")] = tilt_error, gyro_error
    push = np.concatenate([sampled.B * (law.D @ errors), law.B @ errors + law.E * (law.D @ errors)])
    x = np.linalg.solve(np.eye(len(A)) - A, push)                        # where it comes to rest
    assert np.abs(np.linalg.eigvals(A)).max() < 1.0
    assert seconds > 0.0
    return x[: len(sampled.A)], x[len(sampled.A):]


def test_a_misread_tilt_and_a_gyro_bias_are_learned_and_cost_nothing():
    design, _ = designed()
    tilt, gyro = np.radians(0.4), np.radians(0.3)
    state, memory = settled(design, tilt, gyro)
    names = dict(zip(design.law.memory, memory, strict=True))
    assert names["gyro_bias"] == pytest.approx(gyro, rel=1e-6)
    assert names["balance_offset"] == pytest.approx(tilt, rel=1e-6)
    assert np.abs(state).max() < 1e-9                                    # it stands in true balance, the wheel at rest
    assert tolerable_offset(design) == np.inf
    plain, _ = designed(given=Complementary(0.25))                        # the twin: this one pays for ever
    assert 0.0 < tolerable_offset(plain) < 0.1


def test_nonlinear_simulator_and_linear_loop_are_one():
    """A start 1e-4 rad off, ideal sensors: lean within 1e-8 rad at every sample for a second; lever arm and delay in it."""
    design, goal = designed()
    design = quiet(design)
    units = design.plant.unit_parameters.copy()
    units[:, 4] = 0.0                                                    # Coulomb drag is not linear
    design = replace(design, plant=replace(design.plant, unit_parameters=units))
    run = run_one(design, goal, "small", Trial(start=Start(1e-4, 0.0, 0.0, "outward"), lasts=1.0), "outward", True)
    leans = linear_leans(design, {"lean": 1e-4, "lean_predicted": 1e-4}, len(run.trace.lean))
    assert np.abs(leans - run.trace.lean).max() < 1e-8
    assert run.trace.lean[-1] != pytest.approx(run.trace.lean[0], rel=0.5)


def test_noise_at_rest_is_what_the_simulator_shows():
    """RMS over 150 s from a settled start. Tolerances: three standard errors of an RMS of correlated samples, by hand."""
    for given, changes in ((Kalman(), {}), (Complementary(0.25), {})):
        design, goal = designed(given=given, **changes)
        sensor = design.plant.sensor_parameters.copy()
        sensor[[GYRO_BIAS, TILT_BIAS]] = 0.0
        design = replace(design, plant=replace(design.plant, sensor_parameters=sensor))
        units = design.plant.unit_parameters.copy()
        units[:, 4] = 0.0
        design = replace(design, plant=replace(design.plant, unit_parameters=units))
        due = noise_rms(design)
        run = run_one(design, goal, "rest", Trial(start=Start(0.0, 0.0, 0.0, "outward"), lasts=160.0), "outward", True)
        late = run.trace.time > 10.0
        torque = np.diff(run.trace.momentum)[late[1:]] / design.law.sample_time
        assert run.trace.lean[late].std() == pytest.approx(due.lean, rel=0.2)
        assert run.trace.lean_rate[late].std() == pytest.approx(due.lean_rate, rel=0.1)
        assert torque.std() == pytest.approx(due.torque, rel=0.05)
        assert run.trace.momentum[late].std() == pytest.approx(due.momentum, rel=0.3)


def test_less_noise_is_less_motion_and_no_sensor_has_none():
    design, goal = designed()
    plant = design.plant
    sensor = plant.sensor_parameters.copy()
    sensor[[GYRO_NOISE, ACCEL_NOISE]] *= 0.5
    half = noise_rms(replace(design, plant=replace(plant, sensor_parameters=sensor)))
    whole = noise_rms(design)
    assert (half.lean, half.torque) == pytest.approx((0.5 * whole.lean, 0.5 * whole.torque), rel=1e-9)
    plain = design_stance(plant, replace(goal, estimator=read_goal("designs/bench-rig.yaml").estimator))
    assert noise_rms(plain) is None


def test_sensors_without_noise_cannot_be_weighed():
    plant, goal = shipped(*RIG, estimator=Kalman(), marks={"estimator": (12, 1)})
    sensor = plant.sensor_parameters.copy()
    sensor[GYRO_NOISE] = 0.0
    with pytest.raises(InputError) as caught:
        design_stance(replace(plant, sensor_parameters=sensor), goal)
    assert caught.value.problems[0].line == 12
    assert "gyro_noise" in caught.value.problems[0].allowed


@pytest.mark.parametrize(("design", "stance", "changes"), [
    (*RIG, {}), ("scout-wheels", "on-fore-right", {}), ("quay-gyros", "on-left-right", {}),
    (*RIG, {"control": PidControl()})])
def test_every_limit_is_where_the_eigenvalues_cross(design, stance, changes):
    """Half a per cent on either side of each reported gain and delay limit, the filter in the loop."""
    found, _ = designed(design, stance, **changes)
    law, m = found.law, found.margins
    assert m.stable
    assert set(MEMORY) <= set(law.memory)
    sampled = sample_plant(found.plant, law.sample_time, law.latency)

    def radius(factor=1.0, delay=0.0):
        return np.abs(np.linalg.eigvals(actuator_break(sampled.with_extra_delay(delay), law).closed(factor))).max()

    for limit, inside, outside in ((m.gain_lower, 1.005, 0.995), (m.gain_upper, 0.995, 1.005)):
        assert radius(limit * inside) < 1.0 < radius(limit * outside)
    assert radius(delay=0.995 * m.delay) < 1.0 < radius(delay=1.005 * m.delay)


def test_the_file_says_kalman(tmp_path):
    text = Path("designs/bench-rig-sensed.yaml").read_text(encoding="utf-8")
    path = tmp_path / "d.yaml"
    told = "{kind: kalman, unknown_torque: 0.02 N*m/sqrt(Hz), bias_drift: 0.01 deg/s/sqrt(s), offset_drift: 0.1 deg/sqrt(s)}"
    path.write_text(text.replace("{kind: complementary, crossover: 0.25 Hz}", told), encoding="utf-8")
    given = read_goal(str(path)).estimator
    assert given == Kalman(0.02, np.radians(0.01), pytest.approx(np.radians(0.1)))


def test_held_askew_the_filter_does_not_take_it_for_balance():
    """Held 10 s at 1.2 degrees and let go: it catches itself; the twin, a filter that ran on as if falling, is fooled."""
    design, goal = designed()
    held = Trial(lift_off=LiftOff(np.radians(1.2), 0.0, 0.0, 10.0), lasts=15.0)
    run = run_one(design, goal, "held", held, "outward", True)
    assert run.verdict == "recovered"
    assert run.peak_lean < np.radians(1.6)
    law = replace(design.law, held_A=None, held_B=None)
    fooled = run_one(replace(design, law=law), goal, "held", held, "outward", True)
    assert fooled.peak_lean > 1.1 * run.peak_lean
    assert abs(fooled.end_momentum) > 10.0 * abs(run.end_momentum)        # it still leans against a balance that is none


def test_held_at_rest_the_gyros_bias_is_learned_within_two_seconds():
    design, _ = designed()
    law, x = design.law, np.zeros(len(design.law.memory))
    y = np.zeros(len(law.measurements))
    y[law.measurements.index("tilt")], y[law.measurements.index("gyro")] = 0.02, 0.005
    for _ in range(round(2.0 / law.sample_time)):
        x = law.held_A @ x + law.held_B @ y
    found = dict(zip(law.memory, x, strict=True))
    assert found["gyro_bias"] == pytest.approx(0.005, rel=0.02)
    assert (found["lean_predicted"], found["lean_rate_predicted"]) == pytest.approx((0.02, 0.0), abs=1e-12)
