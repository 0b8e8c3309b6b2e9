"""Turns: the agreed order, and Rodrigues' formula."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from balance.maths.rotations import about, turned, unit

ROUNDING = 1e-14
"""A few roundings of sines and products."""


def test_turned_is_yaw_after_pitch_after_roll() -> None:
    rng = np.random.default_rng(1)
    for roll, pitch, yaw in rng.uniform(-3.0, 3.0, (20, 3)):
        # scipy's lower-case letters turn about fixed axes, first letter first: R = Rz Ry Rx
        wanted = Rotation.from_euler("xyz", [roll, pitch, yaw]).as_matrix()
        assert np.abs(turned(roll, pitch, yaw) - wanted).max() < ROUNDING
        other_order = Rotation.from_euler("XYZ", [roll, pitch, yaw]).as_matrix()
        assert np.abs(turned(roll, pitch, yaw) - other_order).max() > 1e-3


def test_yaw_alone_turns_forward_to_the_left() -> None:
    assert turned(0.0, 0.0, np.pi / 2) @ [1.0, 0.0, 0.0] == pytest.approx([0.0, 1.0, 0.0], abs=ROUNDING)


def test_about_an_axis_of_any_length() -> None:
    rng = np.random.default_rng(2)
    for row in rng.normal(size=(20, 4)):
        axis, angle = row[:3], row[3]
        wanted = Rotation.from_rotvec(angle * axis / np.linalg.norm(axis)).as_matrix()
        assert np.abs(about(3.0 * axis, angle) - wanted).max() < ROUNDING


def test_a_zero_vector_has_no_direction() -> None:
    with pytest.raises(ValueError, match="no direction"):
        unit([0.0, 0.0, 0.0])
