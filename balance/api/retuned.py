"""What the trials say to retuned weights: they may not lose what the weights as given hold."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from balance.api.judge import judge_trials
from balance.api.load import Job
from balance.design.build import design_stance
from balance.goal.goal import Goal
from balance.plant.record import Plant
from balance.simulate.run import run_trials


def borne_by_trials(job: Job, built: Plant) -> Callable[[Goal], bool]:
    """Return a judge of weights on one stance: true where no requirement on the trials is lost that the file's own meet."""
    def missed(goal: Goal) -> set[str]:
        design = design_stance(built, goal)
        asked = replace(job, goal=goal)
        return {v.name for v in judge_trials(asked, (design,), run_trials(design, goal, job.machine, False)) if not v.passed}

    as_given: list[set[str]] = []

    def borne(goal: Goal) -> bool:
        if not as_given:
            as_given.append(missed(job.goal))
        return missed(goal) <= as_given[0]

    return borne
