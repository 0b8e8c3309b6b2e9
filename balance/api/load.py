"""Read a design file and the machine it names, and agree on the stances: free of numpy, so a typing error is answered at once."""

from __future__ import annotations

import difflib
import os
from dataclasses import dataclass

from balance.base.errors import InputError, Problem
from balance.goal.goal import Goal
from balance.goal.read import read_goal
from balance.machine.machine import Machine
from balance.machine.read import read_machine

EVERY = "every"
"""The word that stands for all stances of a machine."""


@dataclass(frozen=True)
class Job:
    """A design file with its machine and the stances asked for."""

    machine: Machine
    goal: Goal
    stances: tuple[str, ...]


@dataclass(frozen=True)
class Asked:
    """Where a stance's name was asked for, so that an error can point there."""

    name: str
    where: str
    line: int = 0
    column: int = 0
    key: str = "stance"


def load(path: str, stance: str = "") -> Job:
    """Read the design file at `path` and its machine.

    `stance` (a name, or `every`) goes before the file's own.  Raises InputError for anything wrong in either file, for a
    machine file that is not there and for a stance that the machine does not have.
    """
    goal = read_goal(path)
    machine = read_machine(machine_path(goal))
    line, column = goal.marks.get("stance", (0, 0))
    asked = Asked(goal.stance, goal.source or path, line, column)
    return Job(machine, goal, choose_stances(machine, from_shell(stance) if stance else asked))


def machine_path(goal: Goal) -> str:
    """Return the machine file of `goal`, resolved from the design file's folder; InputError when it is not there."""
    found = os.path.normpath(os.path.join(os.path.dirname(goal.source), goal.machine))
    if os.path.isfile(found):
        return found
    line, column = goal.marks.get("machine", (0, 0))
    folder = os.path.dirname(found) or "."
    files = sorted(os.listdir(folder)) if os.path.isdir(folder) else []
    near = difflib.get_close_matches(os.path.basename(found), files, 1)
    hint = f"did you mean {os.path.join(os.path.dirname(goal.machine), near[0])}?" if near else \
        "the path is taken from the design file's own folder"
    raise InputError([Problem(goal.source, line, column, "machine", goal.machine,
                              "the path of a machine file that exists", hint)])


def from_shell(stance: str) -> Asked:
    """Return a stance asked for on the command line."""
    return Asked(stance, "command line", key="--stance")


def choose_stances(machine: Machine, asked: Asked) -> tuple[str, ...]:
    """Return the stances meant by `asked`: all of them in file order for `every`, else the one; InputError if unknown."""
    names = machine.stance_names()
    if asked.name == EVERY:
        return names
    if asked.name in names:
        return (asked.name,)
    near = difflib.get_close_matches(asked.name, (*names, EVERY), 1)
    hint = f"did you mean {near[0]}?" if near else f"{machine.source} has no stance of that name"
    raise InputError([Problem(asked.where, asked.line, asked.column, asked.key, asked.name,
                              ", ".join((*names, EVERY)), hint)])
