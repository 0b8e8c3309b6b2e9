"""Gains in ampere, duty and per sample do what the law in SI does."""

from __future__ import annotations

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.forms import actuator_gains, pid_forms
from tests.design.machines import shipped


def test_ampere_and_duty_come_back_to_the_torque():
    """A row times K_t is the SI row; duty times V/R is the current: the motor of the file, 55 mN·m/A, 0.25 Ω, 24 V."""
    plant, g = shipped("bench-rig", "line")
    design = design_stance(plant, g)
    (only,) = actuator_gains(design)
    assert only.si == pytest.approx(design.law.D)
    assert only.current * 0.055 == pytest.approx(only.si)
    assert only.duty * 24.0 / 0.25 == pytest.approx(only.current)


@pytest.mark.parametrize("stance", ["on-left-right", "on-fore-right"])
def test_rows_of_two_wheels_add_up_to_the_line_command(stance):
    """What the rows ask for, turned back into torque about the line, is the law's own v; the levelling adds nothing."""
    plant, g = shipped("scout-wheels", stance)
    design = design_stance(plant, g)
    y = np.array([0.01, -0.05, 30.0, -12.0])
    asked = np.array([a.si @ y for a in actuator_gains(design)])
    assert plant.momentum_row @ plant.model.B @ asked == pytest.approx(design.law.D @ y, rel=1e-9)


def test_gimbals_are_asked_for_a_rate():
    plant, g = shipped("quay-gyros", "on-left-right")
    (only,) = actuator_gains(design_stance(plant, g))
    assert only.current is None
    assert only.duty is None


def test_folded_pid_gives_the_same_command():
    """Run the folded form by hand, sample by sample, against the law's matrices."""
    plant, g = shipped("bench-rig-pid", "line")
    design = design_stance(plant, g)
    law, f, gains = design.law, pid_forms(design), design.law.gains
    rng = np.random.default_rng(8)
    x, integral, rate = np.zeros(2), 0.0, 0.0
    for y in rng.standard_normal((60, 3)) * [1e-4, 1e-3, 0.1]:                # small: no limit is met
        v = law.C @ x + law.D @ y
        x = law.A @ x + law.B @ y + law.E * v
        error = y[0] + gains["momentum"] * plant.momentum_row @ y
        integral += f.ki_sample * error
        hand = f.kp * error + integral + f.kd * f.filter_keep * rate + f.kd_new * y[1]
        rate = f.filter_keep * rate + (1 - f.filter_keep) * y[1]
        assert hand == pytest.approx(v, rel=1e-9, abs=1e-9)
    assert (f.integral_time, f.derivative_time) == pytest.approx((f.kp / f.ki, f.kd / f.kp))


def test_lqr_has_no_pid_forms():
    plant, g = shipped("bench-rig", "line")
    assert pid_forms(design_stance(plant, g)) is None
