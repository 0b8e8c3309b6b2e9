"""Words of a trial into the kernel's arrays: directions, signs, instants."""

from __future__ import annotations

import math

import numpy as np
import pytest

from balance.goal.trials import LiftOff, OffsetShift, Push, Start, Swing, TorqueStep, Trial
from balance.kernel import outcome
from balance.simulate import events
from balance.simulate.events import directions


def happening(trial, toward, longest):
    """Without a sensor: nothing here reads one."""
    return events.happening(trial, toward, longest, np.zeros(0), 0)


def test_both_where_one_part_says_so():
    assert directions(Trial(push=Push(1.0, 0.5))) == ("outward", "inward")
    assert directions(Trial(push=Push(1.0, 0.5, "inward"))) == ("inward",)
    assert directions(Trial(push=Push(1.0, 0.5, "inward"), start=Start(0.1))) == ("outward", "inward")
    assert directions(Trial()) == ("outward", "inward")


@pytest.mark.parametrize(("toward", "sign"), [("outward", 1.0), ("inward", -1.0)])
def test_every_part_takes_its_sign(toward, sign):
    trial = Trial(push=Push(0.4, 0.5), torque=TorqueStep(0.3), start=Start(0.1, 0.2, 0.05), offset=OffsetShift(0.003),
                  swing=Swing(0.7, 0.5))
    happens = happening(trial, toward, 1e-4)
    assert (happens.lean, happens.lean_rate, happens.stored) == (sign * 0.1, sign * 0.2, sign * 0.05)
    assert happens.end_shift == sign * 0.003
    assert happens.end_torque == sign * 0.3
    np.testing.assert_allclose(happens.events.jumps, [[0.1, 0.0, sign * 0.003], [0.1, sign * 0.2, 0.0]]
                               if sign > 0 else [[0.1, -0.2, 0.0], [0.1, 0.0, -0.003]])
    swing = happens.events.torques[1]
    assert swing[outcome.SWING] == sign * 0.7


def test_a_part_that_names_its_direction_keeps_it():
    trial = Trial(push=Push(0.4, 0.5), torque=TorqueStep(0.3, toward="inward"))
    assert [happening(trial, way, 1e-4).end_torque for way in ("outward", "inward")] == [-0.3, -0.3]
    assert [happening(trial, way, 1e-4).events.jumps[0, outcome.KICK] for way in ("outward", "inward")] == [0.2, -0.2]


def test_a_push_that_lasts_has_the_same_impulse():
    happens = happening(Trial(push=Push(0.4, 0.5, start=0.2, lasts=0.05)), "outward", 1e-4)
    assert happens.events.jumps.shape == (0, outcome.JUMP_SIZE)
    row = happens.events.torques[0]
    assert row[outcome.LEVEL] * (row[outcome.END] - row[outcome.START]) == pytest.approx(0.4 * 0.5)
    assert happens.quiet_from == pytest.approx(0.25)


def test_every_sudden_change_is_a_break_once():
    trial = Trial(push=Push(0.4, 0.5, start=0.2), torque=TorqueStep(0.3, 0.2, 0.1), offset=OffsetShift(0.001, 0.7),
                  lift_off=LiftOff(0.01, at=0.05), lasts=2.0)
    happens = happening(trial, "outward", 1e-4)
    np.testing.assert_allclose(happens.events.breaks, [0.05, 0.2, 0.3, 0.7])
    assert happens.quiet_from == 0.7


def test_lift_off_is_held_with_its_lean_and_released_with_its_rate():
    happens = happening(Trial(lift_off=LiftOff(0.02, 0.1, 0.06, 0.15)), "inward", 1e-4)
    assert (happens.events.release, happens.events.release_rate) == (0.15, -0.1)
    assert (happens.lean, happens.stored) == (-0.02, -0.06)


def test_a_table_of_torques_is_pieces_of_straight_line():
    points = ((0.0, 0.0), (0.1, 0.4), (0.3, -0.2))
    rows = happening(Trial(swing=Swing(points=points, start=0.5)), "outward", 1e-4).events.torques
    for s, expected in ((0.05, 0.2), (0.2, 0.1), (0.299, -0.197)):
        t = 0.5 + s
        on = [r for r in rows if r[outcome.START] <= t < r[outcome.END]]
        assert len(on) == 1
        assert on[0][outcome.LEVEL] + on[0][outcome.SLOPE] * (t - on[0][outcome.START]) == pytest.approx(expected)


def test_a_step_without_an_end_stays():
    happens = happening(Trial(torque=TorqueStep(0.3, 0.2)), "outward", 1e-4)
    assert math.isinf(happens.events.torques[0, outcome.END])
    assert happens.quiet_from == 0.2
