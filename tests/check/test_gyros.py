"""Verdicts on gimbal drives and turntables: the numbers behind them by hand, and twins that fail."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.load import load
from balance.check.gyros import judge_gyros
from balance.design.build import design_stance
from balance.kernel import layout as at
from balance.machine.stabilisers import Mount, Turntable
from balance.plant.build import build_plant
from balance.simulate.run import run_trials
from balance.stance.build import build_stance

STANCE = "on-left-right"


def judged(gimbal=None, **changes):
    """Return the verdicts by name, the trials and the plant of the carrier with its unit changed."""
    job = load("designs/quay-gyros.yaml", STANCE)
    unit = job.machine.stabilisers["gyros"]
    unit = replace(unit, gimbal=replace(unit.gimbal, **(gimbal or {})), **changes)
    machine = replace(job.machine, stabilisers={"gyros": unit})
    goal = replace(job.goal, trials=dict(list(job.goal.trials.items())[:1]))
    design = design_stance(build_plant(machine, build_stance(machine, STANCE)), goal)
    trials = run_trials(design, goal, machine, True)
    return {v.name: v for v in judge_gyros(design, trials)}, trials, design.plant


def test_the_push_back_is_of_the_fastest_lean():
    """H σ' θ̇ over the drive's torque, σ' = 1; the recorded lean rates never exceed the peak that is kept."""
    found, trials, plant = judged()
    fastest = max(t.peak_lean_rate for t in trials)
    momentum = plant.unit_parameters[0, at.MOMENTUM]
    assert found["gimbal_push_back"].value == pytest.approx(momentum * fastest / 6.0, rel=1e-9)
    assert found["gimbal_push_back"].passed
    for trial in trials:
        assert np.abs(trial.trace.lean_rate).max() <= trial.peak_lean_rate * (1.0 + 1e-12)
        assert np.abs(trial.trace.lean_rate).max() > 0.5 * trial.peak_lean_rate
    weak, _, _ = judged({"torque_limit": 6.0 * found["gimbal_push_back"].value / 1.2})
    assert not weak["gimbal_push_back"].passed
    assert "gives way" in weak["gimbal_push_back"].reason


def test_a_table_that_turns_too_fast_lifts_a_foot():
    found, _, _ = judged()
    share = found["turning_unloads"].value
    assert found["turning_unloads"].passed
    quick, _, _ = judged(mount=Mount(Turntable(2.0 * 1.1 / share)))
    assert not quick["turning_unloads"].passed
    assert quick["turning_unloads"].value == pytest.approx(1.1, rel=1e-9)


def test_a_motor_that_cannot_spin_its_flywheel():
    found, _, plant = judged()
    speed = plant.unit_parameters[0, at.MOMENTUM] / plant.units[0].inertia
    no_load = 48.0 / 0.028                                          # rad/s, supply and torque constant of the file
    assert found["spin_of_no_load_speed"].value == pytest.approx(speed / no_load, rel=1e-9)
    assert found["spin_of_no_load_speed"].passed
    fast, _, _ = judged(spin_speed=1.25 * no_load)
    assert not fast["spin_of_no_load_speed"].passed
    assert "at 0.8 of the stated" in fast["spin_of_no_load_speed"].reason
    silent, _, _ = judged(spin_motor=None)
    assert "spin_of_no_load_speed" not in silent


def test_a_machine_of_wheels_is_not_asked():
    job = load("designs/bench-rig.yaml", "line")
    plant = build_plant(job.machine, build_stance(job.machine, "line"))
    design = design_stance(plant, job.goal)
    assert judge_gyros(design, run_trials(design, replace(job.goal, trials=dict(list(job.goal.trials.items())[:1])),
                                          job.machine, False)) == []
