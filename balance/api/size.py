"""From a job to the smallest stabilisers that do it."""

from __future__ import annotations

import os
from dataclasses import replace

from balance.api.check import check
from balance.api.load import Job
from balance.api.tell import Tell, quiet
from balance.base.errors import InputError, Problem
from balance.check.records import CheckResult
from balance.files.writer import written
from balance.machine.machine import Machine
from balance.report.figures.sizing import write_sizing_figure
from balance.report.size_page import write_size_page
from balance.size.answer import SizeAnswer, answer
from balance.size.confirm import Confirmed
from balance.size.parts import read_parts
from balance.size.question import question
from balance.size.trim import built


def size(job: Job, workers: int = 1, state: str = "", tell: Tell = quiet) -> SizeAnswer:
    """Search the smallest stabilisers; `state`: a file that lets a search that was stopped go on.

    Raises InputError where the design file has no `size:` or no trial, names parts that are not there, or asks for what
    the present machine does not have.
    """
    goal = job.goal
    if goal.size is None:
        raise InputError([Problem(goal.source, 1, 1, "size", "nothing (the key is missing)",
                                  "a section that says what may be chosen",
                                  "add `size:` with `space: {diameter: 180 mm, length: 50 mm}` and "
                                  "`parts: [../plants/parts/starter.yaml]`")])
    if not goal.trials:
        line, column = goal.marks.get("trials", (1, 1))
        raise InputError([Problem(goal.source, line, column, "trials", "none", "at least one trial",
                                  "a stabiliser is sized by what must be survived")])
    unknown = [n for n in goal.size.replaces if n not in (job.machine.body or {})]
    if unknown:
        line, column = goal.marks.get("size.replaces", (0, 0))
        raise InputError([Problem(goal.source, line, column, "size.replaces", f"`{unknown[0]}`",
                                  "names under `body` of the machine file",
                                  "a lumped machine says `replaced_mass`" if job.machine.lumped else "")])
    return answer(question(job.machine, goal, job.stances, read_parts(goal)), workers, state, tell)


def sized_machine(found: SizeAnswer, chosen: Confirmed) -> Machine:
    """Return the machine with the chosen stabiliser, named after both."""
    machine = built(chosen.candidate, found.question)
    return replace(machine, machine=f"{machine.machine}-{chosen.candidate.family.replace(' ', '-')}")


def proved(job: Job, machine: Machine, tell: Tell = quiet) -> CheckResult:
    """Return the full check of the design on a sized machine, the worst case within tolerances included."""
    tell("the whole check of the chosen one")
    return check(Job(machine, job.goal, job.stances), tell)


def apply(found: SizeAnswer, chosen: Confirmed, path: str) -> str:
    """Write the chosen one as a machine file; return the path.  Raises InputError where there is a file already."""
    if os.path.lexists(path):
        raise InputError([Problem("command line", 0, 0, "--apply", f"`{path}`, where there is a file already",
                                  "a path where there is none", "files are never overwritten")])
    head = (f"{found.question.machine.machine} with a {chosen.candidate.family} as sized for "
            f"{found.question.goal.design}: {chosen.candidate.words()}.\nAdds {1e3 * chosen.added:.0f} g; "
            f"{chosen.binding} binds, with a safety factor of {found.question.sizing.safety:g}.")
    text = written(sized_machine(found, chosen), head)
    os.makedirs(os.path.dirname(path) or ".", exist_ok=True)
    with open(path, "x", encoding="utf-8") as file:
        file.write(text)
    return path


def size_figure(found: SizeAnswer, path: str) -> str:
    """Draw the fronts, families side by side; PNG where `path` ends so, else SVG."""
    return write_sizing_figure(found, path)


def size_page(found: SizeAnswer, folder: str) -> str:
    """Write the page of the answer into `folder`, made if it is not there; return its path."""
    return write_size_page(found, folder)
