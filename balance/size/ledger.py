"""Where least momentum by simulation and least momentum by the closed forms part: one effect after the other switched on.

Both are factors on the momentum of one finished stabiliser, its safety factor taken off; each line of the ledger is the
factor by which one effect raises either of them, so that the lines multiply to the whole.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import asin, exp, prod, sin

import numpy as np

from balance.check.recovery import caught
from balance.design.records import Design
from balance.goal.goal import Goal, Loop
from balance.kernel import layout as at
from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.plant.units import discounted
from balance.simulate.records import TrialResult
from balance.simulate.run import run_one
from balance.size.candidate import Candidate
from balance.size.demand import Seen, demand
from balance.size.question import Question
from balance.size.trial import Tested, quick, unmeasured
from balance.size.trim import built, with_momentum
from balance.stance.build import build_stance
from balance.study.all_out import AT_ONCE, all_out, without_lag
from balance.study.push import holds, push_of

FINE = 0.006
"""Relative width at which each search ends; a line of the ledger is good to that, either way."""
LOWEST, HIGHEST = 0.02, 8.0
"""Factors between which the least momentum is looked for."""
RIVALS = 2
"""(stance, trial) pairs that stand for all trials."""

LINES = ("all out, at once", "drive's own lag", "sampling, latency and jitter", "this law and its sensors, not all out",
         "the trial itself, not one push as hard", "settling in the time it lasts",
         "all else that is required", "other trials and stances")
"""What is switched on from line to line."""


@dataclass(frozen=True)
class Entry:
    """One effect: the factors by which it raises the least momentum."""

    what: str
    closed: float
    simulated: float

    @property
    def ratio(self) -> float:
        """Return simulated over closed."""
        return self.simulated / self.closed


@dataclass(frozen=True)
class Ledger:
    """The effects for the trial that is hardest on one stabiliser; the first entry is a share of its momentum."""

    stance: str
    trial: str
    toward: str
    entries: tuple[Entry, ...]

    @property
    def closed(self) -> float:
        """Return the least momentum by the closed forms, as a share of what the stabiliser has."""
        return prod(e.closed for e in self.entries)

    @property
    def simulated(self) -> float:
        """Return the least momentum by simulation, as a share of what the stabiliser has."""
        return prod(e.simulated for e in self.entries)

    @property
    def ratio(self) -> float:
        """Return least momentum by simulation over least momentum by the closed forms."""
        return self.simulated / self.closed

    @property
    def possible(self) -> float:
        """Return the same ratio for the best that any law of this rate and latency can do: the first three entries."""
        return prod(e.ratio for e in self.entries[:3])


def ledger(made: Candidate, question: Question, tested: Tested) -> Ledger | None:
    """Return the ledger of a candidate that passes; None where it has no trials or a step has no least momentum.

    Cost: some eighty trials.
    """
    if not tested.trials:
        return None
    hardest = max(tested.trials, key=lambda t: t.momentum_used)
    rivals = tuple(dict.fromkeys((t.stance, t.name) for t in sorted(tested.trials, key=lambda t: -t.momentum_used)))
    closed = _closed(made, question, hardest)
    simulated = _simulated(made, question, hardest, rivals[:RIVALS], closed[2])
    if simulated is None:
        return None
    words, used = list(LINES), question.goal.require.momentum_used
    if used is not None:
        words[-2] = f"no more than {100.0 * used:.0f} % of the momentum used"
    entries = [Entry(what, c / c0, s / s0) for what, c, c0, s, s0 in
               zip(words, closed, (1.0, *closed), simulated, (1.0, *simulated), strict=False)]
    return Ledger(hardest.stance, hardest.name, hardest.toward, tuple(entries))


def _closed(made: Candidate, question: Question, hardest: TrialResult) -> tuple[float, ...]:
    """Return the least factor by the closed forms at each line."""
    goal, own = question.goal, _plant(made, question, hardest.stance).for_law      # the closed forms know stiff legs only
    must = _asked(goal, hardest.name, own)
    lag, late, used = _lag(own), _late(goal.loop), goal.require.momentum_used or 1.0

    def factor(plant: Plant, must: float, late: float, used: float) -> float:
        return _least(lambda f: _can(plant, f / question.sizing.safety, used) >= must * exp(plant.pole * late), FINE / 8.0)

    alone = [factor(own, must, late_by, 1.0) for late_by in (0.0, lag, lag + late)]
    asked = factor(own, must, lag + late, used)
    plants = [_plant(made, question, s).for_law for s in question.stances]
    others = max(factor(p, _asked(goal, name, p), _lag(p) + late, used) for p in plants for name in goal.trials)
    return (*alone, alone[-1], alone[-1], alone[-1], asked, others)


def _simulated(made: Candidate, question: Question, hardest: TrialResult, rivals: tuple[tuple[str, str], ...],
               guess: float) -> tuple[float, ...] | None:
    """Return the least factor by simulation at each line; None where one has none."""
    goal, loop, toward = question.goal, question.goal.loop, hardest.toward
    trial = goal.trials[hardest.name]

    def weak(f: float) -> Design:
        return unmeasured(_plant(with_momentum(made, f / question.sizing.safety), question, hardest.stance), goal)

    impulse = _asked(goal, hardest.name, weak(1.0).plant) / weak(1.0).plant.stance.height
    push = push_of(weak(1.0).plant, impulse, toward)

    def at_once(f: float) -> bool:
        design = weak(f)
        fast = all_out(replace(design, plant=without_lag(design.plant)), AT_ONCE)
        return holds(fast, replace(goal, loop=AT_ONCE), push, toward)

    steps: tuple[Callable[[float], bool], ...] = (
        at_once,
        lambda f: holds(all_out(weak(f), AT_ONCE), replace(goal, loop=AT_ONCE), push, toward),
        lambda f: holds(all_out(weak(f), loop), goal, push, toward),
        lambda f: holds(weak(f), goal, push, toward),
        lambda f: holds(weak(f), goal, trial, toward),
        lambda f: caught(goal, run_one(weak(f), goal, hardest.name, trial, toward, False)),
        lambda f: _passes(made, f, question, ((hardest.stance, hardest.name),)),
        lambda f: _passes(made, f, question, rivals))
    found: list[float] = []
    for step in steps:
        found.append(_least(step, FINE, found[-1] if found else guess))
        if not np.isfinite(found[-1]):
            return None
    return tuple(found)


def _passes(made: Candidate, factor: float, question: Question, pairs: tuple[tuple[str, str], ...]) -> bool:
    weak = built(with_momentum(made, factor / question.sizing.safety), question)
    return quick(weak, question.goal, pairs).passed


def _plant(made: Candidate, question: Question, stance: str) -> Plant:
    machine = built(made, question)
    return build_plant(machine, build_stance(machine, stance), question.goal.fell)


def _asked(goal: Goal, name: str, plant: Plant) -> float:
    """Return the discounted momentum in N·m·s one trial asks for, latency not counted."""
    height = float(np.hypot(plant.stance.height, plant.stance.offset))
    return float(demand(goal.trials[name], Seen(*(np.array([v]) for v in (plant.stance.mass, height, plant.inertia_free,
                                                                          plant.stiffness))))[0])


def _lag(plant: Plant) -> float:
    """Return the slowest drive's lag in s."""
    return max(1.0 / unit.lag for unit in plant.units)


