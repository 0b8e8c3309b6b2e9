"""The integral of stored momentum, Bode's integral as a self-check, and what no law can give at a long delay."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from balance.api.load import load
from balance.base.errors import InputError
from balance.check.loop import judge_loop
from balance.design.bode_integral import bode_integral
from balance.design.build import design_stance
from balance.design.loop import actuator_break, command_break, sample_plant
from balance.design.lqr import TRIM
from balance.design.margins import margins_of
from balance.design.records import BodeIntegral
from balance.design.sampled_margins import view
from balance.design.steady import tolerable_offset
from balance.goal.goal import Goal, Requirements
from balance.goal.trials import OffsetShift, Start, TorqueStep, Trial
from balance.simulate.run import run_one
from tests.design.machines import goal, plant_of, random_goal, random_plant, shipped, wheel_machine


def trimmed(design="bench-rig", stance="line", time=2.0):
    plant, asked = shipped(design, stance)
    asked = replace(asked, control=replace(asked.control, trim_time=time))
    return design_stance(plant, asked), asked


@pytest.mark.parametrize(("design", "stance"), [("bench-rig", "line"), ("scout-wheels", "on-fore-left"),
                                                ("quay-gyros", "on-left-right")])
def test_a_steady_error_leaves_no_momentum(design, stance):
    found, _ = trimmed(design, stance)
    assert found.margins.stable
    assert found.law.memory[-1] == TRIM
    assert tolerable_offset(found) == np.inf
    plain = design_stance(*shipped(design, stance))                       # the twin: without it the capacity is used
    assert tolerable_offset(plain) < 0.2


@pytest.mark.parametrize("time", [1.0, 2.0, 4.0])
def test_trim_time_is_about_the_slowest_pole(time):
    """The slowest closed-loop pole is 1/time, to a third: Bryson's weight on the integral."""
    found, _ = trimmed(time=time)
    slow = np.sort(-found.equivalent.real[np.isfinite(found.equivalent.real)])[0]
    assert slow == pytest.approx(1.0 / time, rel=0.35)


def test_a_shifted_mass_is_trimmed_in_the_simulator():
    found, asked = trimmed()
    trial = Trial(offset=OffsetShift(0.003, 0.1, "outward"), lasts=15.0)
    run = run_one(found, asked, "slips", trial, "outward", True)
    plain = run_one(design_stance(*shipped("bench-rig", "line")), asked, "slips", trial, "outward", True)
    capacity = found.plant.momentum_capacity
    assert run.verdict == "recovered"
    assert abs(run.end_momentum) < 0.01 * capacity
    assert abs(plain.end_momentum) > 0.1 * capacity


def test_long_saturation_does_not_wind_it_up():
    """A torque beyond what the motor gives holds the command at its limit for 0.3 s; the integral keeps what is worth it."""
    found, asked = trimmed(time=1.0)
    trial = Trial(start=Start(np.radians(3.0), 0.0, 0.0, "outward"), torque=TorqueStep(0.25, 0.1, 0.3, "outward"), lasts=8.0)
    run = run_one(found, asked, "hard", trial, "outward", True)
    assert run.torque_saturated > 0.05
    assert run.verdict == "recovered"
    law = found.law
    loose = replace(law, A=law.A.copy(), B=law.B.copy(), E=law.E.copy())  # the twin: the same without back-calculation
    loose.A[-1] += law.E[-1] * law.C
    loose.B[-1] += law.E[-1] * law.D
    loose.E[-1] = 0.0
    wound = run_one(replace(found, law=loose), asked, "hard", trial, "outward", True)
    assert wound.settling_time > run.settling_time


def test_bodes_integral_holds_on_random_loops():
    """Σ ln|p| against quadrature, 30 random loops; the twin leaves the unstable pole out and is caught each time."""
    rng = np.random.default_rng(12)
    seen = 0
    while seen < 30:
        plant, asked = random_plant(rng), random_goal(rng)
        found = design_stance(plant, asked)
        if found.refused or not found.margins.stable:
            continue
        seen += 1
        assert found.integral.holds
        assert found.integral.found == pytest.approx(found.integral.due, abs=2e-5)
        assert not replace(found.integral, due=0.0).holds or found.integral.due < 1e-4


