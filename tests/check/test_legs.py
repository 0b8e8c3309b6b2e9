"""What is said of legs that give: in the plant's table and JSON, and why a loop is lost because of them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.json_plant import json_plant
from balance.api.load import load
from balance.check.loop import judge_loop
from balance.cli.show_plant import show_plant
from balance.design.build import design_stance
from balance.machine.legs import LegCompliance
from balance.plant.build import build_plant
from balance.report.facts import machine_table
from balance.stance.build import build_stance


def rig(**give):
    """Return the plant of the shipped rig on other legs, and its goal."""
    job = load("designs/bench-rig-on-legs.yaml", "line")
    machine = replace(job.machine, leg_compliance=LegCompliance(**give) if give else job.machine.leg_compliance)
    return build_plant(machine, build_stance(machine, "line")), job.goal


@pytest.mark.parametrize(("give", "words"), [
    ({"height": 0.15, "stiffness": 2.0}, "the legs buckle: 2 N·m/rad is below the critical 2.19 N·m/rad"),
    ({"height": 0.15, "stiffness": 6000.0, "damping": 0.02}, "on stiff legs the same law holds")])
def test_the_reason_names_the_legs(give, words):
    plant, goal = rig(**give)
    stability = judge_loop(goal.require, design_stance(plant, goal))[0]
    assert not stability.passed
    assert words in stability.reason


def test_legs_that_do_no_harm_are_not_blamed():
    plant, goal = rig()
    assert judge_loop(goal.require, design_stance(plant, goal))[0].reason == ""


def test_table_and_json_tell_the_same():
    plant, _ = rig()
    told = json_plant((plant,))["stances"][0]["leg_compliance"]
    assert told["stiffness_n_m_per_rad"] == 600.0
    assert told["critical_stiffness_n_m_per_rad"] == pytest.approx(3.2 * 9.80665 * 0.13 * 0.15 / 0.28)
    poles = np.linalg.eigvals(plant.model.A)
    swing = poles[poles.imag > 0][0]
    assert told["mode_rad_s"] == pytest.approx(abs(swing))
    assert told["mode_damping_ratio"] == pytest.approx(-swing.real / abs(swing))
    assert told["unstable_poles_rad_s"] == pytest.approx([plant.unstable_pole])
    text = show_plant((plant,))
    page = {row.label: row.cells for row in machine_table((plant,)).rows}
    for label, word in (("leg stiffness", "their stiffness"), ("trunk and legs swing at", "trunk and legs swing at")):
        assert page[word][0] in next(line for line in text.splitlines() if line.startswith(label))
    assert "29.6 Hz" in text


def test_stiff_legs_are_not_mentioned():
    job = load("designs/bench-rig.yaml", "line")
    plant = build_plant(job.machine, build_stance(job.machine, "line"))
    assert json_plant((plant,))["stances"][0]["leg_compliance"] is None
    assert "leg stiffness" not in show_plant((plant,))
