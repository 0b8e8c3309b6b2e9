"""Trials of the shipped machines: verdicts, numbers that have a closed form, and twins that fail."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.design.build import design_stance
from balance.goal.goal import Loop
from balance.goal.read import read_goal
from balance.goal.trials import LiftOff, OffsetShift, Payload, Push, Slope, Start, TorqueStep, Trial
from balance.goal.troubles import Jitter, Missed, SupplyDrop
from balance.kernel import layout as at
from balance.machine.motors import Gear, Supply
from balance.machine.read import read_machine
from balance.machine.stabilisers import Drag
from balance.plant.build import build_plant
from balance.simulate.run import run_one, run_trials
from balance.simulate.setup import kernel_units, start_state
from balance.stance.build import build_stance


@pytest.fixture(scope="module")
def rig():
    machine, goal = read_machine("plants/bench-rig.yaml"), read_goal("designs/bench-rig.yaml")
    return machine, goal, design_stance(build_plant(machine, build_stance(machine, "line")), goal)


@pytest.fixture(scope="module")
def quay():
    machine, goal = read_machine("plants/quay-carrier.yaml"), read_goal("designs/quay-gyros.yaml")
    return machine, goal, design_stance(build_plant(machine, build_stance(machine, "on-left-right")), goal)


def ran(case, trial, toward="outward", record=False, design=None):
    return run_one(design or case[2], case[1], "it", trial, toward, record)


def test_every_trial_runs_in_every_direction_it_asks_for(rig):
    machine, goal, design = rig
    results = run_trials(design, goal, machine, False)
    assert [(r.name, r.toward) for r in results] == [(n, t) for n in goal.trials for t in ("outward", "inward")]
    assert all(r.verdict == "recovered" for r in results)
    assert all(r.trace is None for r in results)


def test_a_refused_design_runs_nothing(rig):
    machine, goal, design = rig
    assert run_trials(replace(design, refused="no law"), goal, machine, False) == ()


def test_mirror_image(rig):
    """The rig is symmetric: inward is outward with the sign changed."""
    out, into = (ran(rig, Trial(push=Push(0.25, 0.3)), way, True) for way in ("outward", "inward"))
    np.testing.assert_allclose(out.trace.lean, -into.trace.lean, atol=1e-12)
    assert out.peak_lean == pytest.approx(into.peak_lean, rel=1e-9)


def test_the_push_is_the_jump_of_the_lean_rate(rig):
    """Δθ̇ = P ℓ/J_rest (`physics.md`), J_rest as the plant reports it."""
    trace = ran(rig, Trial(push=Push(0.25, 0.3, start=0.1)), record=True).trace
    k = int(np.searchsorted(trace.time, 0.1 - 1e-9))
    assert trace.lean_rate[k] == pytest.approx(0.25 * 0.3 / rig[2].plant.inertia_free, rel=1e-9)
    assert trace.lean_rate[k - 1] == pytest.approx(0.0, abs=1e-12)


def test_a_short_push_does_nearly_what_an_impulse_does(rig):
    sudden = ran(rig, Trial(push=Push(0.25, 0.3)))
    short = ran(rig, Trial(push=Push(0.25, 0.3, lasts=0.004)))
    long = ran(rig, Trial(push=Push(0.25, 0.3, lasts=0.2)))
    assert short.peak_lean == pytest.approx(sudden.peak_lean, rel=0.05)
    assert long.peak_lean < 0.9 * sudden.peak_lean                # the twin


def test_where_it_stands_after_a_shift_gravity_balances(rig):
    """tan(lean) = -shift/h; the wheel keeps a standing speed."""
    result = ran(rig, Trial(offset=OffsetShift(0.003), lasts=10.0))
    assert result.verdict == "recovered"
    assert result.end_lean == pytest.approx(-math.atan(0.003 / 0.28), abs=2e-4)   # wheel drag 3.4 mN·m: 4e-4 rad at most
    assert abs(result.end_momentum) > 0.05


def test_where_it_stands_under_a_lasting_torque(rig):
    """sin(lean) = -d/G."""
    result = ran(rig, Trial(torque=TorqueStep(0.1), lasts=10.0))
    assert result.verdict == "recovered"
    assert result.end_lean == pytest.approx(-math.asin(0.1 / rig[2].plant.stiffness), abs=5e-4)


def test_a_law_blind_to_the_wheel_runs_away_and_is_told(rig):
    """Trap 4: no momentum feedback under a lasting torque: lean looks settled, the wheel does not stop gaining speed."""
    law = rig[2].law
    D = law.D.copy()
    D[2:] = 0.0
    blind = replace(rig[2], law=replace(law, D=D))
    result = ran(rig, Trial(torque=TorqueStep(0.02), lasts=6.0), design=blind)
    assert result.verdict == "did not settle" or result.verdict.startswith("fell")
    assert result.momentum_used > 2.0 * ran(rig, Trial(torque=TorqueStep(0.02), lasts=6.0)).momentum_used


def test_ten_times_less_torque_falls_and_says_why(rig):
    """The twin of every recovery here."""
    rows = rig[2].plant.unit_parameters.copy()
    rows[:, at.TORQUE_LIMIT] *= 0.1
    rows[:, at.CURRENT_LIMIT] *= 0.1
    weak = replace(rig[2], plant=replace(rig[2].plant, unit_parameters=rows))
    result = ran(rig, Trial(start=Start(math.radians(2.5))), design=weak)
    assert result.verdict == "fell outward"
    assert result.reason.startswith("torque limit reached at 0.00 s") or "current limit" in result.reason
    assert math.isinf(result.settling_time)
    assert ran(rig, Trial(start=Start(math.radians(2.5))), "inward", design=weak).verdict == "fell inward"


def test_inward_the_lifted_foot_catches_it(quay):
    trial = Trial(start=Start(math.radians(9.0)))
    assert ran(quay, trial, "outward").verdict == "fell outward"
    assert ran(quay, trial, "inward").verdict == "touched down"


def test_each_foot_has_its_loads_and_a_machine_of_three_numbers_has_none(quay, rig):
    """Standing near balance the two feet of the carrier carry its weight; soap under them is noticed at once."""
    trial = Trial(push=Push(2.0, 0.8, lasts=0.1))
    result = ran(quay, trial)
    stance = quay[2].plant.stance
    assert [foot.foot for foot in result.feet] == [stance.foot_from, stance.foot_to]
    assert sum(foot.least_load for foot in result.feet) == pytest.approx(stance.mass * stance.gravity, rel=0.01)
    assert result.friction_needed == max(foot.friction_needed for foot in result.feet)
    assert all(math.isnan(foot.slip) and math.isnan(foot.lift_off) for foot in result.feet)
    body = quay[2].plant.body_parameters.copy()
    body[at.FRICTION] = 0.5 * result.friction_needed
    soap = replace(quay[2], plant=replace(quay[2].plant, body_parameters=body))
    slips = ran(quay, trial, design=soap)
    assert all(0.1 <= foot.slip < 0.5 for foot in slips.feet)
    assert f"foot {stance.foot_from} slips at {slips.feet[0].slip:.2f} s" in slips.reason
    assert "slips" not in result.reason
    lumped = ran(rig, trial)
    assert lumped.feet == ()
    assert 0.0 < lumped.friction_needed < math.inf


@pytest.mark.parametrize("stored", [0.1, -0.2])
def test_stored_momentum_at_the_start(rig, stored):
    trace = ran(rig, Trial(start=Start(0.01, 0.3, stored)), record=True).trace
    assert trace.momentum[0] == pytest.approx(stored, rel=1e-12)
    assert trace.lean_rate[0] == 0.3


def test_stored_momentum_of_a_pair_is_its_gimbal_angle(quay):
    trace = ran(quay, Trial(start=Start(0.0, 0.0, 1.5)), record=True).trace
    assert trace.momentum[0] == pytest.approx(1.5, rel=1e-12)
    row = quay[2].plant.unit_parameters[0]
    expected = math.asin(1.5 / (2 * row[at.MOMENTUM] * row[at.E_GXS0]))
    assert trace.units[0, 0] == pytest.approx(expected, rel=1e-12)


def test_stored_momentum_is_shared_by_capacity():
    machine = read_machine("plants/trellis-scout.yaml")
    plant = build_plant(machine, build_stance(machine, "on-fore-right"))
    from balance.simulate.events import happening
    units = kernel_units(plant)
    X = start_state(plant, happening(Trial(start=Start(0.0, 0.0, 0.4)), "outward", plant.body_parameters, Loop(500.0), 1e-4,
                                      np.zeros(0), 0), units)
    speeds = X[2:6:2]
    assert plant.unit_parameters[:, at.COUPLING] @ speeds == pytest.approx(0.4, rel=1e-12)
    assert abs(speeds[0]) == pytest.approx(abs(speeds[1]), rel=1e-9)              # equal wheels: equal speeds


def test_lift_off_waits(quay):
    trace = ran(quay, Trial(lift_off=LiftOff(0.02, 0.05, 0.5, 0.1)), record=True).trace
    held = trace.time < 0.1 - 1e-9
    np.testing.assert_array_equal(trace.lean[held], trace.lean[0])
    np.testing.assert_array_equal(trace.command[held], 0.0)
    assert np.abs(trace.lean[~held] - trace.lean[0]).max() > 1e-3


def test_torque_is_the_rate_of_the_stored_momentum(rig):
    """T = dq/dt: the recorded torque integrates to the recorded momentum (trapezoids of 2 ms: 1 % of the peak)."""
    trace = ran(rig, Trial(torque=TorqueStep(0.2, 0.1, 0.3)), record=True).trace
    summed = np.concatenate([[0.0], np.cumsum(0.5 * (trace.torque[1:] + trace.torque[:-1]) * np.diff(trace.time))])
    assert np.abs(summed - trace.momentum).max() < 0.01 * np.abs(trace.momentum).max()
    assert np.all(trace.torque_limit > 0.0)


def test_momentum_of_the_whole_machine_is_balanced(rig):
    """J_rest Δθ̇ + Δq = ∫(M + d − drag) dt over a recorded run, from the recorded histories alone."""
    plant = rig[2].plant
    trace = ran(rig, Trial(torque=TorqueStep(0.2, 0.1, 0.3)), record=True).trace
    outer = plant.stiffness * np.sin(trace.lean) + trace.disturbance - plant.stance.drag * trace.lean_rate
    gained = np.cumsum(0.5 * (outer[1:] + outer[:-1]) * np.diff(trace.time))
    held = plant.inertia_free * trace.lean_rate[1:] + trace.momentum[1:]
    assert np.abs(gained - held).max() < 0.01 * np.abs(trace.momentum).max()      # the step's edge: one sample's trapezoid


def test_results_do_not_depend_on_recording(rig):
    trial = Trial(push=Push(0.25, 0.3))
    plain, recorded = ran(rig, trial), ran(rig, trial, record=True)
    assert replace(recorded, trace=None) == plain


def test_more_load_than_there_is_is_an_input_error(rig):
    machine, goal, design = rig
    asked = replace(goal, trials={"robbed": Trial(payload=Payload(-4.0, 0.28))})
    with pytest.raises(InputError, match=r"trials\.robbed\.payload\.mass.*taken off"):
        run_trials(design, asked, machine, False)


def test_a_load_beside_the_line_stands_where_gravity_balances(rig):
    """tan(lean) = -Σ m d/Σ m h: 60 g at 40 mm out and 400 mm up; 2.4 kg at 100 mm falls (the twin)."""
    result = ran(rig, Trial(payload=Payload(0.06, 0.4, 0.04), lasts=10.0))
    assert result.verdict == "recovered"
    stands = -math.atan(0.06 * 0.04 / (3.2 * 0.28 + 0.06 * 0.4))
    assert result.end_lean == pytest.approx(stands, abs=4e-4)     # the wheel's drag, as above
    assert ran(rig, Trial(payload=Payload(2.4, 0.4, 0.1), lasts=10.0)).verdict == "fell outward"


def test_ground_that_rises_inward_catches_sooner(quay):
    moves = Start(math.radians(1.5), 2.0)
    plain = ran(quay, Trial(start=moves), "inward")
    sooner = ran(quay, Trial(start=moves, slope=Slope(across=math.radians(3.0), at=0.0)), "inward")
    assert plain.verdict == sooner.verdict == "touched down"
    assert abs(sooner.end_lean - plain.end_lean) == pytest.approx(math.radians(3.0), rel=0.05)   # one sub-step of the fall


@pytest.mark.parametrize("trouble", [
    {"missed": Missed(samples=60)}, {"missed": Missed(share=0.8)}, {"jitter": Jitter(0.03)}])
def test_troubles_make_a_trial_harder(rig, trouble):
    shove = Trial(push=Push(0.25, 0.3))
    easy, hard = ran(rig, shove), ran(rig, replace(shove, **trouble))
    assert easy.verdict == "recovered"
    assert hard.verdict != "recovered" or hard.peak_lean > 1.05 * easy.peak_lean


def remade(rig, law="designs/bench-rig.yaml", supply=None, **wheel):
    """Return (goal, design) of the bench rig with another wheel or supply."""
    goal = read_goal(law)
    parts = {"wheel": replace(rig[0].stabilisers["wheel"], **wheel)}
    machine = replace(rig[0], stabilisers=parts, supply=supply or rig[0].supply)
    return goal, design_stance(build_plant(machine, build_stance(machine, "line")), goal)


NUDGE = Trial(push=Push(0.1, 0.3, toward="outward"), lasts=8.0)


SHORT = replace(NUDGE, lasts=1.0)


def nudged(case, trial=NUDGE):
    return run_one(case[1], case[0], "it", trial, "outward", False)


def test_stiction_makes_a_pid_swing_for_ever_and_a_bias_speed_cures_it(rig):
    """0.3 N·m to break loose: the wheel sticks, the lean grows, the wheel jumps. Turning at 30 rad/s it never sticks."""
    sticky, pid = Drag(0.003, 8e-6, 0.3), "designs/bench-rig-pid.yaml"
    smooth, sticks, cured = (nudged(remade(rig, pid, drag=drag, bias_speed=bias)) for drag, bias in
                             ((Drag(0.003, 8e-6), 0.0), (sticky, 0.0), (sticky, 30.0)))
    assert sticks.standing_swing > math.radians(0.02)
    assert smooth.standing_swing < 1e-3 * sticks.standing_swing
    assert cured.standing_swing < 1e-3 * sticks.standing_swing
    assert cured.end_momentum == pytest.approx(30.0 * rig[2].plant.unit_parameters[0, at.COUPLING], rel=0.01)


def test_play_in_the_gear_leaves_a_swing_that_grows_with_it(rig):
    """Without play none; the swing is in proportion to the play (a describing function knows no other length)."""
    none, fine, coarse = (nudged(remade(rig, gear=Gear(4.0, backlash=math.radians(play)))) for play in (0.0, 0.5, 2.0))
    assert none.standing_swing < math.radians(1e-5)
    assert coarse.standing_swing > math.radians(1e-3)
    assert coarse.standing_swing == pytest.approx(4.0 * fine.standing_swing, rel=0.25)
    assert coarse.peak_lean == pytest.approx(none.peak_lean, rel=0.02)


def test_hardly_any_play_is_no_play(rig):
    none, hardly = (nudged(remade(rig, gear=Gear(4.0, backlash=play)), SHORT) for play in (0.0, 1e-4))
    assert hardly.peak_lean == pytest.approx(none.peak_lean, rel=1e-3)
    assert hardly.peak_momentum == pytest.approx(none.peak_momentum, rel=1e-3)


def test_a_weak_supply_is_no_match_for_a_push(rig):
    """At a third of the voltage the wheel runs out of speed: 8 V/55 mV·s = 145 rad/s of 377."""
    goal, design = remade(rig)
    shove = Trial(push=Push(0.45, 0.3, toward="outward"))
    assert nudged((goal, design), shove).verdict == "recovered"
    weak = nudged((goal, design), replace(shove, supply=SupplyDrop(1.0 / 3.0, 0.0)))
    assert weak.verdict == "fell outward"
    assert "voltage limit" in weak.reason
    assert weak.deepest_sag > 16.0


def test_a_bus_that_takes_nothing_back_is_pumped_and_told(rig):
    goal, plain = remade(rig)
    pumped = remade(rig, supply=Supply(24.0, regenerates=False, capacitance=2e-3))[1]
    trial = Trial(push=Push(0.35, 0.3, toward="outward"))
    assert nudged((goal, plain), trial).peak_bus_voltage < 24.5
    high = nudged((goal, pumped), trial)
    assert high.peak_bus_voltage > 30.0
    clamped = remade(rig, supply=Supply(24.0, regenerates=False, capacitance=2e-3, overvoltage=27.0, brake_resistor=3.0))[1]
    assert nudged((goal, clamped), trial).peak_bus_voltage < 28.0


def test_a_coarse_servo_swings(quay):
    """Steps of 0.2 deg leave a limit cycle, a fine servo none."""
    rows = quay[2].plant.unit_parameters.copy()
    rows[0, at.RESOLUTION] = math.radians(0.2)
    coarse = replace(quay[2], plant=replace(quay[2].plant, unit_parameters=rows))
    trial = Trial(push=Push(2.0, 1.0, toward="outward"), lasts=8.0)
    fine, swings = ran(quay, trial), ran(quay, trial, design=coarse)
    assert fine.verdict == swings.verdict == "recovered"
    assert swings.standing_swing > 20.0 * fine.standing_swing


def test_a_supply_that_is_not_there_cannot_be_weakened(quay):
    asked = replace(quay[1], trials={"dark": replace(NUDGE, supply=SupplyDrop(0.5))})
    with pytest.raises(InputError, match=r"trials\.dark\.supply.*add `supply:`"):
        run_trials(quay[2], asked, quay[0], False)
