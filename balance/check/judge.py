"""Every requirement of a design file judged on every stance."""

from __future__ import annotations

from collections.abc import Sequence

from balance.check.loop import judge_loop
from balance.check.records import Verdict
from balance.check.recovery import judge_trials
from balance.design.records import Design
from balance.goal.goal import Goal
from balance.simulate.records import TrialResult


def judge(goal: Goal, designs: Sequence[Design], trials: Sequence[TrialResult]) -> tuple[Verdict, ...]:
    """Return the verdicts, stance by stance: the loop, each trial, then the worst case over the trials.

    A stance about whose line nothing can act, or for which no law could be designed, has one verdict that says so.
    """
    verdicts: list[Verdict] = []
    for design in designs:
        stance = design.plant.stance.name
        if not design.plant.acts or design.refused:
            verdicts.append(_refusal(design))
            continue
        verdicts += judge_loop(goal.require, design)
        verdicts += judge_trials(goal, design, [t for t in trials if t.stance == stance])
    return tuple(verdicts)


def _refusal(design: Design) -> Verdict:
    """Return the one verdict of a stance that cannot be balanced."""
    value = design.refused if design.plant.acts else "cannot act about this line"
    reason = design.refused
    if not design.plant.acts:
        names = ", ".join(unit.name for unit in design.plant.units)
        reason = f"every stabiliser ({names}) is square to the contact line: it gives no torque about it"
    return Verdict("can_be_balanced", design.plant.stance.name, value, "", "balanced", "is", False, reason)
