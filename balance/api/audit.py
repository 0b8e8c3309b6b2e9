"""From designs to how exact their trials are."""

from __future__ import annotations

from balance.api.json_numbers import Tree, number
from balance.api.load import Job
from balance.api.tell import Tell, quiet
from balance.design.records import Design
from balance.simulate.audit import Audit, audit_trials


def audit(job: Job, designs: tuple[Design, ...], tell: Tell = quiet) -> tuple[Audit, ...]:
    """Repeat the job's trials on every design with steps a quarter as long, and compare.

    Raises InputError as `balance.api.recover.recover` does.
    """
    found: list[Audit] = []
    for design in designs:
        tell(f"trials on stance {design.plant.stance.name} once more, in finer steps")
        found.extend(audit_trials(design, job.goal, job.machine))
    return tuple(found)


def json_audit(audits: tuple[Audit, ...]) -> Tree:
    """Write every comparison, SI, unit in the key."""
    return {"audit": [{
        "name": a.name, "stance": a.stance, "toward": a.toward, "lean_difference_rad": number(a.lean),
        "momentum_difference": number(a.momentum), "verdict": a.verdict, "finer_verdict": a.finer_verdict,
        "same_verdict": a.same_verdict} for a in audits]}
