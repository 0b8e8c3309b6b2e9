"""A design file into a `Goal`."""

from __future__ import annotations

from collections.abc import Sequence

from balance.base.errors import Problem
from balance.base.words import did_you_mean, listed
from balance.files.document import load
from balance.files.reader import read
from balance.goal.goal import Goal
from balance.goal.gusts import with_gusts
from balance.goal.rules import RULES

EVERY = "every"
"""The word that stands for all stances of the machine."""


def read_goal(path: str) -> Goal:
    """Return the goal a design file describes, SI throughout.

    `Goal.machine` stays the path as written; it counts from the folder of `Goal.source`.

    Raises
    ------
    InputError
        With all problems of the file, or of the sheets of gusts it names.
    """
    return with_gusts(read(load(path), Goal, RULES))


def stance_problem(goal: Goal, stances: Sequence[str]) -> Problem | None:
    """Return what is wrong with the goal's stance on a machine with these `stances`, or None."""
    if goal.stance == EVERY or goal.stance in stances:
        return None
    line, column = goal.marks.get("stance", (0, 0))
    return Problem(goal.source, line, column, "stance", f"the stance `{goal.stance}`",
                   f"{listed(stances)} or `{EVERY}`", did_you_mean(goal.stance, (*stances, EVERY)))