def test_a_controller_with_a_pole_of_its_own_outside_counts():
    plant, asked = shipped("bench-rig", "line")
    found = design_stance(plant, asked)
    sampled = sample_plant(plant, found.law.sample_time, found.law.latency)
    both = bode_integral(actuator_break(sampled, found.law))
    assert both.due == pytest.approx(plant.unstable_pole * found.law.sample_time, rel=1e-9)
    assert not BodeIntegral(both.found, both.due + 2e-4).holds


def test_no_design_beats_the_limits():
    """20 random loops with up to three samples of latency: |T|, disk margin and Ms never pass what the pole allows."""
    rng = np.random.default_rng(4)
    for _ in range(20):
        found = design_stance(random_plant(rng), random_goal(rng))
        if found.refused or not found.margins.stable:
            continue
        assert found.margins.peak_complementary >= found.limits.least_peak_complementary * (1 - 1e-9)
        assert found.margins.disk <= found.limits.largest_disk * (1 + 1e-9)
        assert found.margins.peak_sensitivity >= found.limits.least_peak_sensitivity * (1 - 1e-9)


def hopeless(**require) -> tuple[object, Goal]:
    """120 ms on a machine whose pole is 6 1/s."""
    plant = plant_of(wheel_machine(height=0.2, inertia=3.2 * 9.80665 * 0.2 / 36.0))
    asked = goal(rate=500.0, latency=0.12, require=Requirements(**require))
    assert plant.unstable_pole == pytest.approx(6.0, rel=0.01)
    return design_stance(plant, asked), asked


def test_a_loop_asked_for_too_much_is_answered_by_the_limit():
    """|T| ≥ e^{6 · 0.12} = 2.05, so the disk margin stays below about 0.64 (references 7.03 for the bound)."""
    found, asked = hopeless(disk_margin=0.8, peak_sensitivity=1.04)
    assert found.limits.least_peak_complementary == pytest.approx(2.054, rel=5e-3)
    assert found.limits.largest_disk == pytest.approx(0.643, rel=5e-3)
    assert not found.refused
    assert found.margins.stable                                          # it can be stabilised, for what that is worth
    said = {v.name: v for v in judge_loop(asked.require, found)}
    assert "no law can" in said["disk_margin"].reason
    assert "at most 0.64" in said["disk_margin"].reason
    assert "no law can" in said["peak_sensitivity"].reason
    found, asked = hopeless(disk_margin=0.6)                             # within reach of some law: this one's fault
    said = {v.name: v for v in judge_loop(asked.require, found)}
    assert not said["disk_margin"].passed
    assert "no law" not in said["disk_margin"].reason


def test_beyond_what_numbers_can_hold_the_answer_is_the_limit():
    plant = plant_of(wheel_machine(height=0.2, inertia=3.2 * 9.80665 * 0.2 / 36.0))
    found = design_stance(plant, goal(rate=100.0, latency=1.9))
    words = found.refused or judge_loop(Requirements(disk_margin=0.01), found)[-1].reason
    assert "|T|" in words
    assert "Riccati" not in words


def test_margins_at_the_computed_command_are_not_the_physical_ones():
    """At 10 ms the loop broken before the controller's memory is off by degrees and misses the upper gain limit."""
    plant = plant_of(wheel_machine())
    found = design_stance(plant, goal(rate=200.0, latency=0.01))
    sampled = sample_plant(plant, found.law.sample_time, found.law.latency)
    loop = command_break(sampled, found.law)
    on_paper = margins_of(view(loop, lambda _: loop))
    assert abs(np.degrees(on_paper.phase - found.margins.phase)) > 2.0
    top = found.margins.gain_upper
    closed = actuator_break(sampled, found.law).closed(1.005 * top)
    assert np.abs(np.linalg.eigvals(closed)).max() > 1.0                  # ours is where the physical loop is lost
    assert abs(on_paper.gain_upper / top - 1.0) > 0.2


def test_trim_time_needs_allow(tmp_path):
    text = Path("designs/bench-rig.yaml").read_text(encoding="utf-8")
    place = tmp_path / "d.yaml"
    given = text.replace("allow: {lean: 3 deg, lean_rate: 40 deg/s, momentum: 0.25 N*m*s, torque: 0.7 N*m}",
                         "weights: {states: [1, 1, 1], input: 1}\n  trim_time: 2 s").replace(
                             "../plants", str(load("designs/bench-rig.yaml").machine.source).rsplit("/", 1)[0])
    place.write_text(given, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load(str(place))
    assert "trim_time" in caught.value.problems[0].key
