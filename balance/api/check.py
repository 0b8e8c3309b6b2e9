"""The main job: build, design, try, judge."""

from __future__ import annotations

from balance.api.gains import gains
from balance.api.load import Job
from balance.api.recover import recover
from balance.api.tell import Tell, quiet
from balance.check.judge import judge
from balance.check.records import CheckResult


def check(job: Job, tell: Tell = quiet) -> CheckResult:
    """Judge every requirement of the job on each of its stances; the trials keep their time histories.

    Raises InputError as `balance.api.plant.plant` does.  What cannot be balanced is a verdict, not an error.
    """
    designs = gains(job, tell)
    trials = recover(job, designs, record=True, tell=tell)
    return CheckResult(job.machine, job.goal, designs, trials, judge(job.goal, designs, trials))
