"""Inverse kinematics: forward kinematics written out by rotation matrices must come back to the foot."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.maths.legs import bend_angles, leg_axes, link_axes, reach_range, swing_angle
from balance.maths.rotations import about

Array = NDArray[np.float64]


def walked(axes: Array, upper: float, lower: float, swing: float, hip: float, knee: float) -> tuple[Array, Array]:
    """Return knee and foot from the hip, by turning a hanging leg joint by joint."""
    r, t, z = axes
    swung = about(r, swing)
    bent = swung @ about(-t, hip)                   # −t turns down (−z) toward r
    middle = bent @ (-z * upper)
    return middle, middle + bent @ about(-t, knee) @ (-z * lower)


@pytest.mark.parametrize("side", [1.0, -1.0])
def test_every_reachable_foot_is_reached(side: float) -> None:
    rng = np.random.default_rng(6)
    upper, lower = 0.19, 0.21
    least, most = reach_range(upper, lower)
    for _ in range(300):
        hip = rng.normal(size=3)
        axes = leg_axes(hip)
        direction = rng.normal(size=3)
        foot = direction / np.linalg.norm(direction) * rng.uniform(least + 1e-3, most - 1e-3)
        out, sideways, up = axes @ foot
        swing, depth = swing_angle(sideways, up)
        found = bend_angles(out, depth, upper, lower, side)
        assert found is not None
        middle, end = walked(axes, upper, lower, swing, *found)
        # acos near a straight leg loses half the digits: 1e-3 from the limit leaves about 1e-13
        assert np.abs(end - foot).max() < 1e-12
        assert abs(swing) <= np.pi / 2 + 1e-15
        assert np.abs(link_axes(axes, swing, found[0])[:, 0] * upper - middle).max() < 1e-14
        knee_out = np.cross(link_axes(axes, swing, 0.0)[:, 1], foot) @ middle
        assert knee_out * side < 0.0                # the hinge turns the line from hip to foot inward


def test_link_axes_are_a_right_handed_frame() -> None:
    for bend in (0.0, 0.8, -2.0):
        R = link_axes(leg_axes(np.array([0.3, -0.4, 0.1])), 0.5, bend)
        assert np.abs(R.T @ R - np.eye(3)).max() < 1e-15
        assert np.linalg.det(R) == pytest.approx(1.0, abs=1e-14)


def test_a_hanging_link_points_down_and_its_z_outward() -> None:
    axes = leg_axes(np.array([0.0, 2.0, 0.0]))
    R = link_axes(axes, 0.0, 0.0)
    assert R[:, 0] == pytest.approx([0.0, 0.0, -1.0], abs=1e-15)
    assert R[:, 2] == pytest.approx([0.0, 1.0, 0.0], abs=1e-15)


def test_outward_knee_of_a_squatting_leg_stands_outside() -> None:
    hip_angle, knee_angle = bend_angles(0.0, 0.3, 0.2, 0.2, 1.0) or (0.0, 0.0)
    assert hip_angle == pytest.approx(np.arccos(0.75))          # isosceles: half the depth over the link
    assert knee_angle == pytest.approx(-2.0 * np.arccos(0.75))


@pytest.mark.parametrize("reach", [0.0, 0.0199, 0.4001, 3.0])
def test_out_of_reach_is_refused(reach: float) -> None:
    assert bend_angles(0.6 * reach, 0.8 * reach, 0.19, 0.21, 1.0) is None


@pytest.mark.parametrize("reach", [0.0201, 0.3999])
def test_just_within_reach_is_not(reach: float) -> None:
    assert bend_angles(0.6 * reach, 0.8 * reach, 0.19, 0.21, 1.0) is not None


def test_a_hip_on_the_axis_looks_forward() -> None:
    assert leg_axes(np.zeros(3))[0] == pytest.approx([1.0, 0.0, 0.0], abs=0.0)


def test_a_foot_straight_out_needs_no_swing() -> None:
    assert swing_angle(0.0, 0.0) == (0.0, 0.0)
    above = swing_angle(0.0, 0.1)
    assert above[0] == 0.0
    assert above[1] == -0.1
