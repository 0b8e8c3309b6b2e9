"""Gusts written in a sheet of columns into the trial that names it."""

from __future__ import annotations

import math
import os
from dataclasses import replace
from itertools import pairwise

from balance.base.errors import InputError, Problem
from balance.files.sheet import Sheet, read_sheet
from balance.goal.goal import Goal
from balance.goal.trials import Gusts

COLUMNS = {"time": "time", "torque": "torque", "force": "force"}


def with_gusts(goal: Goal) -> Goal:
    """Return the goal with the points of every sheet it names; a path counts from the design file's folder.

    Raises
    ------
    InputError
        With all problems of all sheets, each with the sheet's line and column.
    """
    trials, problems = dict(goal.trials), list[Problem]()
    for name, trial in goal.trials.items():
        if trial.gusts is None:
            continue
        try:
            trials[name] = replace(trial, gusts=_filled(goal, f"trials.{name}.gusts", trial.gusts))
        except InputError as error:
            problems += error.problems
    if problems:
        raise InputError(problems)
    return replace(goal, trials=trials)


def _filled(goal: Goal, key: str, gusts: Gusts) -> Gusts:
    path = os.path.normpath(os.path.join(os.path.dirname(goal.source), gusts.file))
    line, column = goal.marks.get(f"{key}.file", (0, 0))
    if not os.path.isfile(path):
        given = f"`{gusts.file}`, where there is no file"
        raise InputError([Problem(goal.source, line, column, f"{key}.file", given,
                                  "the path of a .csv file, from this file's folder")])
    sheet = read_sheet(path, COLUMNS)
    problem = _columns(sheet) or _order(sheet)
    if problem:
        raise InputError([problem])
    lever = math.inf
    if "force" in sheet.columns:
        if gusts.height is None:
            line, column = goal.marks.get(key, (line, column))
            raise InputError([Problem(goal.source, line, column, f"{key}.height", "nothing (the key is missing)",
                                      "the height of the force above the contact line, such as `450 mm`",
                                      f"{gusts.file} states a force")])
        lever = gusts.height
    values = sheet.columns.get("torque") or sheet.columns["force"]
    times = lever if math.isfinite(lever) else 1.0
    points = tuple((t, times * v) for t, v in zip(sheet.columns["time"], values, strict=True))
    return replace(gusts, points=points, lever=lever)


def _columns(sheet: Sheet) -> Problem | None:
    """A time, and one of torque and force."""
    names = tuple(sheet.columns)
    if "time" in names and len(names) == 2:
        return None
    return Problem(sheet.path, 1, 1, "(head)", ", ".join(f"`{name}`" for name in names),
                   "two columns: `time [s]` and one of `torque [N*m]` and `force [N]`")


def _order(sheet: Sheet) -> Problem | None:
    """Time goes forward, from 0 on."""
    times = sheet.columns["time"]
    if len(times) < 2:
        return Problem(sheet.path, 1, 1, "(file)", f"{len(times)} rows", "two rows of numbers or more")
    if times[0] < 0.0:
        return Problem(sheet.path, sheet.lines[0], 1, "time", f"{times[0]:g} s", "at least 0 s")
    for line, (before, time) in zip(sheet.lines[1:], pairwise(times), strict=True):
        if time <= before:
            return Problem(sheet.path, line, 1, "time", f"{time:g} s after {before:g} s", "a later time than the row before")
    return None
