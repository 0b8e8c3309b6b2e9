"""Settling, running away and reasons, on made-up histories with known answers."""

from __future__ import annotations

import math

import numpy as np
import pytest

from balance.kernel import outcome
from balance.simulate.story import limit_story, settling_time, standing_swing, time_to_full

TIME = np.arange(0, 5.0001, 0.002)


def test_an_exponential_settles_at_two_percent():
    """e^{-t/0.5} reaches 2 % at 0.5 ln 50 s; the answer is the first sample inside."""
    lean = 0.1 * np.exp(-TIME / 0.5)
    exact = 0.5 * math.log(50.0)
    assert exact <= settling_time(TIME, lean, 0.0, 0.0) < exact + 0.002 + 1e-9


def test_a_small_lean_settles_at_a_tenth_of_a_degree():
    lean = 0.01 * np.exp(-TIME / 0.5)
    exact = 0.5 * math.log(0.01 / math.radians(0.1))
    assert exact <= settling_time(TIME, lean, 0.0, 0.0) < exact + 0.002 + 1e-9


def test_settling_counts_from_the_last_event():
    lean = 0.1 * np.exp(-TIME / 0.5)
    assert settling_time(TIME, lean, 0.0, 1.0) == pytest.approx(settling_time(TIME, lean, 0.0, 0.0) - 1.0)


def test_it_must_stay_there():
    lean = 0.1 * np.exp(-TIME / 0.5)
    lean[2000] = 0.01                                             # out of the 2 mrad band once more at 4 s
    assert settling_time(TIME, lean, 0.0, 0.0) == pytest.approx(4.002)
    lean[-5] = 0.01
    assert settling_time(TIME, lean, 0.0, 0.0) == math.inf


def test_it_settles_at_the_lean_that_gravity_balances():
    lean = 0.05 + 0.05 * np.exp(-TIME / 0.5)
    assert math.isfinite(settling_time(TIME, lean, 0.05, 0.0))
    assert settling_time(TIME, lean, 0.0, 0.0) == math.inf        # the twin: measured from the old balance it never does
    assert settling_time(TIME, lean, math.nan, 0.0) == math.inf   # nothing balances: it cannot


def test_a_trial_that_ends_with_its_last_event_shows_nothing():
    lean = np.zeros_like(TIME)
    assert settling_time(TIME, lean, 0.0, 4.0) == 0.0
    assert settling_time(TIME, lean, 0.0, 4.9) == math.inf
    assert settling_time(TIME, lean, 0.0, 7.0) == math.inf


def test_time_to_full():
    assert time_to_full(TIME, 0.01 * TIME, 0.10) == pytest.approx(5.0, rel=1e-6)
    assert time_to_full(TIME, -0.01 * TIME, 0.10) == pytest.approx(5.0, rel=1e-6)
    assert time_to_full(TIME, 0.1 - 0.01 * TIME, 0.10) == math.inf


def limits(*met):
    first = np.full((3, outcome.LIMITS, 2), np.inf)
    for row, kind, when, stored in met:
        first[row, kind] = when, stored
    return first


def test_the_first_limit_and_where_momentum_ran_out():
    first = limits((2, outcome.OUTPUT, 0.1, 0.0), (0, outcome.SPEED, 0.42, -0.31), (1, outcome.VOLTAGE, 0.6, 0.3))
    said = limit_story(first, ["long", "side"], 0.30, "torque")
    assert said == "torque limit reached at 0.10 s; long: wheel speed limit reached at 0.42 s: 0.31 of 0.3 N·m·s used"


def test_one_unit_needs_no_name():
    first = limits((0, outcome.STOP, 0.5, 8.0))[[0, 2]]
    assert limit_story(first, ["gyros"], 8.4, "gimbal rate") == "gimbal stop reached at 0.50 s: 8 of 8.4 N·m·s used"
    assert limit_story(limits(), ["gyros"], 8.4, "torque") == ""


def test_a_current_out_of_control_is_told_whenever_it_came():
    first = limits()
    first[0, outcome.TORQUE] = 0.1, 0.02
    first[0, outcome.UNREGULATED] = 0.7, 0.1
    assert limit_story(first, ["wheel"], 0.3, "torque") == (
        "torque limit reached at 0.10 s; speed above which the driver no longer holds the current reached at 0.70 s")


def test_a_swing_that_stands_has_its_amplitude_and_a_slow_return_has_none():
    """A sine of 5 Hz on a slow return e^{-t/2}: the parabola takes all but 1e-3 of the return, 5 % of the sine at most."""
    swing, back = 0.002 * np.sin(2 * np.pi * 5.0 * TIME), 0.05 * np.exp(-TIME / 2.0)
    assert standing_swing(TIME, swing) == pytest.approx(0.002, rel=0.05)
    assert standing_swing(TIME, back) < 1e-3 * 0.05
    assert standing_swing(TIME, swing + back) == pytest.approx(0.002, rel=0.05)
    assert standing_swing(TIME[:2], swing[:2]) == 0.0
