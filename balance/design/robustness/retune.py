"""LQR weights chosen for the worst case: the proportions of what is accepted that keep the largest disk margin.

Free are three factors, on the accepted lean, lean rate and stored momentum; the accepted effort stays, for only proportions
matter.  Each candidate is judged on the deviations found worst so far; the winner's own worst case is then searched and
joins them, until it holds (a worst-case design by scenarios that are added as they bite; common practice).
Kept meanwhile: the margins under `require`, modes quick enough for `settling_time`, and a command that a small gyroscope's
noise does not shake by more than a twentieth of its limit (gain costs nothing in the linear model but that).  Weights that
keep margins can ask for more torque or momentum in the trials: whoever can run them says by `accept` what is too much.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.design.build import law_for
from balance.design.law import Law
from balance.design.pid import NOISE_SHARE
from balance.design.records import Range, Retuning
from balance.design.robustness.screen import JUDGED, Screen, screen_of
from balance.design.robustness.search import search
from balance.design.robustness.worst import deviation
from balance.goal.goal import Goal, LqrControl, Requirements
from balance.plant.record import Plant

Array = NDArray[np.float64]

FREE = ("lean", "lean_rate", "momentum")
OCTAVES = 3.0
"""Each factor lies between 1/8 and 8: beyond that another state rules the design anyway."""
TURNS = 4
"""Times the worst case is searched anew."""
ENOUGH = 0.01
"""Share by which the worst case may be worse than on the deviations known before."""
SETTLED = 4.0
"""Time constants of the slowest mode until 2 % of it is left (e⁻⁴)."""
SLOWER = 1.5
"""How much slower than as given the slowest mode may become where no settling time is asked for."""
PARTS = (1.0, 0.75, 0.5, 0.25)
"""Of the way (in octaves) that are offered to `accept`, one after the other."""
PENALTY = 10.0
"""Disk margin that a requirement missed by its whole amount costs: more than there is, so no margin buys a miss."""
DISK = JUDGED.index("disk")


@dataclass(frozen=True)
class _Task:
    """What does not change while weights are tried: `known` deviations (the first none) and what a law may at most be.

    `slowest`: time constant in s; `shaken`: RMS of the command under the gyroscope's noise, as a share of its limit.
    """

    plant: Plant
    goal: Goal
    known: tuple[Mapping[str, float], ...]
    slowest: float
    shaken: float


def anything(_: Goal) -> bool:
    """Accept whatever weights."""
    return True


def retune(plant: Plant, goal: Goal, ranges: tuple[Range, ...],
           accept: Callable[[Goal], bool] = anything) -> tuple[Goal, Retuning | None]:
    """Return the goal with its weights rescaled, and what that changed; unchanged and None where no law can be made.

    `accept` has the last word on what this room cannot know (the trials); what it refuses is taken back by quarters toward
    the weights as given.  Raises InputError as `design_stance` does for weights that do not fit the states.
    """
    given = _law(plant, goal)
    if given is None:
        return goal, None
    screen = screen_of(plant, given)
    before, found = _worst(screen, ranges)
    asked = goal.require.settling_time
    limit = SLOWER * screen.slowest() if asked is None else asked / SETTLED
    task = _Task(plant, goal, ({}, *found), limit, max(NOISE_SHARE, screen.shaken()))
    best, after, tried = np.zeros(len(FREE)), before, 0
    for _ in range(TURNS):
        best, expected, count = _best(task)
        after, found = _worst(screen_of(plant, _made(plant, scaled(goal, best))), ranges)
        tried += count
        if after >= expected * (1.0 - ENOUGH):
            break
        task = replace(task, known=(*task.known, *found))
    for part in (PARTS if after > before else ()):
        found_goal = scaled(goal, part * best)
        if not accept(found_goal):
            continue
        if part < 1.0:
            after, _ = _worst(screen_of(plant, _made(plant, found_goal)), ranges)
        scales = {name: float(2.0 ** (part * x)) for name, x in zip(FREE, best, strict=True)}
        return found_goal, Retuning(scales, _told(before), _told(after), tried, part)
    return goal, Retuning(dict.fromkeys(FREE, 1.0), _told(before), _told(before), tried, 0.0)


def scaled(goal: Goal, octaves: Array) -> Goal:
    """Return the goal with the accepted lean, lean rate and momentum times 2^octaves (3,); weights with their squares."""
    control = goal.control
    assert isinstance(control, LqrControl)
    lean, rate, momentum = (float(2.0**x) for x in octaves)
    if control.allow is not None:
        allow = replace(control.allow, lean=control.allow.lean * lean, lean_rate=control.allow.lean_rate * rate,
                        momentum=control.allow.momentum * momentum)
        return replace(goal, control=replace(control, allow=allow))
    assert control.weights is not None
    states = control.weights.states
    by = (lean, rate, *[momentum] * (len(states) - 2))
    weights = replace(control.weights, states=tuple(w / f**2 for w, f in zip(states, by, strict=True)))
    return replace(goal, control=replace(control, weights=weights))


def _best(task: _Task) -> tuple[Array, float, int]:
    """Return the octaves (3,) of most merit on the known deviations, the disk margin there, how many were tried."""
    pool = search(lambda points: np.array([[-_merit(task, OCTAVES * x)] for x in points]), len(FREE))
    return OCTAVES * pool.lowest(0), -float(pool.values.min()), len(pool.points)


def _merit(task: _Task, octaves: Array) -> float:
    """Return the smallest disk margin over the known deviations, less what misses a requirement (as a share of it)."""
    law = _law(task.plant, scaled(task.goal, octaves))
    if law is None:
        return -1e3
    screen = screen_of(task.plant, law)
    scores = screen.scores(task.known)                                   # (known, 6)
    over = max(screen.slowest() / task.slowest, screen.shaken() / task.shaken) - 1.0
    return float(scores[:, DISK].min()) - PENALTY * min(max(_missed(task.goal.require, scores), over, 0.0), 1e3)


def _missed(require: Requirements, scores: Array) -> float:
    """Return the largest share by which a margin asked for is missed: at the nominal machine (first row) and anywhere."""
    asked = [(require.phase_margin, "phase", 0), (require.delay_margin, "delay", 0), (require.disk_margin, "disk", 0),
             (require.modulus_margin, "modulus", 0), (require.worst_phase_margin, "phase", -1),
             (require.worst_delay_margin, "delay", -1), (require.worst_modulus_margin, "modulus", -1)]
    found = {0: scores[0], -1: scores.min(axis=0)}
    over = [1.0 - found[row][JUDGED.index(name)] / limit for limit, name, row in asked if limit is not None]
    if require.peak_sensitivity is not None:
        over.append(1.0 - found[0][JUDGED.index("modulus")] * require.peak_sensitivity)
    factors = [(require.gain_margin_lower, 0), (require.worst_gain_margin_lower, -1)]
    over += [1.0 - found[row][JUDGED.index("gain_lower")] / (1.0 - limit) for limit, row in factors if limit is not None]
    factors = [(require.gain_margin_upper, 0), (require.worst_gain_margin_upper, -1)]
    over += [1.0 - found[row][JUDGED.index("gain_upper")] / (limit - 1.0) for limit, row in factors if limit is not None]
    return float(max(over, default=0.0))


def _worst(screen: Screen, ranges: tuple[Range, ...]) -> tuple[float, list[Mapping[str, float]]]:
    """Return the smallest disk margin within the tolerances (below 0: unstable) and where the lowest few margins lie."""
    if not ranges:
        return float(screen.scores([{}])[0, DISK]), []
    pool = search(lambda points: screen.scores([deviation(ranges, x) for x in points]), len(ranges))
    places = {tuple(pool.lowest(column)): None for column in range(len(JUDGED))}
    return float(pool.values[:, DISK].min()), [deviation(ranges, np.array(x)) for x in places]


def _law(plant: Plant, goal: Goal) -> Law | None:
    """Return the law these weights give on the plant as stated, or None."""
    found = law_for(plant, goal)
    return found if isinstance(found, Law) else None


def _made(plant: Plant, goal: Goal) -> Law:
    law = _law(plant, goal)
    assert law is not None                                               # the search never prefers weights without a law
    return law


def _told(disk: float) -> float:
    """Return a disk margin for people: NaN where the loop is unstable somewhere."""
    return disk if disk > 0.0 else math.nan
