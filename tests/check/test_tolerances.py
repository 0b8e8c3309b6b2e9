"""Verdicts on the worst case: judged where tolerances are stated, told with their cause, an error where there are none."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from balance.api.gains import gains
from balance.api.judge import judge_loop
from balance.api.load import load
from balance.design.steady import tolerable_offset
from balance.machine.tolerances import Tolerances

WORST = {"worst_phase_margin": 0.1, "worst_gain_margin_lower": 0.9, "worst_gain_margin_upper": 1.1,
         "worst_delay_margin": 1e-3, "worst_modulus_margin": 0.1, "worst_disk_margin": 0.1}
FIELDS = {"worst_phase_margin": "phase", "worst_gain_margin_lower": "gain_lower", "worst_gain_margin_upper": "gain_upper",
          "worst_delay_margin": "delay", "worst_modulus_margin": "modulus", "worst_disk_margin": "disk"}


@pytest.fixture(scope="module")
def job(root: Path):
    job = load(str(root / "designs" / "bench-rig.yaml"))
    return replace(job, goal=replace(job.goal, require=replace(job.goal.require, **WORST)))


@pytest.fixture(scope="module")
def designs(job):
    return gains(job)


def judged(job, designs, **require):
    asked = replace(job, goal=replace(job.goal, require=replace(job.goal.require, **require)))
    return {v.name: v for v in judge_loop(asked, designs)}


def test_each_limit_is_judged_on_the_worst_case(job, designs) -> None:
    found = judged(job, designs)
    cases = {case.margin: case for case in designs[0].robustness.cases}
    for name, margin in FIELDS.items():
        assert found[name].passed
        assert found[name].value == cases[margin].value
        assert found[name].reason.startswith("worst at ")
    assert found["stable_within_tolerances"].passed


@pytest.mark.parametrize("name", WORST)
def test_a_limit_between_nominal_and_worst_fails_and_says_where(job, designs, name: str) -> None:
    case = next(c for c in designs[0].robustness.cases if c.margin == FIELDS[name])
    verdict = judged(job, designs, **{name: (case.value + case.nominal) / 2.0})[name]
    assert not verdict.passed
    assert "the machine as stated has" in verdict.reason
    assert next(iter(case.at)).replace("_", " ") in verdict.reason


def test_a_standing_offset_within_the_tolerances_must_be_borne(job, designs) -> None:
    """The rig's own file allows 2 mm; the law bears what `steady` says and no more."""
    verdict = judged(job, designs)["offset_within_tolerances"]
    assert (verdict.passed, verdict.limit, verdict.value) == (True, 0.002, tolerable_offset(designs[0]))
    wide = replace(job, machine=replace(job.machine, tolerances=Tolerances(offset=1.05 * verdict.value)))
    failed = judged(wide, gains(wide))["offset_within_tolerances"]
    assert not failed.passed
    assert "fills the momentum in the long run" in failed.reason
    none = replace(job, machine=replace(job.machine, tolerances=Tolerances(mass=0.01)))
    assert "offset_within_tolerances" not in judged(none, gains(none))


def test_a_loop_lost_within_the_tolerances_fails(job) -> None:
    wide = replace(job, machine=replace(job.machine, tolerances=Tolerances(torque_constant=0.8)))
    found = judged(wide, gains(wide))
    assert not found["stable_within_tolerances"].passed
    assert found["stable_within_tolerances"].reason == "unstable at torque constant −80\u00a0%"
    assert not found["worst_disk_margin"].passed
    assert math.isnan(found["worst_disk_margin"].value)


def test_where_no_tolerance_acts_the_margin_as_stated_is_judged(job) -> None:
    idle = replace(job, machine=replace(job.machine, tolerances=Tolerances(flywheel_momentum=0.1)))
    designs = gains(idle)
    found = judged(idle, designs)
    assert "stable_within_tolerances" not in found
    assert found["worst_disk_margin"].value == designs[0].margins.disk
    assert found["worst_disk_margin"].reason == "worst at the machine as stated"


@pytest.mark.parametrize(("given", "key", "says"), [
    ("mass: 3 %", "tolerances.mass", "0.03 is ±3 %"), ("mass: 3", "tolerances.mass", "less than 0.9"),
    ("height: 0.1", "tolerances.height", "with its unit"), ("height: 290 mm", "tolerances.height", "less than the height"),
    ("weight: 0.1", "tolerances.weight", "`height`")])
def test_tolerances_that_cannot_be_meant_are_input_errors(command, root, tmp_path, given: str, key: str, says: str) -> None:
    machine = (root / "plants" / "bench-rig.yaml").read_text(encoding="utf-8")
    (tmp_path / "bench-rig.yaml").write_text(machine[:machine.index("tolerances:")] + f"tolerances: {{{given}}}\n",
                                             encoding="utf-8")
    design = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8").replace("../plants/", "")
    (tmp_path / "d.yaml").write_text(design, encoding="utf-8")
    answer = command("gains", tmp_path / "d.yaml", "--json")
    assert answer.code == 2
    (error,) = answer.answer()["errors"]
    assert error["key"] == key
    assert says in error["allowed"]
    assert error["line"] == machine[:machine.index("tolerances:")].count("\n") + 1


def test_a_worst_case_without_tolerances_is_an_input_error(command, root: Path, tmp_path: Path) -> None:
    machine = (root / "plants" / "bench-rig.yaml").read_text(encoding="utf-8")
    (tmp_path / "bench-rig.yaml").write_text(machine[:machine.index("tolerances:")], encoding="utf-8")
    design = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8").replace("../plants/", "")
    (tmp_path / "d.yaml").write_text(design, encoding="utf-8")
    answer = command("gains", tmp_path / "d.yaml", "--json")
    assert answer.code == 2
    (error,) = answer.answer()["errors"]
    assert error["key"] == "require.worst_disk_margin"
    assert design.splitlines()[error["line"] - 1].strip().startswith("worst_disk_margin")
    assert "tolerances" in error["allowed"]
    jitter = design.replace("latency: 2 ms}", "latency: 2 ms, jitter: 0.5 ms}")
    (tmp_path / "d.yaml").write_text(jitter, encoding="utf-8")
    assert command("gains", tmp_path / "d.yaml").code == 0, "the twin: a range of delay is a tolerance"
