"""A deviated plant is the plant of the machine that was built that way: the same numbers as from an edited machine."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.plant.deviation import deviated
from tests.design.machines import plant_of, shipped, wheel_machine

SAME = 1e-12
"""Relative: two orders of the same few multiplications."""


def alike(one, other) -> bool:
    """Tell whether two plants have the same linear model, to rounding of its largest entries."""
    return all(np.allclose(a, b, rtol=SAME, atol=SAME * np.abs(b).max())
               for a, b in ((one.model.A, other.model.A), (one.model.B, other.model.B)))


def test_nothing_moved_is_the_plant_itself() -> None:
    for design, stance in (("scout-wheels", "on-fore-left"), ("quay-gyros", "on-left-right"), ("bench-rig", "line")):
        plant, _ = shipped(design, stance)
        same = deviated(plant, {})
        assert alike(same, plant)
        assert same.stiffness == pytest.approx(plant.stiffness, rel=SAME)
        assert same.inertia_free == pytest.approx(plant.inertia_free, rel=SAME)


def test_mass_height_and_inertia_are_those_of_an_edited_machine() -> None:
    """Lumped: J of the body is 0.33 = 0.079 about its centre + m h²; more mass is more of the same."""
    plant = plant_of(wheel_machine())
    wheel = 2.2e-3
    around = 0.33 + wheel - 3.2 * 0.28**2
    body = (1.04 * around + 1.04 * 3.2 * 0.29**2) * 0.95 - wheel
    built = plant_of(wheel_machine(mass=1.04 * 3.2, height=0.29, inertia=body))
    moved = deviated(plant, {"mass": 0.04, "height": 0.01, "inertia": -0.05})
    assert alike(moved, built)
    assert moved.stiffness == pytest.approx(built.stiffness, rel=SAME)
    assert not alike(deviated(plant, {"mass": 0.04}), built), "the twin: one of three moved is another machine"


def test_no_deviation_takes_the_inertia_below_the_mass_at_its_distance() -> None:
    plant = plant_of(wheel_machine(inertia=3.2 * 0.28**2 * 1.001))
    moved = deviated(plant, {"inertia": -0.5})
    least = 3.2 * 0.28**2
    own = plant.unit_parameters[0]
    assert moved.inertia_free == pytest.approx(least - own[1] ** 2 / own[2], rel=SAME)   # rotor free: less c²/e
    assert deviated(plant, {"inertia": 0.5}).inertia_free > plant.inertia_free


def test_torque_constant_and_lags_are_those_of_an_edited_motor() -> None:
    plant = plant_of(wheel_machine(bandwidth=300.0))
    moved = deviated(plant, {"torque_constant": 0.1, "bandwidth": 0.2, "voltage": -0.1})
    assert np.allclose(moved.model.B, 1.1 * plant.model.B, rtol=SAME)
    assert moved.units[0].lag == pytest.approx(2.0 * np.pi * 300.0 * 1.2 * 0.9, rel=SAME)
    assert np.array_equal(moved.allotment, plant.allotment), "the law still believes the file"


def test_each_motor_moves_for_itself() -> None:
    plant, _ = shipped("scout-wheels", "on-fore-left")
    moved = deviated(plant, {"side-wheel.torque_constant": -0.08})
    assert np.allclose(moved.model.B[:, 0], plant.model.B[:, 0], rtol=SAME)
    assert np.allclose(moved.model.B[:, 1], 0.92 * plant.model.B[:, 1], rtol=SAME)


def test_the_flywheels_momentum_and_the_pairs_mirror() -> None:
    """Torque about the line per gimbal rate is 2 H e·(g × s₀): × (1 + m) cos ε, for the pair stands upright (e·s₀ = 0)."""
    plant, _ = shipped("quay-gyros", "on-left-right")
    rate = plant.model.states.index("gimbal_rate")
    moved = deviated(plant, {"flywheel_momentum": -0.03, "pair_angle": 0.1})
    assert np.allclose(moved.momentum_row, 0.97 * np.cos(0.1) * plant.momentum_row, rtol=SAME)
    assert moved.model.A[1, rate] == pytest.approx(0.97 * np.cos(0.1) * plant.model.A[1, rate], rel=SAME)
    servo = deviated(plant, {"bandwidth": -0.25})
    assert servo.model.A[rate, rate] == pytest.approx(0.75 * plant.model.A[rate, rate], rel=SAME)


def test_offset_moves_the_balanced_lean() -> None:
    plant = plant_of(wheel_machine())
    moved = deviated(plant, {"offset": 0.004})
    assert moved.balanced_lean == pytest.approx(-np.arctan2(0.004, 0.28), rel=SAME)
    machine = wheel_machine()
    built = plant_of(replace(machine, lumped=replace(machine.lumped, offset=0.004, inertia=0.33 + 3.2 * 0.004**2)))
    assert alike(moved, built)
