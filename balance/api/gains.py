"""From a job to one law with its margins for each stance."""

from __future__ import annotations

from balance.api.load import Job
from balance.api.plant import plant
from balance.api.tell import Tell, quiet
from balance.design.build import design_stance
from balance.design.records import Design


def gains(job: Job, tell: Tell = quiet) -> tuple[Design, ...]:
    """Design the law of every stance of `job`, in the order of its stances.

    `tell` hears one line before each stance.  Raises InputError as `balance.api.plant.plant` does.
    """
    plants = plant(job.machine, job.stances, job.goal.fell)
    designs = []
    for built in plants:
        tell(f"designing for stance {built.stance.name}")
        designs.append(design_stance(built, job.goal))
    return tuple(designs)
