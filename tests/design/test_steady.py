"""Standing states against the nonlinear simulator, and against what energy says."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.steady import standing
from balance.goal.trials import OffsetShift, Trial
from balance.kernel.layout import COULOMB, KIND, VISCOUS, WHEEL
from balance.simulate.run import run_trials
from tests.design.machines import shipped


def dragless(plant):
    """Return the plant without drag: the linear balance knows none."""
    units = plant.unit_parameters.copy()
    units[units[:, KIND] == WHEEL, COULOMB] = 0.0
    units[units[:, KIND] == WHEEL, VISCOUS] = 0.0
    return replace(plant, unit_parameters=units)


@pytest.mark.parametrize(("name", "stance"), [("bench-rig", "line"), ("bench-rig-pid", "line"),
                                              ("scout-wheels", "on-fore-right"), ("quay-gyros", "on-left-right")])
def test_one_millimetre_stands_where_the_simulator_ends(name, stance):
    plant, g = shipped(name, stance)
    plant = dragless(plant)
    design = design_stance(plant, g)
    found = standing(design)
    trial = Trial(offset=OffsetShift(1e-3, 0.1, "outward"), lasts=25.0)
    result = run_trials(design, replace(g, trials={"slip": trial}), None, True)[0]
    # 25 s are more than ten of the slowest time constants; sin and cos of a small lean differ by 1e-3
    assert result.end_momentum == pytest.approx(found.momentum, rel=5e-3)
    assert result.trace.units[-1, ::2] == pytest.approx(found.speeds, rel=5e-3)


def test_capacity_over_standing_momentum():
    plant, g = shipped("bench-rig", "line")
    found = standing(design_stance(plant, g))
    assert found.offset == pytest.approx(1e-3 * plant.momentum_capacity / abs(found.momentum))
    assert found.tilt == pytest.approx(found.offset * plant.stance.mass * plant.stance.gravity / plant.stiffness)
    assert found.full_in == pytest.approx(plant.momentum_capacity / (plant.stance.mass * plant.stance.gravity * 1e-3))


def test_drag_power_is_torque_times_speed_plus_heat():
    """Bench rig: drag 3 mN·m + 8e-6 Ω over K_t 55 mN·m/A, R 0.25 Ω."""
    plant, g = shipped("bench-rig", "line")
    found = standing(design_stance(plant, g))
    speed = abs(found.speeds[0])
    drag = 3e-3 + 8e-6 * speed
    assert found.power == pytest.approx(drag * speed + 0.25 * (drag / 0.055) ** 2)


def test_an_unstable_loop_bears_nothing():
    plant, g = shipped("bench-rig", "line")
    design = design_stance(plant, g)
    lost = standing(replace(design, margins=replace(design.margins, stable=False)))
    assert (lost.offset, lost.tilt) == (0.0, 0.0)
    assert np.isnan(lost.momentum)
