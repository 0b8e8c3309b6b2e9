"""From a job to one law with its margins for each stance."""

from __future__ import annotations

from dataclasses import replace

from balance.api.load import Job
from balance.api.plant import plant
from balance.api.retuned import borne_by_trials
from balance.api.tell import Tell, quiet
from balance.base.errors import InputError, Problem
from balance.design.build import design_stance
from balance.design.records import Design, Range
from balance.design.robustness.one_law import OneLaw, compared, share
from balance.design.robustness.ranges import ranges_of
from balance.design.robustness.retune import retune
from balance.design.robustness.worst import worst_case
from balance.goal.goal import LqrControl
from balance.plant.record import Plant


def gains(job: Job, tell: Tell = quiet, worst: bool = True) -> tuple[Design, ...]:
    """Design the law of every stance of `job`, in the order of its stances.

    With `worst`, the worst case within the tolerances is searched where any are stated.  Where the design file wants one
    gain set, every stance of the machine has its say in it, also those not asked for.  `tell` hears one line before each
    step.  Raises InputError as `balance.api.plant.plant` does, and for tolerances wider than the machine is high.
    """
    names = job.machine.stance_names() if job.goal.control.one_gain_set else job.stances
    plants = plant(job.machine, names, job.goal.fell)
    designs = tuple(_designed(job, built, tell) for built in plants)
    if job.goal.control.one_gain_set:
        designs = share(designs, job.goal)
    asked = tuple(d for d in designs if d.plant.stance.name in job.stances)
    return tuple(_tried(job, d, tell) for d in asked) if worst else asked


def one_gain_set(designs: tuple[Design, ...]) -> OneLaw | None:
    """Return one gain set for all stances compared with one per stance, or None where there is nothing to compare."""
    return compared(designs)


def _designed(job: Job, built: Plant, tell: Tell) -> Design:
    """Design one stance, its weights chosen anew where the file asks for it."""
    goal, changed = job.goal, None
    if isinstance(goal.control, LqrControl) and goal.control.retune == "robust" and built.acts:
        tell(f"retuning for stance {built.stance.name}")
        goal, changed = retune(built, goal, _ranges(job, built), borne_by_trials(job, built))
    tell(f"designing for stance {built.stance.name}")
    return replace(design_stance(built, goal), retuned=changed)


def _tried(job: Job, design: Design, tell: Tell) -> Design:
    """Add the worst case within the tolerances."""
    ranges = _ranges(job, design.plant)
    if ranges:
        tell(f"searching the worst case on stance {design.plant.stance.name}")
    return replace(design, robustness=worst_case(design, ranges))


def _ranges(job: Job, built: Plant) -> tuple[Range, ...]:
    """Return what may move on this stance; InputError where the centre of mass could be below the line."""
    given, stance = job.machine.tolerances, built.stance
    if given is not None and given.height >= stance.height > 0.0:
        key = "tolerances.height"
        line, column = job.machine.marks.get(key, (0, 0))
        raise InputError([Problem(job.machine.source, line, column, key, f"{given.height:g} m",
                                  f"less than the height of the centre of mass on {stance.name}, {stance.height:.4g} m")])
    return ranges_of(built, given, job.goal.loop)
