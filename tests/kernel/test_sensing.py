"""The inertial sensor: kinematics against differentiated positions, noise against its statistics."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from balance.kernel import layout as at
from balance.kernel import outcome, sensing
from balance.kernel.sensing import digitised, normal, read_gyro, read_tilt, scrambled
from tests.kernel.rigs import body, events, ideal_sensor, law, run, wheel

STIFF = (0.0, 0.0)
"""The hinge of stiff legs moves with the trunk."""


def test_at_rest_the_tilt_is_the_lean():
    b = body(side=0.6)
    for theta in (-0.3, 0.0, 0.2):
        lean = theta - b[at.BALANCED]
        assert read_tilt(np.array([theta, 0.0]), 0.0, STIFF, b, ideal_sensor(), 1, 0) == pytest.approx(lean, rel=1e-12)


def test_specific_force_is_the_second_derivative_of_the_place_less_gravity():
    """The sensor's place differentiated numerically along a motion in the world, then turned into the body."""
    b, sensor = body(), ideal_sensor()
    sensor[sensing.UP], sensor[sensing.ACROSS] = 0.35, -0.08
    g, h = b[at.GRAVITY], 1e-4

    def theta(t):
        return 0.1 + 0.7 * t + 1.3 * t**2

    def place(t):                                                 # (across, up) of r u + s w turned by θ
        c, s = np.cos(theta(t)), np.sin(theta(t))
        return np.array([0.35 * s - 0.08 * c, 0.35 * c + 0.08 * s])

    acceleration = (place(h) - 2 * place(0) + place(-h)) / h**2
    felt = acceleration + np.array([0.0, g])                      # world: across, up
    c, s = np.cos(theta(0)), np.sin(theta(0))
    along_w, along_u = felt @ [c, -s], felt @ [s, c]
    expected = np.arctan2(-along_w, along_u)
    X = np.array([theta(0), 0.7])
    assert read_tilt(X, 2.6, STIFF, b, sensor, 1, 0) == pytest.approx(expected, abs=1e-6)   # rounding of 1e-16/h² = 1e-8
    assert abs(read_tilt(X, 0.0, STIFF, b, sensor, 1, 0) - expected) > 0.05                 # the twin: without θ̈


def test_the_faster_the_fall_is_caught_the_more_it_lies():
    """Near the upright: θ - r θ̈/g."""
    b, sensor = body(), ideal_sensor()
    sensor[sensing.UP] = 0.4
    lies = read_tilt(np.array([1e-4, 0.0]), -0.01, STIFF, b, sensor, 1, 0)
    assert lies == pytest.approx(1e-4 + 0.4 * 0.01 / b[at.GRAVITY], rel=1e-5)


def test_bias_range_and_counts():
    sensor = ideal_sensor()
    sensor[[sensing.GYRO_BIAS, sensing.TILT_BIAS]] = 0.02, 0.003
    assert read_gyro(0.5, sensor, 1, 0) == 0.52
    assert read_tilt(np.array([0.0, 0.0]), 0.0, STIFF, body(), sensor, 1, 0) == pytest.approx(0.003)
    sensor[[sensing.GYRO_STEP, sensing.GYRO_RANGE]] = 0.1, 4.0
    assert read_gyro(0.5, sensor, 1, 0) == pytest.approx(0.5)
    assert read_gyro(0.54, sensor, 1, 0) == pytest.approx(0.6)
    assert read_gyro(9.0, sensor, 1, 0) == pytest.approx(4.0)
    assert digitised(0.123, 0.0, np.inf) == 0.123


