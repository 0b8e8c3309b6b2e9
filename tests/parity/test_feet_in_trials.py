"""Each foot's loads in closed-loop trials against an independent multibody engine's inverse dynamics along the trace."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.goal.read import read_goal
from balance.goal.trials import Push, Start, Trial
from balance.kernel import layout as at
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.simulate.run import run_one
from balance.stance.build import build_stance
from tests.parity.reduced import reduced
from tests.parity.test_random_machines import feet_of_the_engine

BETWEEN = 2e-3
"""Of the largest change of load or friction: the engine looks once in a sample of 2 ms, the kernel at every sub-step."""

PUSHED = (0.1, 0.4)
"""s: the push lasts from the first to the second, on sampling instants."""


@pytest.fixture(scope="module", params=["on-left-right", "on-fore-right"])
def scout(request):
    """Return (machine, goal, design) of the scout with two crossed wheels on one stance."""
    machine, goal = read_machine("plants/trellis-scout.yaml"), read_goal("designs/scout-wheels.yaml")
    return machine, goal, design_stance(build_plant(machine, build_stance(machine, request.param)), goal)


def trials():
    """Return trials by what is in them, and the push's force in N along w at time t."""
    impulse, height = 0.6, 0.25
    force = impulse / (PUSHED[1] - PUSHED[0])
    push = Push(impulse, height, "outward", PUSHED[0], PUSHED[1] - PUSHED[0])
    yield Trial(start=Start(0.03, 0.0, 0.0, "inward"), lasts=1.0), lambda t: 0.0
    yield Trial(push=push, lasts=1.0), lambda t: force * (PUSHED[0] - 1e-9 < t < PUSHED[1] - 1e-9)


def by_the_engine(machine, design, trace, push):
    """Return the feet's forces at each sample, (n, 5), from the states of the trace alone: motor torques by K_t i."""
    engine, out = reduced(machine, design.plant.stance), []
    names = list(machine.stabilisers)
    for k, t in enumerate(trace.time):
        X = np.array([trace.lean[k] + design.plant.balanced_lean, trace.lean_rate[k], *trace.units[k]])
        angles, rates, applied = {"line": X[0]}, {"line": X[1]}, {"line": trace.disturbance[k]}
        for i, name in enumerate(names):
            wheel = machine.stabilisers[name]
            speed, drag = X[2 + 2 * i], wheel.drag
            rates[name] = speed
            applied[name] = (machine.motors[wheel.motor].torque_constant * X[3 + 2 * i]
                             - drag.coulomb * np.clip(speed, -1.0, 1.0) - drag.viscous * speed)
        M, bias = engine.equations(angles, rates)
        a = np.linalg.solve(M, [applied[n] for n in engine.columns] - bias)
        feet = feet_of_the_engine(design.plant, engine, X[0], angles, rates, dict(zip(engine.columns, a, strict=True)))
        # what pushes beside the ground leaves that much less for the feet; on the lever of the centre of mass
        share = design.plant.body_parameters[at.COM_ALONG] / design.plant.stance.length
        out.append(feet - push(t) * np.array([0.0, 0.0, 1.0 - share, share, 0.0]))
    return np.array(out)


def compared(machine, goal, design, trial, push, kernel_design=None):
    """Return the largest differences of the feet's least loads and frictions, as shares of how much each changes."""
    run = run_one(kernel_design or design, goal, "feet", trial, "outward", True)
    assert run.verdict in ("recovered", "did not settle")       # a second is enough for the feet
    forces = by_the_engine(machine, design, run.trace, push)
    off = []
    for i, foot in enumerate(run.feet):
        load = forces[:, i]
        friction = np.hypot(forces[:, 2 + i], forces[:, 4] * load / forces[:, :2].sum(axis=1)) / load
        off.append(abs(foot.least_load - load.min()) / (load.max() - load.min()))
        off.append(abs(foot.friction_needed - friction.max()) / friction.max())
    return max(off)


def test_loads_and_friction_of_each_foot(scout):
    for trial, push in trials():
        assert compared(*scout, trial, push) < BETWEEN


def test_what_is_left_out_is_seen(scout):
    """The twins: a kernel without the wheels' twist about u and w, and an engine that forgets the push's own force."""
    machine, goal, design = scout
    rows = design.plant.unit_parameters.copy()
    rows[:, [at.COUPLING_U, at.COUPLING_W]] = 0.0
    flat = replace(design, plant=replace(design.plant, unit_parameters=rows))
    lean, pushed = trials()
    along = np.abs(design.plant.unit_parameters[:, at.AXIS_SHARE])
    if np.all((along < 1e-9) | (along > 1.0 - 1e-9)):             # the one wheel that turns has its axis along the line
        assert compared(machine, goal, design, *lean, flat) < BETWEEN
    else:
        assert compared(machine, goal, design, *lean, flat) > 100 * BETWEEN
    assert compared(machine, goal, design, pushed[0], lambda t: 0.0) > 100 * BETWEEN
