"""Tolerances, worst case, retuning and one gain set in `--json`: units in the keys, null where there is nothing."""

from __future__ import annotations

import json
import math
from dataclasses import replace

import pytest

from balance.api.gains import gains, one_gain_set
from balance.api.json_robust import json_one_gain_set, json_robust
from balance.api.load import load
from balance.design.records import Retuning
from balance.machine.tolerances import Tolerances


@pytest.fixture(scope="module")
def design(root):
    return gains(load(str(root / "designs" / "bench-rig.yaml")))[0]


def test_every_deviation_has_its_unit_and_lies_in_its_range(design) -> None:
    told = json_robust(design)["worst_case"]
    ranges = {key.replace("high_", ""): (one[key.replace("high", "low")], one[key], one["name"])
              for one in told["tolerances"] for key in one if key.startswith("high")}
    assert set(ranges) == {"share", "m"}, "this rig moves shares and lengths"
    by_name = {one["name"]: one for one in told["tolerances"]}
    for margin in told["margins"]:
        for key, value in margin["at"].items():
            name, _, unit = key.rpartition("_")
            assert by_name[name][f"low_{unit}"] <= value <= by_name[name][f"high_{unit}"]
    phase = next(m for m in told["margins"] if m["margin"] == "phase_deg")
    assert phase["nominal"] == pytest.approx(math.degrees(design.margins.phase))


def test_what_is_unstable_there_is_null(root) -> None:
    job = load(str(root / "designs" / "bench-rig.yaml"))
    job = replace(job, machine=replace(job.machine, tolerances=Tolerances(torque_constant=0.8)))
    told = json_robust(gains(job)[0])["worst_case"]
    assert told["stable"] is False
    assert {m["worst"] for m in told["margins"]} == {None}
    assert told["margins_at_worst_disk"]["stable"] is False
    json.dumps(told, allow_nan=False)


def test_nothing_asked_for_is_null(design) -> None:
    told = json_robust(replace(design, robustness=None))
    assert told == {"worst_case": None, "retuned": None, "gains_of": "line"}
    changed = Retuning({"lean": 0.5}, math.nan, 1.1, 12, 0.75)
    assert json_robust(replace(design, retuned=changed))["retuned"] == {
        "allow_times": {"lean": 0.5}, "worst_disk_before": None, "worst_disk_after": 1.1, "weights_tried": 12,
        "part_of_the_way": 0.75}
    assert json_one_gain_set(None) is None


def test_one_gain_set_beside_each_stances_own(root) -> None:
    designs = gains(load(str(root / "designs" / "quay-gyros.yaml")), worst=False)
    told = json_one_gain_set(one_gain_set(designs))
    assert [one["stance"] for one in told["stances"]] == [d.plant.stance.name for d in designs]
    assert told["gains_of"] in [d.plant.stance.name for d in designs]
    assert told["stances"][0]["own"]["disk"] == designs[0].margins.disk