def test_noise_is_normal_white_and_its_own_in_each_channel():
    """20,000 draws: Kolmogorov-Smirnov at 1e-3, correlations within 4/√n; a fixed seed, so the outcome is fixed too."""
    n = 20000
    drawn = np.array([[normal(7, k, c) for k in range(n)] for c in range(3)])
    for row in drawn:
        assert stats.kstest(row, "norm").pvalue > 1e-3
        assert abs(np.corrcoef(row[:-1], row[1:])[0, 1]) < 4 / np.sqrt(n)
    assert np.abs(np.corrcoef(drawn) - np.eye(3)).max() < 4 / np.sqrt(n)
    assert abs(np.corrcoef(drawn[0], [normal(8, k, 0) for k in range(n)])[0, 1]) < 4 / np.sqrt(n)
    assert stats.kstest(1.05 * drawn[0], "norm").pvalue < 1e-3    # the twin: 5 % more is noticed


def test_uniform_numbers_stay_inside_and_are_the_same_again():
    drawn = [scrambled(3, k) for k in range(1000)]
    assert 0.0 < min(drawn) < 0.01
    assert 0.99 < max(drawn) < 1.0
    assert drawn == [scrambled(3, k) for k in range(1000)]


def test_the_loop_reads_the_sensor():
    """Gyro and tilt in the law's measurements, the wheel's speed beside them: v = -gains·y as recorded."""
    sensor = ideal_sensor()
    sensor[[sensing.UP, sensing.GYRO_BIAS, sensing.TILT_BIAS]] = 0.3, 0.01, 0.002
    gains, places = [-40.0, -6.0, -6e-3], (sensing.TILT, sensing.GYRO, 2)
    ran = run(body(), wheel(lag=2000.0), law(gains, places=places), events(0.2, sensor=sensor), X=[0.01, 0, 0, 0])
    free = 0.354 - 4e-3
    for row in ran.trace[1:20]:
        acceleration = (12.0 * np.sin(row[outcome.LEAN]) - row[outcome.LINE_TORQUE]) / free
        tilt = row[outcome.LEAN] - 0.3 * acceleration / body()[at.GRAVITY] + 0.002
        expected = 40.0 * tilt + 6.0 * (row[outcome.LEAN_RATE] + 0.01) + 6e-3 * row[outcome.TRACE_SIZE]
        assert row[outcome.COMMAND] == pytest.approx(expected, rel=3e-3)          # an angle's tangent: 0.06²/3


def test_noise_of_a_trial_depends_on_its_seed_alone():
    sensor = ideal_sensor()
    sensor[sensing.GYRO_NOISE] = 0.01
    places = (0, sensing.GYRO, 2)

    def commands(seed):
        return run(body(), wheel(), law([-40.0, -6.0, -6e-3], places=places), events(0.1, sensor=sensor, seed=seed),
                   X=[0.01, 0, 0, 0]).trace[:, outcome.COMMAND]

    np.testing.assert_array_equal(commands(5), commands(5))
    assert np.abs(commands(5) - commands(6)).max() > 0.01


@pytest.mark.parametrize(("place", "most", "sample"), [
    (sensing.GYRO_RANGE, 0.0321, 17), (sensing.GYRO_RANGE, np.inf, None),        # θ̇ = 1 rad/s² × 2 ms × sample
    (sensing.ACCEL_RANGE, 0.29, 1), (sensing.ACCEL_RANGE, 0.31, None)])          # r θ̈ = 0.3 m/s², as soon as it acts
def test_a_sensor_beyond_its_range_is_told_with_its_time(place, most, sample):
    sensor = ideal_sensor()
    sensor[[sensing.UP, place]] = 0.3, most
    still = body(inertia=0.354, stiffness=1e-300, mass=1.0, height=1.0)
    torque = 0.354 - 4e-3                                                        # the wheel turns freely
    control = law(gains=(0.0, 0.0), places=(0, sensing.GYRO))
    ran = run(still, wheel(), control, events(0.05, [[0.0, 1.0, torque]], sensor=sensor))
    told = ran.first[-1, outcome.SENSOR, 0]
    assert told == (np.inf if sample is None else pytest.approx(0.002 * sample, abs=1e-12))
