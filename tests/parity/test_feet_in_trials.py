"""Each foot's loads in closed-loop trials against an independent multibody engine's inverse dynamics along the trace."""

from __future__ import annotations

from dataclasses import fields, replace
from functools import cache

import numpy as np
import pytest

from balance.goal.read import read_goal
from balance.goal.trials import Push, Start, Trial
from balance.kernel import layout as at
from balance.machine.read import read_machine
from balance.machine.stabilisers import GimballedFlywheel
from balance.plant.build import build_plant
from balance.simulate.run import run_one
from balance.size.trial import unmeasured
from balance.stance.build import build_stance
from tests.parity.reduced import reduced
from tests.parity.test_random_machines import feet_of_the_engine, motion

TOLERANCE = 1e-6
"""Of the largest change of load or friction: doubles on both sides, and a change is down to a thousandth of a load."""

BEGIN, END, LASTS = 0.05, 0.15, 0.25
"""s: of a push, on sampling instants, and of a trial."""
NEWTONS = {"scout": 2.0, "quay": 10.0}


def quick(goal, rate):
    """Return the goal with samples as short as the kernel's sub-steps, so that a trace shows every state it looked at.

    Without jitter, and one sample of latency: a command then holds from sample to sample.
    """
    return replace(goal, loop=replace(goal.loop, rate=rate, latency=1.0 / rate, jitter=0.0))


@cache
def scout(stance):
    """Return (machine, goal, design) of the scout with two crossed wheels; slow current loops allow longer steps."""
    machine, goal = read_machine("plants/trellis-scout.yaml"), quick(read_goal("designs/scout-wheels.yaml"), 2560.0)
    motors = {name: replace(motor, bandwidth=100.0) for name, motor in machine.motors.items()}
    machine = replace(machine, motors=motors)
    return machine, goal, unmeasured(build_plant(machine, build_stance(machine, stance)), goal)


@cache
def single(stance):
    """Return the quay carrier with one flywheel of the pair only, spinning about the vertical."""
    machine, goal = read_machine("plants/quay-carrier.yaml"), quick(read_goal("designs/quay-gyros.yaml"), 4000.0)
    pair = machine.stabilisers["gyros"]
    kept = {f.name: getattr(pair, f.name) for f in fields(GimballedFlywheel)}
    machine = replace(machine, stabilisers={"gyro": GimballedFlywheel(**kept)})
    return machine, goal, unmeasured(build_plant(machine, build_stance(machine, stance)), goal)


def trial_of(kind, newtons):
    """Return a lean that is let go, or a push that lasts."""
    if kind == "lean":
        return Trial(start=Start(0.015, 0.0, 0.0, "outward"), lasts=LASTS)
    return Trial(push=Push(newtons * (END - BEGIN), 0.3, "outward", BEGIN, END - BEGIN), lasts=LASTS)


def ran(case, kind, newtons, design=None):
    _, goal, own = case
    run = run_one(design or own, goal, "feet", trial_of(kind, newtons), "outward", True)
    assert not run.verdict.startswith("fell")
    return run


def state(design, trace, k):
    return np.array([trace.lean[k] + design.plant.balanced_lean, trace.lean_rate[k], *trace.units[k]])


def wheels_move(machine, design, engine, trace, k):
    """Return (angles, rates, accelerations) of the engine's own, from the states of the trace alone: torques by K_t i."""
    X = state(design, trace, k)
    angles, rates, applied = {"line": X[0]}, {"line": X[1]}, {"line": trace.disturbance[k]}
    for i, (name, wheel) in enumerate(machine.stabilisers.items()):
        speed, drag = X[2 + 2 * i], wheel.drag
        rates[name] = speed
        applied[name] = (machine.motors[wheel.motor].torque_constant * X[3 + 2 * i]
                         - drag.coulomb * np.clip(speed, -1.0, 1.0) - drag.viscous * speed)
    M, bias = engine.equations(angles, rates)
    a = np.linalg.solve(M, [applied[n] for n in engine.columns] - bias)
    return angles, rates, dict(zip(engine.columns, a, strict=True))


