"""Wheels and servo gimbals in one machine: what they store is levelled, so that no share of it stands still for ever."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.goal.goal import Allow, Goal, Loop, LqrControl
from balance.goal.trials import Start, Trial
from balance.kernel import layout as at
from balance.plant.sharing import LEVELLING_TIME, line_torque_per_input
from balance.simulate.run import run_one
from tests.plant.test_sharing import pair, rig, wheel

SERVO = {"drive": "position servo", "bandwidth": 20.0}


def asked(plant) -> Goal:
    allow = Allow(0.05, 0.7, 0.3 * plant.momentum_capacity, 0.8 * plant.torque_limit)
    return Goal(1, "mixed", "", Loop(500.0, 0.002), LqrControl(allow=allow), {})


@pytest.fixture(scope="module")
def plant():
    """A wheel beside a scissored pair, both across the line at an angle of their own."""
    return rig(w=wheel((0.8, 0.6, 0.0)), g=pair(**SERVO))


def test_levelling_moves_no_torque_and_levels_what_is_stored(plant) -> None:
    gains = line_torque_per_input(plant.unit_parameters)
    assert np.abs(plant.levelling).max() > 0.01
    assert np.abs(gains @ plant.levelling).max() <= 1e-12 * np.abs(plant.levelling).max()      # rounding
    kept = [plant.model.states.index(name) for name in ("w.wheel_speed", "g.gimbal_angle")]
    per_input = np.array([1.0 / plant.unit_parameters[0, at.OWN_INERTIA], 1.0])
    decay = np.sort(np.linalg.eigvals(-per_input[:, None] * plant.levelling[:, kept]).real)
    assert decay == pytest.approx([-1.0 / LEVELLING_TIME, 0.0], abs=1e-9)
    assert np.abs(plant.levelling[:, kept] @ (per_input * plant.allotment)).max() <= 1e-12, "what both store alike is left"


def test_the_loop_is_stable_and_without_levelling_one_mode_never_dies(plant) -> None:
    design = design_stance(plant, asked(plant))
    assert design.margins.stable
    assert design.margins.disk > 0.5
    bare = replace(plant, levelling=np.zeros_like(plant.levelling))
    assert not design_stance(bare, asked(bare)).margins.stable


def test_the_simulator_catches_a_lean_and_the_shares_come_level(plant) -> None:
    goal = asked(plant)
    design = design_stance(plant, goal)
    trial = Trial(start=Start(0.01, stored=0.05, toward="outward"), lasts=6.0)
    result = run_one(design, goal, "lean", trial, "outward", True)
    assert result.verdict == "recovered"
    stored = result.trace.units[:, [0, 2]] * plant.momentum_row[[2, 3]]      # (n, 2) N·m·s: wheel, pair
    shares = line_torque_per_input(plant.unit_parameters) * plant.allotment
    apart = np.abs(stored - stored.sum(axis=1, keepdims=True) * shares).max(axis=1)
    assert apart[0] > 1e-3, "they begin unlike"
    assert apart[-1] < 0.02 * apart.max()     # e⁻¹² of what was apart is left after 6 s, and the servo's lag


def test_a_torque_driven_gimbal_is_left_alone() -> None:
    """It makes no torque at once, so it can only be commanded alone: its row asks for nothing."""
    plant = rig(w=wheel(), t=pair(drive="torque motor"), v=wheel((0.6, 0.8, 0.0)))
    assert not np.any(plant.levelling[1])
    assert np.any(plant.levelling[0])
    assert not np.any(plant.levelling[:, plant.model.states.index("t.gimbal_angle")])
    answer = design_stance(plant, asked(plant))
    assert answer.refused or not answer.margins.stable, "an answer, never an exception"
