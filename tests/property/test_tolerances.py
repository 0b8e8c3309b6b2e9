"""The worst case does not know the units: the same machine in random kilograms, metres, seconds and amperes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.load import load
from balance.design.build import design_stance
from balance.design.robustness.ranges import ranges_of
from balance.design.robustness.worst import worst_case
from balance.plant.build import build_plant
from balance.stance.build import build_stance
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
