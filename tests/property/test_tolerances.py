"""The worst case does not know the units: the same machine in random kilograms, metres, seconds and amperes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.load import load
from balance.design.build import design_stance
from balance.design.robustness.ranges import ranges_of
from balance.design.robustness.worst import worst_case
from balance.goal.goal import Allow, Goal, Loop, LqrControl
from balance.machine.tolerances import PairMismatch, Tolerances
from balance.plant.build import build_plant
from balance.stance.build import build_stance
from tests.property.machines import random_machine
from tests.property.units import Units, rescaled

ROUNDING = 1e-5
"""Relative: the Riccati equation of badly scaled numbers; a wrong power of a unit is off by far more."""


def worst_of(machine, goal, stance):
    plant = build_plant(machine, build_stance(machine, stance))
    design = design_stance(plant, goal)
    return worst_case(design, ranges_of(plant, machine.tolerances, goal.loop))


@pytest.mark.parametrize(("name", "stance"), [("bench-rig", "line"), ("quay-gyros", "on-left-right")])
def test_margins_are_the_same_and_deviations_scale(root, name: str, stance: str) -> None:
    job = load(str(root / "designs" / f"{name}.yaml"), stance)
    rng = np.random.default_rng(8)
    units = Units(*np.exp(rng.uniform(-0.7, 0.7, 4)))
    other = replace(job.goal, loop=rescaled(job.goal.loop, units), control=replace(
        job.goal.control, allow=rescaled(job.goal.control.allow, units)))
    one, two = worst_of(job.machine, job.goal, stance), worst_of(rescaled(job.machine, units), other, stance)
    scale = {"": 1.0, "m": units.length, "s": units.time, "rad": 1.0}
    for a, b in zip(one.ranges, two.ranges, strict=True):
        assert (a.name, b.high) == (b.name, pytest.approx(a.high * scale[a.unit], rel=1e-12))
    for a, b in zip(one.cases, two.cases, strict=True):
        expected = a.value * (units.time if a.margin == "delay" else 1.0)
        assert b.value == pytest.approx(expected, rel=ROUNDING)
        assert set(a.at) == set(b.at)
    twin = replace(other, loop=job.goal.loop)
    assert worst_of(rescaled(job.machine, units), twin, stance).cases[0].value != pytest.approx(one.cases[0].value, rel=1e-3)


@pytest.mark.parametrize("seed", [4, 7, 13, 18])
def test_on_random_machines_no_worst_case_is_better_than_stated(seed: int) -> None:
    """Gimballed flywheels, pairs and wheels mixed, on legs: a law for each, and margins that only get worse."""
    machine = random_machine(np.random.default_rng(seed))
    stance = machine.stance_names()[0]
    plant = build_plant(machine, build_stance(machine, stance))
    momentum, torque = min(0.3 * plant.momentum_capacity, 5.0), min(0.8 * plant.torque_limit, 50.0)
    allow = Allow(0.05, 0.7, momentum, torque, 2.0)
    goal = Goal(1, "any", "", Loop(500.0, 0.002, 3e-4, 5e-4), LqrControl(allow=allow), {})
    design = design_stance(plant, goal)
    assert design.margins.stable
    tolerances = Tolerances(mass=0.03, height=0.004, inertia=0.05, torque_constant=0.08, bandwidth=0.2,
                            flywheel_momentum=0.03, pair_mismatch=PairMismatch(angle=0.02))
    worst = worst_case(design, ranges_of(plant, tolerances, goal.loop))
    for case in worst.cases:
        loses = case.value >= case.nominal if case.margin == "gain_lower" else case.value <= case.nominal
        assert loses or np.isnan(case.value), case.margin
    assert worst.cases[0].value < 0.995 * design.margins.disk, "and the disk margin in earnest"