def flywheel_moves(machine, design, engine, trace, k):
    """The same for a flywheel on a servo: its rate goes to the command as e^(−λt), so two samples give the command."""
    units, rate = design.plant.unit_parameters, trace.units[:, 1]
    keeps = np.exp(-units[0, at.RATE_LAG] * (trace.time[1] - trace.time[0]))
    asked = np.array([(rate[k + 1] - keeps * rate[k]) / (1.0 - keeps)])
    return motion(machine, design.plant, engine, state(design, trace, k), asked, trace.disturbance[k], units)[:3]


def by_the_engine(case, run, moves, newtons=0.0):
    """Return the feet's forces at every sample but the last, (n, 5); what pushes is taken off at the centre of mass."""
    machine, _, design = case
    engine, trace, out = reduced(machine, design.plant.stance), run.trace, []
    share = design.plant.body_parameters[at.COM_ALONG] / design.plant.stance.length
    for k in range(len(trace.time) - 1):
        lean = trace.lean[k] + design.plant.balanced_lean
        feet = feet_of_the_engine(design.plant, engine, lean, *moves(machine, design, engine, trace, k))
        pushed = newtons if BEGIN - 1e-9 < trace.time[k] < END - 1e-9 else 0.0
        out.append(feet - pushed * np.array([0.0, 0.0, 1.0 - share, share, 0.0]))
    return np.array(out)


def apart(run, forces):
    """Return the largest differences of the feet's least loads and frictions, as shares of how much each changes."""
    off = []
    for i, foot in enumerate(run.feet):
        load = forces[:, i]
        friction = np.hypot(forces[:, 2 + i], forces[:, 4] * load / forces[:, :2].sum(axis=1)) / load
        off.append(abs(foot.least_load - load.min()) / (load.max() - load.min()))
        off.append(abs(foot.friction_needed - friction.max()) / friction.max())
    return max(off)


def flat(design, *places):
    """Return the design with what its units do off the line forgotten."""
    rows = design.plant.unit_parameters.copy()
    rows[:, places] = 0.0
    return replace(design, plant=replace(design.plant, unit_parameters=rows))


@pytest.mark.parametrize(("stance", "twists"), [("on-left-right", False), ("on-fore-right", True)])
def test_crossed_wheels(stance, twists):
    """On left and right the wheel that turns has its axis along the line; elsewhere both twist the machine on its feet.

    The twin is a kernel without the wheels' axes square to the line.
    """
    case = scout(stance)
    run = ran(case, "lean", 0.0)
    forces = by_the_engine(case, run, wheels_move)
    assert apart(run, forces) < TOLERANCE
    forgets = ran(case, "lean", 0.0, flat(case[2], at.COUPLING_U, at.COUPLING_W))
    assert bool(apart(forgets, forces) > 0.1) is twists


def test_a_push_that_lasts_is_held_by_the_feet():
    """The twin: an engine that forgets the push's own force."""
    case, force = scout("on-fore-right"), NEWTONS["scout"]
    run = ran(case, "push", force)
    assert apart(run, by_the_engine(case, run, wheels_move, force)) < TOLERANCE
    assert apart(run, by_the_engine(case, run, wheels_move)) > 0.1


def test_one_flywheel_twists_the_machine_on_its_feet():
    """H sin γ γ̇ about the vertical and θ̇ e × H: the feet hold both, in opposite senses. The twin forgets them."""
    case = single("on-left-right")
    for kind, force in (("lean", 0.0), ("push", NEWTONS["quay"])):
        run = ran(case, kind, force)
        forces = by_the_engine(case, run, flywheel_moves, force)
        assert apart(run, forces) < TOLERANCE
        forgets = ran(case, kind, force, flat(case[2], at.S0_U, at.S0_W, at.GXS0_U, at.GXS0_W))
        assert apart(forgets, forces) > 0.05
