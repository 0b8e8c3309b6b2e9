"""One candidate of the shortlist to a confirmed answer: trimmed or as it is, tested, and pushed until it falls."""

from __future__ import annotations

from dataclasses import asdict, dataclass

from balance.size.candidate import Candidate, added_mass
from balance.size.question import Question
from balance.size.trial import Tested, thorough
from balance.size.trim import built, trim
from balance.study.push import worst_push


@dataclass(frozen=True)
class Task:
    """A candidate, whether to make it as small as it can be, and the closed form's own least factor of momentum."""

    candidate: Candidate
    trimmed: bool
    closed_factor: float


@dataclass(frozen=True)
class Confirmed:
    """What the simulator says of a candidate. SI."""

    candidate: Candidate
    added: float            # kg
    passed: bool
    refused: str            # why not; "" where it passes
    binding: str            # "momentum" | "torque"; "" for one that has room left
    limited_by: str         # what fails first when the binding quantity is made smaller
    push: float             # N·s, worst case of both sides, at the height of the centre of mass
    best_possible: float    # N·s by the closed forms
    push_stance: str
    push_toward: str
    power: float            # W, most drawn in a trial
    momentum_used: float    # share of the capacity
    capacity: float         # N·m·s about the line of the stance that is pushed
    torque: float           # N·m about it
    rms_torque: float       # N·m about the line, hardest trial
    ratio: float            # least momentum by simulation ÷ least by the closed forms; 0 where not trimmed


def confirm(question: Question, task: Task) -> Confirmed:
    """Return the confirmed answer; cost: some hundred trials for a trimmed candidate, some fifty else."""
    tested: Tested | None
    if task.trimmed:
        small = trim(task.candidate, question)
        made, tested, refused = small.candidate, small.tested, small.refused
        binding, limited_by, factor = small.binding, small.limited_by, small.factor
    else:
        made, binding, limited_by, factor = task.candidate, "", "", 0.0
        tested = thorough(built(made, question), question.goal, question.stances)
        refused = tested.failed[0] if tested.failed else ""
    added = added_mass(made, question.parts, question.count)
    if tested is None or refused:
        return Confirmed(made, added, False, refused, binding, limited_by, 0.0, 0.0, "", "", *([0.0] * 6))
    pushed = worst_push(tested.designs, question.goal)
    plant = next(d.plant for d in tested.designs if d.plant.stance.name == pushed.stance)
    ratio = factor / task.closed_factor if task.trimmed and task.closed_factor else 0.0
    return Confirmed(made, added, True, "", binding, limited_by, pushed.impulse, pushed.best_possible, pushed.stance,
                     pushed.toward, tested.power, tested.momentum_used, plant.momentum_capacity, plant.torque_limit,
                     max(t.rms_torque for t in tested.trials), ratio)


def to_plain(found: Confirmed) -> dict[str, object]:
    """Return a dictionary of plain numbers and words."""
    return asdict(found)


def from_plain(plain: dict[str, object]) -> Confirmed:
    """Return what `to_plain` wrote."""
    values = dict(plain)
    candidate = values.pop("candidate")
    assert isinstance(candidate, dict)
    return Confirmed(candidate=Candidate(**candidate), **values)  # type: ignore[arg-type]
