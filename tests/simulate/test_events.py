"""Words of a trial into the kernel's arrays: directions, signs, instants."""

from __future__ import annotations

import math

import numpy as np
import pytest

from balance.goal.goal import Loop
from balance.goal.trials import (
    Gusts,
    LiftOff,
    OffsetShift,
    Payload,
    Push,
    Ramp,
    Slope,
    Start,
    Swing,
    TorqueStep,
    Trial,
    Varies,
)
from balance.goal.troubles import Jitter, Missed, SupplyDrop
from balance.kernel import layout as at
from balance.kernel import outcome
from balance.simulate import events
from balance.simulate.events import directions

BODY = np.zeros(at.BODY_SIZE)
BODY[[at.MASS, at.GRAVITY, at.INERTIA, at.HEIGHT, at.STIFF_SIN, at.TOUCH_DOWN]] = 3.0, 10.0, 0.4, 0.3, 9.0, 0.2
BODY[at.LANDS_OUTWARD] = 0.3


LOOP = Loop(500.0)


def happening(trial, toward, longest=1e-4, loop=LOOP):
    """Without a sensor: nothing here reads one."""
    return events.happening(trial, toward, BODY, loop, longest, np.zeros(0), 0)


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
    assert happens.end_body[at.OFFSET] == sign * 0.003
    assert happens.end_body[at.STIFF_COS] == pytest.approx(sign * 0.003 * 30.0, rel=1e-12)
    assert happens.end_torque == sign * 0.3
    np.testing.assert_allclose(happens.events.jumps, [[0.1, 0.0, sign * 0.003, math.inf], [0.1, sign * 0.2, 0.0, 0.5]]
                               if sign > 0 else [[0.1, -0.2, 0.0, 0.5], [0.1, 0.0, -0.003, math.inf]])
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
    assert row[outcome.LEVER] == 0.5
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


def test_a_ramp_grows_and_stays():
    happens = happening(Trial(ramp=Ramp(0.6, 0.5, 0.2)), "inward")
    grows, stays = happens.events.torques
    assert grows[outcome.SLOPE] * (grows[outcome.END] - grows[outcome.START]) == pytest.approx(-0.6)
    assert (stays[outcome.LEVEL], stays[outcome.START]) == (-0.6, grows[outcome.END])
    assert happens.end_torque == -0.6
    assert happens.quiet_from == pytest.approx(0.7)


def test_gusts_are_pieces_of_straight_line_and_end():
    happens = happening(Trial(gusts=Gusts("x.csv", points=((0.0, 0.0), (0.2, 0.4), (0.3, 0.0)), start=0.1)), "outward")
    assert happens.events.torques.shape[0] == 2
    assert happens.quiet_from == pytest.approx(0.4)
    assert happens.end_torque == 0.0
    assert list(happens.events.torques[:, outcome.LEVER]) == [math.inf] * 2          # a torque is stated
    wind = Gusts("x.csv", 0.45, points=((0.0, 0.0), (0.2, 0.4), (0.3, 0.0)), lever=0.45)
    assert list(happening(Trial(gusts=wind), "outward").events.torques[:, outcome.LEVER]) == [0.45] * 2


def test_a_load_adds_its_mass_at_its_place():
    happens = happening(Trial(payload=Payload(0.5, 0.6, 0.04)), "inward")
    row, end = happens.events.changes[0], happens.end_body
    assert row[outcome.AT_REST] == pytest.approx(0.5 * (0.36 + 0.0016))
    assert end[at.INERTIA] - BODY[at.INERTIA] == pytest.approx(row[outcome.AT_REST])
    assert end[at.HEIGHT] == pytest.approx((3.0 * 0.3 + 0.5 * 0.6) / 3.5)
    assert end[at.OFFSET] == pytest.approx(-0.5 * 0.04 / 3.5)
    assert end[at.STIFF_SIN] == pytest.approx(end[at.MASS] * 10.0 * end[at.HEIGHT])
    assert end[at.STIFF_COS] == pytest.approx(end[at.MASS] * 10.0 * end[at.OFFSET])
    np.testing.assert_allclose(BODY + row[outcome.CHANGED:], end, rtol=1e-12)


def test_a_load_put_on_and_taken_off_leaves_nothing():
    from balance.simulate.changes import Change, body_rows
    changes = [Change(Payload(0.5, 0.6, 0.04, 0.1), 1.0), Change(Payload(-0.5, 0.6, 0.04, 0.2), 1.0)]
    rows, end = body_rows(BODY, changes)
    np.testing.assert_allclose(end, BODY, atol=1e-12)
    assert rows[1, outcome.AT_REST] == 0.0                        # what goes keeps its speed
    _, moved = body_rows(BODY, [changes[0], Change(OffsetShift(0.003, 0.15), 1.0), changes[1]])
    assert moved[at.STIFF_COS] == pytest.approx(3.5 * 10.0 * 0.003)   # while it was there it was moved too


def test_a_slope_turns_the_weight_and_moves_the_touch_down():
    along = happening(Trial(slope=Slope(along=math.radians(10))), "inward").end_body
    assert along[at.STIFF_SIN] == pytest.approx(9.0 * math.cos(math.radians(10)))
    assert along[at.GRAVITY_ALONG] == pytest.approx(-10.0 * math.sin(math.radians(10)))
    for way, sign in (("outward", 1.0), ("inward", -1.0)):
        across = happening(Trial(slope=Slope(across=0.05)), way).end_body
        assert across[at.TOUCH_DOWN] == pytest.approx(0.2 + sign * 0.05)
        assert across[at.GROUND_RISES] == pytest.approx(sign * 0.05)
        assert across[at.LANDS_OUTWARD] == pytest.approx(0.3 - sign * 0.05)
        np.testing.assert_array_equal(across[[at.STIFF_SIN, at.STIFF_COS]], BODY[[at.STIFF_SIN, at.STIFF_COS]])


def test_tables_keep_their_last_value():
    points = ((0.0, 0.0), (0.2, 0.05), (0.5, 0.02))
    happens = happening(Trial(varies=Varies(inertia=points, offset_moment=points, start=0.1)), "inward")
    assert happens.end_body[at.INERTIA] == pytest.approx(0.42)
    assert happens.end_body[at.STIFF_COS] == pytest.approx(-0.02)  # sides turn it round, an inertia has none
    assert happens.quiet_from == pytest.approx(0.6)
    assert np.isinf(happens.events.torques[:, outcome.END]).sum() == 2


def test_troubles_are_spells():
    trial = Trial(push=Push(0.1, 0.3), supply=SupplyDrop(0.6, 0.2, 0.5), missed=Missed(3, start=0.1011),
                  jitter=Jitter(0.001))
    spells = happening(trial, "outward", loop=Loop(500.0, jitter=0.004)).events.spells
    np.testing.assert_allclose(spells[0], [0.2, 0.7, outcome.SUPPLY_LEFT, 0.6])
    np.testing.assert_allclose(spells[1], [0.102, 0.107, outcome.MISSED, 1.0])      # samples at 0.102, 0.104, 0.106
    np.testing.assert_allclose(spells[2], [0.0, np.inf, outcome.LATE, 0.001])       # the trial's own goes first
    plain = happening(Trial(push=Push(0.1, 0.3)), "outward", loop=Loop(500.0, jitter=0.004)).events.spells
    np.testing.assert_allclose(plain, [[0.0, np.inf, outcome.LATE, 0.004]])
