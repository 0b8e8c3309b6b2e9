"""The linear responses: where they end in closed form, the nonlinear simulator beside them, and the worst case drawn."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.gains import gains
from balance.api.load import load
from balance.design.loop import close, sample_plant
from balance.goal.trials import Push, TorqueStep, Trial
from balance.machine.tolerances import Tolerances
from balance.report.figures.nyquist import count_words
from balance.report.loops import picture_loop
from balance.report.responses import PART, disturbed, picture_responses, respond
from balance.simulate.run import run_one
from tests.report.conftest import ROOT

CASES = [("bench-rig", "line"), ("bench-rig-sensed", "line"), ("quay-gyros", "on-left-right"),
         ("scout-wheels", "on-fore-left")]


@pytest.mark.parametrize(("name", "stance"), CASES)
def test_a_lasting_torque_ends_in_a_lean_against_it(answered, name, stance) -> None:
    """At rest gravity alone carries the torque d: lean −d/G, no torque from the stabilisers.

    e⁻⁵ of the slowest mode is left where the drawing ends.  With a wheel's own drag (bench rig: 8e-6 N·m·s/rad) a share
    of d is carried by it: below a thousandth.
    """
    design = answered(name, stance).designs[0]
    step = picture_responses(design)[0].nominal
    size = np.radians(step.lean[-1]) * -design.plant.stiffness
    told = respond(design.plant, design.law, 0.0, 1.0, 0.0, 30.0)
    assert np.radians(told.lean[-1]) == pytest.approx(-1.0 / design.plant.stiffness, rel=2e-3)
    assert np.radians(told.lean[-1]) != pytest.approx(1.0 / design.plant.stiffness, rel=0.5), "not with the torque"
    assert abs(told.torque[-1]) < 2e-3
    assert size > 0.0


@pytest.mark.parametrize(("name", "stance"), [CASES[0], CASES[2]])
def test_the_simulator_moves_the_same_way(name, stance) -> None:
    """Push and torque step so small that neither sine nor limits matter; friction, which has no slope, is left out.

    Both begin a thousandth of a sample before a sampling instant, as the drawing's do: what happens just after one is felt
    a sample later.  1 % of the peak: the drives' voltages and the recording's own time steps are in the simulator.
    """
    job = load(str(ROOT / "designs" / f"{name}.yaml"), stance)
    wheels = {key: replace(unit, drag=replace(unit.drag, coulomb=0.0)) if getattr(unit, "drag", None) else unit
              for key, unit in job.machine.stabilisers.items()}
    job = replace(job, goal=replace(job.goal, loop=replace(job.goal.loop, jitter=0.0)),
                  machine=replace(job.machine, stabilisers=wheels, imu=None))
    design = gains(job, worst=False)[0]
    impulse = 0.004 * design.plant.momentum_capacity / design.plant.stance.height
    step = 0.01 * design.plant.torque_limit
    begins = 40.0 * design.law.sample_time
    just = begins - 1e-3 * design.law.sample_time
    trials = (Trial(push=Push(impulse, design.plant.stance.height, "outward", start=just), lasts=2.2),
              Trial(torque=TorqueStep(step, start=just, toward="outward"), lasts=2.2))
    for trial, size in zip(trials, ((0.0, impulse * design.plant.stance.height), (step, 0.0)), strict=True):
        trace = run_one(design, job.goal, "small", trial, "outward", True).trace
        drawn = respond(design.plant, design.law, 0.0, *size, 2.0)
        seen = np.interp(drawn.time[1:], trace.time - begins, np.degrees(trace.lean))
        assert np.abs(drawn.lean[1:] - seen).max() < 0.01 * np.abs(drawn.lean).max()
        stored = np.interp(drawn.time[1:], trace.time - begins, trace.momentum)
        assert np.abs(drawn.momentum[1:] - stored).max() < 0.01 * np.abs(drawn.momentum).max()
        late = respond(design.plant, design.law, 5.0 * design.law.sample_time, *size, 2.0)
        assert np.abs(late.lean[1:] - seen).max() > 0.01 * np.abs(drawn.lean).max(), "the twin: five samples later"


def test_each_is_as_large_as_half_the_limits_bear(answered) -> None:
    design = answered("scout-wheels", "on-fore-left").designs[0]
    for picture in picture_responses(design):
        used = max(np.abs(picture.nominal.torque).max() / design.plant.torque_limit,
                   np.abs(picture.nominal.momentum).max() / design.plant.momentum_capacity)
        assert used == pytest.approx(PART, rel=1e-9)


def test_the_worst_case_is_the_machine_that_was_found(answered) -> None:
    """The same size on the deviated machine: it starts with the push over its own inertia."""
    design = answered("bench-rig", "line").designs[0]
    push = picture_responses(design)[1]
    found = design.robustness
    ratio = found.worst.model.disturbance[1] / design.plant.model.disturbance[1]
    slope = [(m.lean[1] - m.lean[0]) / m.time[1] for m in (push.worst, push.nominal)]
    # over the first sample the torque has hardly begun: a per cent
    assert slope[0] / slope[1] == pytest.approx(ratio, rel=0.01)
    assert ratio < 0.97
    assert picture_responses(replace(design, robustness=None))[1].worst is None
    loop = picture_loop(design)
    assert loop.worst.stable
    assert loop.worst.count.found == loop.worst.count.needed == 1
    assert count_words(loop).endswith("stable, also in the worst case.")
    assert np.abs(1.0 + loop.worst.loop).min() == pytest.approx(loop.worst.modulus, rel=2e-3)    # grid of 1200 points
    assert loop.worst.modulus < loop.modulus


def test_an_unstable_worst_case_is_drawn_as_a_loop_only(root) -> None:
    job = load(str(root / "designs" / "bench-rig.yaml"))
    job = replace(job, machine=replace(job.machine, tolerances=Tolerances(torque_constant=0.8)))
    design = gains(job)[0]
    worst = picture_loop(design).worst
    assert not worst.stable
    assert worst.count.sure
    assert worst.count.found != worst.count.needed, "Nyquist says so too"
    assert "in the worst case NOT stable" in count_words(picture_loop(design))
    assert all(one.worst is None for one in picture_responses(design))
    broken = replace(design, margins=replace(design.margins, stable=False))
    assert picture_responses(broken) == ()


def test_the_disturbance_is_discretised_with_the_rest(answered) -> None:
    """As one more state that nothing moves: the same closed loop, and a pole at 1."""
    design = answered("quay-gyros", "on-left-right").designs[0]
    law = design.law
    with_it = close(sample_plant(disturbed(design.plant), law.sample_time, law.latency), law)
    poles = np.sort_complex(np.linalg.eigvals(with_it))
    known = np.sort_complex(np.append(design.poles, 1.0))
    # eigenvalues of the delay's Jordan block at 0 are found to about 1e-6 only
    assert np.allclose(poles[np.abs(poles) > 0.1], known[np.abs(known) > 0.1], atol=1e-8)
