"""From designs to what happened in every trial."""

from __future__ import annotations

from balance.api.load import Job
from balance.api.tell import Tell, quiet
from balance.design.records import Design
from balance.simulate.records import TrialResult
from balance.simulate.run import run_trials
from balance.simulate.stepped import Controller


def recover(
    job: Job,
    designs: tuple[Design, ...],
    record: bool = False,
    tell: Tell = quiet,
    controller: Controller | None = None,
) -> tuple[TrialResult, ...]:
    """Run the job's trials on every design that has a law; `record` keeps the time histories.

    `controller` stands in the law's place (compiled firmware, say).

    A stance for which no law could be designed runs no trial: `balance.check` says why.
    """
    results: list[TrialResult] = []
    for design in designs:
        if not design.refused:
            tell(f"trials on stance {design.plant.stance.name} (the first run after installing compiles)")
            results.extend(run_trials(design, job.goal, job.machine, record, controller))
    return tuple(results)