def _late(loop: Loop) -> float:
    """Return what the loop itself is late by in s: latency, half a sample of hold, jitter."""
    return loop.latency + 0.5 / loop.rate + loop.jitter


def _can(plant: Plant, factor: float, used: float) -> float:
    """Return ∫ e^{−ps} T ds in N·m·s with `factor` times the momentum, of which the share `used` may be stored."""
    rows = plant.unit_parameters.copy()
    for row in rows:
        if row[at.KIND] == at.WHEEL:
            row[at.SPEED_LIMIT] *= factor * used
        else:
            row[at.MOMENTUM] *= factor
            row[at.ANGLE_STOP] = asin(used * sin(row[at.ANGLE_STOP]))
    return sum(discounted(row, plant.pole) for row in rows)


def _least(passes: Callable[[float], bool], fine: float, guess: float = 1.0) -> float:
    """Return the smallest factor that passes, to `fine`; inf where none up to the highest does.

    What passes is taken for a half-line above the guess's own bracket.
    """
    low = high = min(max(guess, LOWEST), HIGHEST)
    step = 1.06
    if passes(high):
        while low > LOWEST and passes(low / step):
            high = low = low / step
            step *= step
        low = low / step
    else:
        while not passes(high := high * step):
            low, step = high, step * step
            if high > HIGHEST:
                return float("inf")
    while high / low > 1.0 + fine:
        middle = (low * high) ** 0.5
        low, high = (low, middle) if passes(middle) else (middle, high)
    return high
