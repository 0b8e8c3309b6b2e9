"""Motors and gimbal drives against their closed forms."""

from __future__ import annotations

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.drive import (
    LIMITER_GAIN,
    current_target,
    current_window,
    gimbal_rate,
    gimbal_torque,
    torque_available,
    unit_input,
)
from tests.kernel.rigs import pair, wheel

EXACT = 1e-12
"""Relative: a handful of double operations."""


def motor(**more):
    """24 V, 0.4 ohm, 18 A, 60 mN·m/A."""
    return wheel(volts=24.0, ohms=0.4, amps=18.0, torque=np.inf, speed=np.inf, lag=2000.0, **more)


def test_window_at_standstill_is_the_current_limit():
    assert current_window(motor(), 0, 0.0) == (-18.0, 18.0)      # 24 V / 0.4 ohm = 60 A, the driver gives 18


def test_window_near_no_load_speed():
    low, high = current_window(motor(), 0, 390.0)
    assert high == pytest.approx((24.0 - 0.06 * 390.0) / 0.4, rel=EXACT)
    assert low == -18.0                                          # braking still has the driver's full current


def test_window_beyond_the_bus_is_forced_braking():
    """Back-EMF above V + R i_max: intersecting the intervals would leave nothing; the current is -i_max."""
    speed = (24.0 + 0.4 * 18.0) / 0.06 + 50.0
    assert current_window(motor(), 0, speed) == (-18.0, -18.0)
    assert current_window(motor(), 0, -speed) == (18.0, 18.0)


def test_window_just_above_no_load_brakes_a_little():
    low, high = current_window(motor(), 0, 410.0)
    assert high == pytest.approx((24.0 - 0.06 * 410.0) / 0.4, rel=EXACT)
    assert high < 0.0
    assert low == -18.0


@pytest.mark.parametrize(("command", "speed", "current", "met"), [
    (0.6, 0.0, 10.0, outcome.NO_LIMIT),
    (2.0, 0.0, 18.0, outcome.CURRENT),
    (-2.0, 0.0, -18.0, outcome.CURRENT),
    (0.6, 390.0, 1.5, outcome.VOLTAGE),
    (-0.6, 390.0, -10.0, outcome.NO_LIMIT),
])
def test_target_current(command, speed, current, met):
    target, limit = current_target(motor(), 0, speed, command)
    assert target == pytest.approx(current, rel=1e-9)
    assert limit == met


def test_reversed_gear_turns_current_and_back_emf_round():
    row = motor(per_amp=-0.06, emf=-0.06)
    target, limit = current_target(row, 0, 390.0, 0.6)
    assert target == pytest.approx(-1.5, rel=1e-9)               # -(24 - 0.06·390)/0.4: same torque, other sign of current
    assert limit == outcome.VOLTAGE


def test_torque_limit_cuts_and_its_equal_does_not_count():
    row = wheel(torque=0.8, speed=np.inf)
    assert current_target(row, 0, 0.0, 1.0) == (pytest.approx(0.8 / 0.06), outcome.TORQUE)
    assert current_target(row, 0, 0.0, 0.8) == (pytest.approx(0.8 / 0.06), outcome.NO_LIMIT)


def test_speed_limiter_takes_what_is_left_and_never_brakes():
    row = wheel(inertia=4e-3, torque=0.8, speed=50.0)
    cap = 4e-3 * LIMITER_GAIN * 0.1
    target, limit = current_target(row, 0, 49.9, 0.8)
    assert target * 0.06 == pytest.approx(cap, rel=1e-9)
    assert limit == outcome.SPEED
    assert current_target(row, 0, 51.0, 0.8) == (0.0, outcome.SPEED)
    back, free = current_target(row, 0, 51.0, -0.8)              # slowing down is not cut
    assert back * 0.06 == pytest.approx(-0.8, rel=1e-9)
    assert free == outcome.NO_LIMIT


def test_current_lag_is_first_order():
    given, slope, _ = unit_input(motor(), 0, 0.0, 2.0, 0.0, 0.6)
    assert given == pytest.approx(0.12, rel=EXACT)               # the torque is the present current's
    assert slope == pytest.approx(2000.0 * (10.0 - 2.0), rel=EXACT)


def test_servo_rate_is_clipped():
    assert gimbal_rate(pair(rate=4.0), 0, 5.0) == (4.0, outcome.RATE)
    assert gimbal_rate(pair(rate=4.0), 0, -4.0) == (-4.0, outcome.NO_LIMIT)


def test_torque_gimbal_holds_its_rate_limit_against_the_flywheel():
    """At the limit the drive gives just what H σ' θ̇ pushes back, so that γ̈ = 0."""
    row = pair(at.GIMBAL_TORQUE, momentum=0.5, rate=4.0, drive=10.0)
    torque, limit = gimbal_torque(row, 0, 0.3, 4.0, 0.2, 5.0)
    assert torque == pytest.approx(-0.5 * np.cos(0.3) * 0.2, rel=1e-9)
    assert limit == outcome.RATE


def test_torque_gimbal_strength():
    row = pair(at.GIMBAL_TORQUE, rate=np.inf, drive=1.5)
    assert gimbal_torque(row, 0, 0.0, 0.0, 0.0, 2.0) == (1.5, outcome.DRIVE)
    assert gimbal_torque(row, 0, 0.0, 0.0, 0.0, 1.0) == (1.0, outcome.NO_LIMIT)


def test_torque_available_falls_to_nothing_at_the_stop_and_on_the_motor_line():
    stop = np.radians(60)
    assert torque_available(pair(), 0, 0.2, 2.0, 1.0) == pytest.approx(8.0)       # dq/dγ 2 N·m·s × 4 rad/s
    assert torque_available(pair(), 0, stop, 2.0, 1.0) == 0.0
    assert torque_available(pair(), 0, stop, 2.0, -1.0) == pytest.approx(8.0)
    assert torque_available(motor(), 0, 400.0, 1.0, 1.0) == pytest.approx(0.0, abs=1e-12)   # 24 V / 60 mV·s
    assert torque_available(motor(), 0, 390.0, 1.0, 1.0) == pytest.approx(1.5 * 0.06)
