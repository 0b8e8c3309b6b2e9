"""Legs at rest and all feet down: what the tables say is what the stance room finds, with the bench's numbers."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.api.json_plant import json_plant
from balance.cli.show_plant import show_plant
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.report.at_rest import at_rest_table, gyro_table, joint_table, link_cautions, turn_table
from balance.stance.build import build_stance
from balance.stance.statics import statics_of


def of(name, **changes):
    machine = replace(read_machine(f"plants/{name}.yaml"), **changes)
    plants = tuple(build_plant(machine, build_stance(machine, s)) for s in machine.stance_names())
    return machine, plants, tuple(statics_of(machine, p.stance) for p in plants)


def test_the_bench_s_numbers_stand_behind_the_statics():
    """The built scout: its shift brings its own measured centre of mass over the line, not CAD's."""
    machine, plants, found = of("trellis-scout-built")
    _, _, cad = of("trellis-scout-built", measured=None)
    for one, by_parts, plant in zip(found, cad, plants, strict=True):
        assert one.shift.reached
        assert abs(one.shift.stance.offset) < 1e-10
        assert one.shift.stance.mass == plant.stance.mass != by_parts.stance.mass
        edge = min(one.support.edges, key=lambda e: abs(e.margin))
        assert {edge.foot_from, edge.foot_to} == {plant.stance.foot_from, plant.stance.foot_to}
        # lowering the lifted leg moves the centre of mass a little: legs of 0.35 kg of 5.7 by some 20 mm
        assert -edge.margin == pytest.approx(plant.stance.offset, abs=2e-3)
    assert machine.measured is not None


def test_table_text_and_json_tell_the_same():
    _, plants, found = of("quay-carrier")
    text, answer = show_plant(plants, (), found), json_plant(plants, (), found)
    rows = {row.label: row.cells for row in at_rest_table(found).rows}
    first = answer["stances"][0]
    assert rows["the trunk must shift, outward"][0] == f"{1e3 * first['shift_to_balance_m']:.2f}\u00a0mm"
    assert "the trunk must shift, outward" in text
    knee = np.degrees(first["joints"]["fore"]["knee_rad"])
    assert f"{knee:.1f}°".replace("-", "−") in joint_table(found).rows[0].cells[0]
    assert first["all_feet_down"]["least_margin_m"] == min(e["margin_m"] for e in first["all_feet_down"]["margins"])
    unit = first["units"][0]
    assert f"{unit['spin_up_s']:.3g}" in gyro_table(plants).rows[0].cells[2]
    assert answer["turn_times"][0]["time_s"] == pytest.approx(1.047, abs=1e-3)
    assert turn_table(plants).rows[0].cells[1] in text
    assert link_cautions(plants) == ()
    assert max(len(line) for line in text.splitlines()) <= 80


def test_a_foot_that_cannot_be_lowered_is_said():
    machine, _, found = of("quay-carrier")
    plan = machine.stances["on-left-right"]
    far = {"fore": (0.56, 0.0, 0.25)}
    machine = replace(machine, stances={**machine.stances, "on-left-right": replace(plan, lifted=far)})
    one = statics_of(machine, build_stance(machine, "on-left-right"))
    assert one.support is None
    assert "from hip to foot" in one.unsupported
    assert at_rest_table([one]).rows[0].label == "the trunk must shift, outward"
    assert found[0].support is not None


def test_three_numbers_have_no_legs():
    _, plants, found = of("bench-rig")
    assert at_rest_table(found) is None
    assert joint_table(found) is None
    assert gyro_table(plants) is None
    assert turn_table(plants) is None


def test_a_pair_that_needs_a_link_is_a_caution():
    machine = read_machine("plants/quay-carrier.yaml")
    loose = replace(machine, stabilisers={"gyros": replace(machine.stabilisers["gyros"], mount=None)})
    plants = tuple(build_plant(loose, build_stance(loose, s)) for s in loose.stance_names())
    assert len(link_cautions(plants)) == 3
    assert "caution: gyros on on-fore-right" in show_plant(plants).replace("\n  ", " ")


def test_one_wheel_on_three_lines_loses_by_the_cosine():
    """α = a·e per contact line; what does not act is told: cos 30° loses 13 %, a wheel along x has nothing about y."""
    machine = read_machine("plants/trellis-scout.yaml")
    machine = replace(machine, stabilisers={"long-wheel": machine.stabilisers["long-wheel"]})
    plants = tuple(build_plant(machine, build_stance(machine, s)) for s in machine.stance_names())
    lines = show_plant(plants).splitlines()
    rows = {p.stance.name: next(x for x in lines if x.startswith(p.stance.name) and "long-wheel" in x) for p in plants}
    for plant in plants:
        share = float(plant.stance.e_W[0])                                  # the trunk stands straight: a = world x
        row = rows[plant.stance.name]
        assert f"{share:+.4f}".replace("-", "−") in row
        loss = "all: square" if abs(share) < 1e-9 else f" {100 * (1 - abs(share)):.0f}\u00a0%"
        assert loss in row
    assert "all: square" in rows["on-left-right"]
    assert plants[1].acts
    assert not plants[0].acts
