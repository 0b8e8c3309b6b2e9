"""What a trial measures does not know the units: the same machine and the same push in random kilograms, metres and amperes.

Seconds stay: limiters, sub-steps and the fading of drag have rates of their own (1/s), which are no numbers of the machine.
"""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from balance.api.load import load
from balance.design.build import design_stance
from balance.goal.trials import Push, Start, Trial
from balance.plant.build import build_plant
from balance.simulate.records import FootLoad, TrialResult
from balance.simulate.run import run_one
from balance.stance.build import build_stance
from tests.property.units import Units, rescaled

ROUNDING = 1e-5
"""Relative: the Riccati equation of badly scaled numbers; a wrong power of a unit is off by far more."""

POWERS = {  # kilogram, metre, second, ampere
    "peak_torque": (1, 2, -2), "peak_momentum": (1, 2, -1), "rms_torque": (1, 2, -2), "peak_current": (0, 0, 0, 1),
    "peak_bus_power": (1, 2, -3), "end_momentum": (1, 2, -1), "peak_bus_voltage": (1, 2, -3, -1),
    "deepest_sag": (1, 2, -3, -1), "peak_supply_current": (0, 0, 0, 1), "least_load": (1, 1, -2),
}
ABOUT_ZERO = {"end_lean": 1e-6, "end_momentum": 1e-6, "standing_swing": 1e-6}
"""rad or of the scaled unit: what has died out is rounding."""

PUSHED = Trial(push=Push(0.4, 0.5, "outward", 0.1, 0.06), start=Start(0.01), lasts=2.0)


def measured(machine, goal, stance, trial):
    design = design_stance(build_plant(machine, build_stance(machine, stance)), goal)
    return run_one(design, goal, "units", trial, "outward", False)


def disagreements(a, b, units: Units) -> list[str]:
    """Return the names of numbers of two records that are not each other's in the other units."""
    wrong = []
    for field in fields(a):
        one, two = getattr(a, field.name), getattr(b, field.name)
        if isinstance(one, float):
            due = one * units.factor(*POWERS.get(field.name, (0, 0, 0)))
            if not np.isclose(two, due, rtol=ROUNDING, atol=ABOUT_ZERO.get(field.name, 0.0), equal_nan=True):
                wrong.append(field.name)
    return wrong


@pytest.mark.parametrize(("name", "stance", "size"), [
    ("scout-wheels", "on-fore-right", 1.0), ("quay-gyros", "on-fore-left", 10.0), ("bench-rig", "line", 1.0)])
def test_every_number_of_a_trial_scales_with_its_unit(root, name: str, stance: str, size: float) -> None:
    job = load(str(root / "designs" / f"{name}.yaml"), stance)
    rng = np.random.default_rng(21)
    mass, length, current = np.exp(rng.uniform(-0.7, 0.7, 3))
    units = Units(mass, length, 1.0, current)
    trial = replace(PUSHED, push=replace(PUSHED.push, impulse=PUSHED.push.impulse * size))
    other = replace(job.goal, control=replace(job.goal.control, allow=rescaled(job.goal.control.allow, units)))
    one = measured(job.machine, job.goal, stance, trial)
    two = measured(rescaled(job.machine, units), other, stance, rescaled(trial, units))
    assert isinstance(one, TrialResult)
    assert disagreements(one, two, units) == []
    assert [f.foot for f in one.feet] == [f.foot for f in two.feet]
    for foot, again in zip(one.feet, two.feet, strict=True):
        assert isinstance(foot, FootLoad)
        assert disagreements(foot, again, units) == []
    # the twin: the push of the first in the units of the second is another push
    twin = measured(rescaled(job.machine, units), other, stance, trial)
    assert {"peak_lean", "friction_needed", "peak_torque"} <= set(disagreements(one, twin, units))
