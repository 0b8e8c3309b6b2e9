"""PID: computed within its limits, internally stable, and refused where the momentum would run away."""

from __future__ import annotations

from dataclasses import replace

import control
import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.loop import close, sample_plant
from balance.design.noise import output_rms
from balance.design.pid import NOISE_SHARE, perfect_sensors
from balance.goal.goal import PidControl, PidGains, Requirements
from tests.design.machines import goal, plant_of, shipped, wheel_machine

LIMITS = Requirements(phase_margin=np.radians(35), gain_margin_lower=0.6, gain_margin_upper=2.0, delay_margin=0.006,
                      peak_sensitivity=1.7)


def poles_of(design):
    sampled = sample_plant(design.plant, design.law.sample_time, design.law.latency)
    return np.linalg.eigvals(close(sampled, design.law))


@pytest.mark.parametrize(("design_file", "stance"), [("bench-rig-pid", "line"), ("scout-wheels", "on-left-right"),
                                                     ("scout-wheels", "on-fore-right"), ("quay-gyros", "on-fore-left")])
def test_computed_gains_keep_every_limit(design_file, stance):
    """One wheel, two wheels, and a servo-driven pair: the reported margins, not the search's own, keep the limits."""
    plant, g = shipped(design_file, stance, control=PidControl(), require=LIMITS)
    design = design_stance(plant, g)
    assert design.refused == ""
    m = design.margins
    assert m.stable
    assert m.peak_sensitivity <= 1.7 * 1.01                            # the search's grid is coarser than the report's
    assert m.phase >= LIMITS.phase_margin * 0.99
    assert m.gain_lower <= 0.6 * 1.01
    assert m.gain_upper >= 2.0 * 0.99
    assert m.delay >= 0.006 * 0.99
    assert np.abs(poles_of(design)).max() < 1.0                        # every state, the wheels' speeds too


def test_noise_keeps_within_its_share():
    plant, g = shipped("bench-rig-pid", "line")
    design = design_stance(plant, g)
    sensed = perfect_sensors(sample_plant(plant, design.law.sample_time, design.law.latency), plant)
    A, N = sensed.closed(design.law)
    wanted = np.concatenate([design.law.D @ sensed.C, design.law.C])[None]
    rms = output_rms(A, N, sensed.sigma, wanted, (design.law.D @ sensed.F)[None])[0]
    assert 0.0 < rms <= NOISE_SHARE * plant.torque_limit * 1.05        # frequency grid against Lyapunov equation


def test_tighter_sensitivity_costs_integral_gain():
    plant, g = shipped("bench-rig-pid", "line", require=Requirements())
    ki = [design_stance(plant, replace(g, control=PidControl(peak_sensitivity=s, desaturation_time=1.5))).law.gains["ki"]
          for s in (1.15, 1.7)]
    assert ki[1] > ki[0]


def test_without_momentum_feedback_it_is_refused():
    """Trap 4: lean-only PID looks stable and lets the wheel run away; the refusal says so."""
    plant, g = shipped("bench-rig-pid", "line", control=PidControl(gains=PidGains(60.0, 40.0, 6.0)))
    refused = design_stance(plant, g).refused
    assert "run away" in refused
    assert "momentum" in refused


def test_own_gains_are_judged_unchanged():
    plant, g = shipped("bench-rig-pid", "line", control=PidControl(gains=PidGains(60.0, 40.0, 6.0, 0.05)))
    design = design_stance(plant, g)
    assert [design.law.gains[k] for k in ("kp", "ki", "kd", "momentum")] == [60.0, 40.0, 6.0, 0.05]
    assert design.margins.stable
    weak = replace(g, control=PidControl(gains=PidGains(5.0, 4.0, 1.0, 0.05)))     # less than the stiffness: it falls
    assert not design_stance(plant, weak).margins.stable


def test_momentum_comes_back_in_the_time_asked_for():
    """Below the lean loop q̇ = −G m q: the slowest pole is about 1/(desaturation time)."""
    plant, g = shipped("bench-rig-pid", "line")
    for time in (1.5, 3.0):
        design = design_stance(plant, replace(g, control=PidControl(desaturation_time=time)))
        slowest = np.abs(np.log(poles_of(design).astype(complex)) / design.law.sample_time).min()
        assert slowest == pytest.approx(1.0 / time, rel=0.15)          # the pole is that only far below the lean loop


def test_impossible_limits_are_answered():
    plant = plant_of(wheel_machine())
    asked = replace(goal(latency=0.05, control=PidControl(peak_sensitivity=1.05)), require=Requirements(delay_margin=0.3))
    assert "no PID gains" in design_stance(plant, asked).refused


def test_published_loop_with_a_cancelled_zero():
    """1.07: Olivares & Albertos, ISA Transactions 2014 (matrices and PID read second-hand; poles and margins derived).

    The margins look fine; the closed loop has a pole at 0: the wheel's speed drifts.
    """
    A = np.array([[0, 1, 0], [23.5031, 0, 0.1393 * 19.9513 / 621.6819], [-23.5031, 0, -19.9513]])
    plant = control.ss(A, [[0], [0.1393], [-621.6819]], [[107.47, 0, 0]], 0)
    assert np.sort(plant.poles().real) == pytest.approx([-19.95158, -4.84728, 4.84756], rel=1e-5)
    kp, Ti, Td, N = 16.1, 0.26, 0.04, 100.0
    law = control.tf(kp, 1) + control.tf(kp / Ti, [1, 0]) + control.tf([kp * Td * N, 0], [1, N])
    loop = control.ss(plant) * control.tf2ss(law)
    closed = np.linalg.eigvals(loop.A - loop.B @ loop.C)
    assert np.sort(closed.real)[:4] == pytest.approx([-85.911, -24.6986, -5.14219, -4.19949], rel=1e-4)
    assert np.abs(closed).min() < 1e-6                                 # rounding of a double pole's neighbour; exact: 0
    from balance.design.ideal import continuous_view
    from balance.design.margins import margins_of
    view = continuous_view(np.asarray(loop.A), np.asarray(loop.B)[:, 0], np.asarray(loop.C)[0])
    assert not margins_of(replace(view, growth=lambda k, d: max(closed.real) + 1e-9)).stable
    fooled = margins_of(replace(view, growth=lambda k, d: view.growth(k, d) - 1e-6))       # as if the drift were not there
    assert np.rad2deg(fooled.phase) == pytest.approx(61.231, rel=1e-4)
    assert fooled.phase_crossover == pytest.approx(8.76064, rel=1e-4)
    assert fooled.delay == pytest.approx(0.121987, rel=1e-4)
