"""The largest push a design recovers from, found by running it: a bisection along the push, not along a grid.

What is recovered is not strictly a half-line (a law that saturates may miss a middle push); the bisection finds one
boundary above `surely`, and says so where even the smallest push is lost.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from balance.design.records import Design
from balance.goal.goal import Goal
from balance.goal.trials import Push, Trial
from balance.plant.record import Plant
from balance.simulate.run import run_one

FINE = 0.01
"""Relative width at which a bisection ends: no bench measures a push better."""
LASTS = 3.0
"""s of each trial: a push that is lost is lost within a few times 1/p; one that is held has turned back by then."""


@dataclass(frozen=True)
class Boundary:
    """The largest push in one direction that is recovered, at the height of the centre of mass."""

    stance: str
    toward: str            # "outward" | "inward"
    impulse: float         # N·s
    best_possible: float   # N·s by the closed forms
    trials: int            # how many were run


def boundary(recovers: Callable[[float], bool], guess: float, fine: float = FINE) -> tuple[float, int]:
    """Return (largest value that recovers, trials run): bracket from `guess` by factors of 1.5, then halve the logarithm.

    0 where nothing above a hundredth of the guess recovers; the bracket's top where fifty times the guess still does.
    """
    runs, low, high = 1, guess, guess
    if recovers(guess):
        while high < 50.0 * guess:
            low, high, runs = high, 1.5 * high, runs + 1
            if not recovers(high):
                break
        else:
            return high, runs
    else:
        while low > 0.01 * guess:
            high, low, runs = low, low / 1.5, runs + 1
            if recovers(low):
                break
        else:
            return 0.0, runs
    while high / low > 1.0 + fine:
        middle, runs = (low * high) ** 0.5, runs + 1
        low, high = (middle, high) if recovers(middle) else (low, middle)
    return low, runs


def push_of(plant: Plant, impulse: float, toward: str) -> Trial:
    """Return the trial of one push in N·s at the height of the centre of mass."""
    return Trial(push=Push(impulse, plant.stance.height, toward), lasts=LASTS)


def holds(design: Design, goal: Goal, trial: Trial, toward: str) -> bool:
    """Tell whether the machine is turned back in a trial; whether it settles in time, and with what left, is not asked."""
    asked = replace(goal, trials={"held": trial})
    result = run_one(design, asked, "held", trial, toward, False)
    return result.verdict in ("recovered", "did not settle") and abs(result.end_lean) < 0.5 * goal.fell


def largest_push(design: Design, goal: Goal, toward: str, fine: float = FINE) -> Boundary:
    """Return the largest push toward one side that the design recovers from; merely not to have fallen is not enough."""
    plant = design.plant
    best = plant.bounds.impulse

    def recovers(impulse: float) -> bool:
        return holds(design, goal, push_of(plant, impulse, toward), toward)

    found, runs = boundary(recovers, 0.6 * best, fine)
    return Boundary(plant.stance.name, toward, found, best, runs)


def worst_push(designs: tuple[Design, ...], goal: Goal, fine: float = FINE) -> Boundary:
    """Return the smallest of the largest pushes: both sides of the stance with the smallest best possible push."""
    hardest = min(designs, key=lambda d: d.plant.bounds.impulse)
    return min((largest_push(hardest, goal, side, fine) for side in ("outward", "inward")), key=lambda b: b.impulse)
