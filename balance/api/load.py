"""Read a design file and the machine it names, and agree on the stances.

Free of numpy, so that a mistake in a file is answered at once.
"""

from __future__ import annotations

import math
import os
from dataclasses import dataclass, fields

from balance.base.errors import InputError, Problem
from balance.base.words import listed, nearest
from balance.files import document
from balance.goal.goal import Goal
from balance.goal.read import EVERY, read_goal, stance_problem
from balance.machine.machine import Machine
from balance.machine.read import read_machine

FELL = math.pi / 6
"""rad: lean beyond which a machine counts as fallen where no design file says otherwise."""


@dataclass(frozen=True)
class Job:
    """A design file with its machine and the stances asked for."""

    machine: Machine
    goal: Goal
    stances: tuple[str, ...]


@dataclass(frozen=True)
class Body:
    """A machine and the stances asked for, without a design; `fell` in rad."""

    machine: Machine
    stances: tuple[str, ...]
    fell: float


def load(path: str, stance: str = "") -> Job:
    """Read the design file at `path` and its machine.

    `stance` (a name, or `every`) goes before the file's own.  Raises InputError for anything wrong in either
    file, for a
    machine file given in place of a design file and for a stance that the machine does not have.
    """
    if _is(path, "machine"):
        raise InputError(
            [
                Problem(
                    path,
                    1,
                    1,
                    "(file)",
                    "a machine file",
                    "a design file",
                    "a design file names its machine under `machine:`; `balance new` writes a pair",
                )
            ]
        )
    goal = read_goal(path)
    machine = read_machine(machine_path(goal))
    problem = stance_problem(goal, machine.stance_names())
    if problem and not stance:
        raise InputError([problem])
    missing = tolerance_problem(goal, machine)
    if missing:
        raise InputError([missing])
    return Job(machine, goal, choose_stances(machine, stance or goal.stance))


def load_body(path: str, stance: str = "") -> Body:
    """Read the machine file at `path`, or the machine that the design file at `path` names.

    Without `stance`, a machine file means every stance and a design file those it asks for.  Raises
    InputError as `load`.
    """
    if _is(path, "design"):
        job = load(path, stance)
        return Body(job.machine, job.stances, job.goal.fell)
    machine = read_machine(path)
    return Body(machine, choose_stances(machine, stance or EVERY), FELL)


def tolerance_problem(goal: Goal, machine: Machine) -> Problem | None:
    """Return what is wrong where a worst case is asked for and nothing may be other than stated, or None."""
    asked = [f.name for f in fields(goal.require) if f.name.startswith("worst_") and getattr(goal.require, f.name)]
    if not asked or machine.tolerances or goal.loop.latency_tolerance or goal.loop.jitter:
        return None
    key = f"require.{asked[0]}"
    line, column = goal.marks.get(key, (0, 0))
    return Problem(goal.source, line, column, key, "a worst case without tolerances",
                   f"`tolerances` in {goal.machine}, or `latency_tolerance` or `jitter` under `loop`",
                   "as `tolerances: {mass: 0.03, height: 5 mm}`")


def machine_path(goal: Goal) -> str:
    """Return the machine file of `goal`, InputError when it is not there."""
    found = os.path.normpath(os.path.join(os.path.dirname(goal.source), goal.machine))
    if os.path.isfile(found):
        return found
    line, column = goal.marks.get("machine", (0, 0))
    folder = os.path.dirname(found) or "."
    near = nearest(os.path.basename(found), sorted(os.listdir(folder)) if os.path.isdir(folder) else [])
    hint = f"did you mean `{os.path.join(os.path.dirname(goal.machine), near)}`?" if near else ""
    raise InputError(
        [
            Problem(
                goal.source,
                line,
                column,
                "machine",
                f"`{goal.machine}`, where there is no file",
                "the path of a machine file, from this file's folder",
                hint,
            )
        ]
    )


def choose_stances(machine: Machine, asked: str) -> tuple[str, ...]:
    """Return the stances meant by `asked`: all in file order for `every`; InputError for an unknown name."""
    names = machine.stance_names()
    if asked == EVERY:
        return names
    if asked in names:
        return (asked,)
    near = nearest(asked, (*names, EVERY))
    raise InputError(
        [
            Problem(
                "command line",
                0,
                0,
                "--stance",
                f"the stance `{asked}`",
                f"{listed(names)} or `{EVERY}`",
                f"did you mean `{near}`?" if near else "",
            )
        ]
    )


def _is(path: str, kind: str) -> bool:
    """Tell a "machine" file or a "design" file by its top keys; a broken file is neither."""
    try:
        names = document.load(path).root.names()
    except InputError:
        return False
    own, other = ("design", "stabilisers") if kind == "design" else ("stabilisers", "design")
    return own in names and other not in names
