"""The two halves of the verdicts, loop and trials, are together the whole: nothing is judged twice or forgotten."""

from __future__ import annotations

from dataclasses import fields, replace
from pathlib import Path

import pytest

from balance.api.check import check
from balance.api.judge import ON_TRIALS, judge_loop, judge_trials
from balance.api.load import load
from balance.goal.goal import Requirements

ASKED = Requirements(phase_margin=0.6, gain_margin_lower=0.6, gain_margin_upper=2.0, delay_margin=0.006, modulus_margin=0.5,
                     disk_margin=0.5, peak_sensitivity=1.8, momentum_used=0.8, peak_lean=0.05, settling_time=4.0,
                     friction_needed=0.5, standing_swing=0.01, bus_voltage=30.0, offset_error=0.001, worst_phase_margin=0.5,
                     worst_gain_margin_lower=0.7,
                     worst_gain_margin_upper=1.5, worst_delay_margin=0.004, worst_modulus_margin=0.4, worst_disk_margin=0.4)


def test_every_requirement_is_asked_for_here() -> None:
    assert all(getattr(ASKED, f.name) is not None for f in fields(Requirements))
    assert set(ON_TRIALS) < {f.name for f in fields(Requirements)}


@pytest.fixture(scope="module")
def job_and_result(root: Path):
    """The bench rig, asked for everything."""
    job = load(str(root / "designs" / "bench-rig.yaml"))
    job = replace(job, goal=replace(job.goal, require=ASKED))
    return job, check(job)


def test_the_halves_make_the_whole(job_and_result) -> None:
    job, result = job_and_result
    loop = {v.name: v for v in judge_loop(job, result.designs)}
    trials = {v.name: v for v in judge_trials(job, result.designs, result.trials)}
    whole = {v.name: v for v in result.verdicts}
    assert loop | trials == whole
    assert set(loop) & set(trials) == {"stable_loop"}  # said by both: without it neither margins nor trials mean anything
    required = {f.name for f in fields(Requirements)}
    assert required & set(trials) == set(ON_TRIALS)
    assert required <= set(whole)


def test_a_half_does_not_judge_what_belongs_to_the_other(job_and_result) -> None:
    job, result = job_and_result
    strict = replace(job, goal=replace(job.goal, require=replace(ASKED, momentum_used=1e-6)))
    assert all(v.passed for v in judge_loop(strict, result.designs))
    assert not all(v.passed for v in judge_trials(strict, result.designs, result.trials))
