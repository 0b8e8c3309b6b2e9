"""Legs by stated joint angles, and feet lifted on either side of the line."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.kernel import layout as at
from balance.machine.legs import LegPose
from balance.machine.machine import Pose, StancePlan
from balance.plant.build import build_plant
from balance.stance.build import build_stance
from tests.stance.machines import FEET, on_circle, three_legged

STANCE = "without-fore"


def posed(angles=None, **moved):
    """Return the machine with the angles that inverse kinematics found stated as poses, each moved by `moved` rad."""
    machine = three_legged()
    found = build_stance(machine, STANCE).joints if angles is None else angles
    poses = {leg: LegPose(swing=s, hip=h + moved.get(leg, 0.0), knee=k) for leg, (s, h, k) in found.items()}
    plan = replace(machine.stances[STANCE], poses=poses)
    return replace(machine, stances={**machine.stances, STANCE: plan})


def test_stated_angles_are_the_same_machine():
    """Forward from the angles that inverse kinematics found: every mass property to rounding."""
    found, plain = build_stance(posed(), STANCE), build_stance(three_legged(), STANCE)
    assert found.inertia_locked == pytest.approx(plain.inertia_locked, rel=1e-12)
    assert found.com_W == pytest.approx(plain.com_W, abs=1e-14)
    assert np.abs(found.I_com_W - plain.I_com_W).max() < 1e-14
    for leg in FEET:
        assert found.points_W[leg] == pytest.approx(plain.points_W[leg], abs=1e-13)


def test_a_knee_on_the_other_side_by_its_angles():
    """The other solution of the two-link triangle: knee angle reversed, hip turned by twice the angle at the hip."""
    plain = build_stance(three_legged(), STANCE).joints
    machine = three_legged()
    flipped = {name: replace(leg, knee="inward") for name, leg in machine.legs.items()}
    other = build_stance(replace(machine, legs=flipped), STANCE)
    assert other.joints["left"][2] == pytest.approx(-plain["left"][2])
    found = build_stance(posed(other.joints), STANCE)
    assert found.inertia_locked == pytest.approx(other.inertia_locked, rel=1e-12)
    assert abs(found.inertia_locked - build_stance(machine, STANCE).inertia_locked) > 1e-4


def test_angles_that_miss_the_foot_are_refused_with_where_they_end():
    with pytest.raises(InputError) as caught:
        build_stance(posed(left=0.05), STANCE)
    (problem,) = caught.value.problems
    assert problem.key == f"stances.{STANCE}.poses.left"
    assert "they put the foot at [" in problem.hint
    build_stance(posed(left=0.002), STANCE)                                # within half a percent of the leg's length


def test_one_link_by_its_angles():
    machine = three_legged()
    leg = machine.legs["fore"]
    end = np.array([0.13, 0.0, -0.3])                                       # in the trunk's axes, swing 0
    hip = np.array(leg.hip)
    length, angle = float(np.linalg.norm(end - hip)), float(np.arctan2(end[0] - hip[0], hip[2] - end[2]))
    legs = {**machine.legs, "fore": replace(leg, upper=replace(leg.upper, length=length), lower=None)}
    foot = (float(end[0]), float(end[1]), float(end[2]) + 0.32)
    plan = replace(machine.stances[STANCE], lifted={"fore": foot})
    by_length = build_stance(replace(machine, legs=legs, stances={STANCE: plan}), STANCE)
    stated = replace(plan, poses={"fore": LegPose(hip=angle)})
    by_angle = build_stance(replace(machine, legs=legs, stances={STANCE: stated}), STANCE)
    assert by_angle.com_W == pytest.approx(by_length.com_W, abs=1e-14)
    assert by_angle.joints["fore"] == pytest.approx(by_length.joints["fore"], abs=1e-14)


def four_footed(lifted):
    """Return the machine with a fourth leg, standing on left and right, its trunk over the line."""
    machine = three_legged()
    extra = replace(machine.legs["fore"], hip=(-0.11, 0.0, 0.0))
    legs = {**machine.legs, "aft": extra}
    plan = StancePlan(down={n: on_circle(0.25, FEET[n]) for n in ("left", "right")}, lifted=lifted,
                      trunk=Pose((-0.125, 0.0, 0.32)))
    return replace(machine, legs=legs, stances={"s": plan})


def test_a_foot_lifted_on_the_outward_side_catches_an_outward_fall():
    fore, aft = (0.1, 0.0, 0.03), (-0.345, 0.0, 0.05)
    machine = four_footed({"fore": fore, "aft": aft})
    stance = build_stance(machine, "s")
    sides = {name: across for name, (across, _) in stance.lifted.items()}
    inner, outer = ("fore", "aft") if sides["fore"] < 0 else ("aft", "fore")
    clear = {"fore": 0.03, "aft": 0.05}
    assert stance.touch_down_lean == pytest.approx(np.arctan2(clear[inner], -sides[inner]))
    assert stance.outward_touch_down == pytest.approx(np.arctan2(clear[outer], sides[outer]))
    body = build_plant(machine, stance).body_parameters
    assert body[at.LANDS_OUTWARD] == stance.outward_touch_down
    alone = build_stance(three_legged(), STANCE)                            # the twin: nothing lifted there
    assert alone.outward_touch_down is None
    assert build_plant(three_legged(), alone).body_parameters[at.LANDS_OUTWARD] == np.inf
