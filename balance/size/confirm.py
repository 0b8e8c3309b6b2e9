"""One candidate of the shortlist to a confirmed answer: trimmed or as it is, tested, and pushed until it falls."""

from __future__ import annotations

from dataclasses import asdict, dataclass, replace
from math import inf

from balance.plant.gyros import holds_lean_rate
from balance.plant.record import Plant
from balance.size.candidate import Candidate, added_mass
from balance.size.ledger import Entry, Ledger, ledger
from balance.size.question import Question
from balance.size.trial import Tested, thorough
from balance.size.trim import built, trim
from balance.study.push import worst_push


@dataclass(frozen=True)
class Task:
    """A candidate, and whether to make it as small as it can be."""

    candidate: Candidate
    trimmed: bool


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
    push_back: float        # at that push, what presses a gimbal back ÷ what its drive has; 0 for wheels
    mode: float             # rad/s, slowest swing of legs that give on any stance; inf: they are stiff
    ledger: Ledger | None   # least momentum by simulation against the closed forms; None where not trimmed

    @property
    def given_way(self) -> bool:
        """True where that push overpowers a gimbal drive: it is turned faster than it turns itself, and that helps."""
        return self.push_back > 1.0


def confirm(question: Question, task: Task) -> Confirmed:
    """Return the confirmed answer; cost: some hundred trials for a trimmed candidate, some fifty else."""
    tested: Tested | None
    if task.trimmed:
        small = trim(task.candidate, question)
        made, tested, refused = small.candidate, small.tested, small.refused
        binding, limited_by = small.binding, small.limited_by
    else:
        made, binding, limited_by = task.candidate, "", ""
        tested = thorough(built(made, question), question.goal, question.stances)
        refused = tested.failed[0] if tested.failed else ""
    added = added_mass(made, question.parts, question.count)
    if tested is None or refused:
        return Confirmed(made, added, False, refused, binding, limited_by, 0.0, 0.0, "", "", 0.0, 0.0, 0.0, 0.0, 0.0, 0.0,
                         inf, None)
    pushed = worst_push(tested.designs, question.goal)
    plant = next(d.plant for d in tested.designs if d.plant.stance.name == pushed.stance)
    return Confirmed(made, added, True, "", binding, limited_by, pushed.impulse, pushed.best_possible, pushed.stance,
                     pushed.toward, tested.power, tested.momentum_used, plant.momentum_capacity, plant.torque_limit,
                     max((t.rms_torque for t in tested.trials), default=0.0), _push_back(plant, pushed.impulse),
                     min((d.plant.legs.mode for d in tested.designs if d.plant.legs is not None), default=inf),
                     ledger(made, question, tested) if binding else None)


def _push_back(plant: Plant, impulse: float) -> float:
    """Return H σ' θ̇ just after a push at the height of the centre of mass, as a share of the gimbal drive's torque."""
    held = min((holds_lean_rate(row) for row in plant.unit_parameters), default=inf)
    return impulse * plant.stance.height / plant.inertia_free / held


def to_plain(found: Confirmed) -> dict[str, object]:
    """Return a dictionary of plain numbers and words."""
    return asdict(found)


def from_plain(plain: dict[str, object]) -> Confirmed:
    """Return what `to_plain` wrote."""
    values = dict(plain)
    candidate, told = values.pop("candidate"), values.pop("ledger")
    assert isinstance(candidate, dict)
    kept = None
    if isinstance(told, dict):
        kept = replace(Ledger(**told), entries=tuple(Entry(**e) for e in told["entries"]))
    return Confirmed(candidate=Candidate(**candidate), ledger=kept, **values)  # type: ignore[arg-type]
