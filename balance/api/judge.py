"""The same verdicts as `check`, for one half of the job: the loop alone, or the trials alone."""

from __future__ import annotations

from dataclasses import fields, replace

from balance.api.load import Job
from balance.check.judge import judge
from balance.check.records import Verdict
from balance.design.records import Design
from balance.goal.goal import Goal, Requirements
from balance.simulate.records import TrialResult

ON_TRIALS = ("momentum_used", "peak_lean", "settling_time", "friction_needed", "standing_swing", "bus_voltage")
"""Requirements that only a trial can answer."""


def judge_loop(job: Job, designs: tuple[Design, ...]) -> tuple[Verdict, ...]:
    """Judge what the loop answers without a trial: margins, and whether there is a law at all."""
    return judge(replace(job.goal, require=_only(job.goal, trials=False), trials={}), designs, ())


def judge_trials(
    job: Job, designs: tuple[Design, ...], trials: tuple[TrialResult, ...]
) -> tuple[Verdict, ...]:
    """Judge the trials: each outcome, and the requirements on them."""
    bare = tuple(replace(d, robustness=None) for d in designs)            # the worst case is the loop's half
    return judge(replace(job.goal, require=_only(job.goal, trials=True)), bare, trials)


def _only(goal: Goal, trials: bool) -> Requirements:
    """Return the requirements of one half, the others left out."""
    others = {f.name: None for f in fields(Requirements) if (f.name in ON_TRIALS) is not trials}
    return replace(goal.require, **others)
