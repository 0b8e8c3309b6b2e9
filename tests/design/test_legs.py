"""A law made for stiff legs on legs that give: the loop's own numbers against the nonlinear simulator, and what it bears."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.load import load
from balance.design.build import design_stance, measured
from balance.design.loop import sample_plant
from balance.design.robustness.ranges import ranges_of
from balance.design.robustness.worst import worst_case
from balance.design.steady import standing
from balance.goal.trials import OffsetShift, Start, Trial
from balance.kernel import layout as at
from balance.kernel.sensing import ACCEL_NOISE, ACCEL_STEP, GYRO_BIAS, GYRO_NOISE, GYRO_STEP, TILT_BIAS
from balance.machine.legs import LegCompliance
from balance.machine.tolerances import Tolerances
from balance.plant.build import build_plant
from balance.plant.deviation import deviated
from balance.simulate.run import run_one
from balance.stance.build import build_stance
from tests.design.machines import linear_leans


def designed(name="bench-rig-sensed", **give):
    """Return the design of a shipped rig on legs that give, its goal and machine; ideal sensors, no Coulomb drag."""
    job = load(f"designs/{name}.yaml", "line")
    machine = replace(job.machine, leg_compliance=LegCompliance(**give) if give else None)
    plant = build_plant(machine, build_stance(machine, "line"))
    sensor, units = plant.sensor_parameters.copy(), plant.unit_parameters.copy()
    sensor[[GYRO_BIAS, TILT_BIAS, GYRO_NOISE, ACCEL_NOISE, GYRO_STEP, ACCEL_STEP]] = 0.0
    units[:, at.COULOMB] = 0.0
    plant = replace(plant, sensor_parameters=sensor, unit_parameters=units)
    return design_stance(plant, job.goal), job.goal, machine


@pytest.mark.parametrize("give", [{"height": 0.15, "stiffness": 60.0, "damping": 0.4}, {"height": 0.2, "stiffness": 400.0}])
def test_nonlinear_simulator_and_linear_loop_are_one(give):
    """A start 1e-4 rad off behind a complementary filter: the hinge's own acceleration is in what the sensor reads."""
    design, goal, _ = designed(**give)
    run = run_one(design, goal, "small", Trial(start=Start(1e-4, 0.0, 0.0, "outward"), lasts=0.4), "outward", True)
    leans = linear_leans(design, {"lean": 1e-4, "legs_lean": 1e-4, "lean_estimate": 1e-4}, len(run.trace.lean))
    assert np.abs(leans - run.trace.lean).max() < 1e-8
    assert np.abs(run.trace.lean).min() < 5e-5


def test_the_law_is_the_stiff_machine_s():
    soft, _, _ = designed(height=0.15, stiffness=100.0, damping=0.5)
    stiff, _, _ = designed()
    for word in ("A", "B", "C", "D", "E", "K"):
        np.testing.assert_array_equal(getattr(soft.law, word), getattr(stiff.law, word))
    assert soft.margins.disk < stiff.margins.disk
    assert len(soft.poles) == len(stiff.poles) + 2


@pytest.mark.parametrize(("stiffness", "damping", "kept"), [
    (600.0, 0.02, True), (6000.0, 0.02, False), (6000.0, 4.0, True), (6.0, 0.02, False)])
def test_legs_that_ring_or_sag_lose_the_loop(stiffness, damping, kept):
    """A mode at 94 Hz that hardly dies away meets the delay in the wrong phase; damping saves it; soft legs just sag."""
    design, _, _ = designed(height=0.15, stiffness=stiffness, damping=damping)
    assert design.margins.stable == kept
    assert design.plant.stiff is not None


def test_a_pid_is_computed_on_the_loop_that_gives():
    """The gains for stiff legs miss what is asked on soft ones; those computed on them are lower and keep it."""
    give = {"height": 0.15, "stiffness": 600.0, "damping": 1.2}
    soft, goal, _ = designed("bench-rig-pid", **give)
    stiff, _, _ = designed("bench-rig-pid")
    assert soft.margins.stable
    assert soft.margins.peak_sensitivity <= goal.require.peak_sensitivity * 1.02           # the search's own grid
    gains = {name: (soft.law.gains[name], stiff.law.gains[name]) for name in ("kp", "ki", "kd")}
    assert all(ours < theirs for ours, theirs in gains.values())
    carried = measured(soft.plant, sample_plant(soft.plant, 1.0 / goal.loop.rate, goal.loop.latency), stiff.law, goal)
    assert carried.margins.gain_upper < goal.require.gain_margin_upper <= soft.margins.gain_upper
    assert soft.law.measurements == stiff.law.measurements


def test_a_weight_that_slips_costs_more_on_soft_legs():
    """Standing momentum after 1 mm, against the simulator run until it stands; stiff legs would say 4 % less."""
    design, goal, _ = designed(height=0.15, stiffness=60.0, damping=2.0)
    due = standing(design).momentum
    run = run_one(design, goal, "slip", Trial(offset=OffsetShift(1e-3), lasts=25.0), "outward", False)
    assert run.end_momentum == pytest.approx(due, rel=2e-3)                # sine against its slope, and the last of settling
    assert abs(standing(designed()[0]).momentum / due - 1.0) > 0.02


def test_the_worst_stiffness_is_found():
    design, goal, machine = designed(height=0.15, stiffness=60.0, damping=0.4)
    ranges = ranges_of(design.plant, Tolerances(leg_stiffness=0.3), goal.loop)
    assert [one.name for one in ranges] == ["leg_stiffness"]
    found = worst_case(design, ranges)
    disk = {case.margin: case for case in found.cases}["disk"]
    by = {x: design_stance(deviated(design.plant, {"leg_stiffness": x}), goal).margins.disk for x in (-0.3, 0.0, 0.3)}
    assert disk.value == pytest.approx(min(by.values()), rel=0.02)
    assert disk.at["leg_stiffness"] == pytest.approx(-0.3)
    stiff = replace(machine, leg_compliance=None)
    assert not ranges_of(build_plant(stiff, build_stance(stiff, "line")), Tolerances(leg_stiffness=0.3), goal.loop)
