"""The answer: fronts of mass against push and against power, the best few with what limits them, or what to relax."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from balance.goal.sizing import Sizing
from balance.machine.machine import Machine
from balance.size.confirm import Confirmed
from balance.size.grid import THINNEST
from balance.size.need import Need, needs
from balance.size.question import Question, question
from balance.size.rotor import RotorCheck, rotor_check
from balance.size.search import Survey, search, survey

Tell = Callable[[str], None]

STEP = 1.1
"""Sensitivities are for a tenth more."""
FARTHEST = 8.0
"""Relaxing a limit by more than this factor is no advice."""


@dataclass(frozen=True)
class Sensitivity:
    """What the lightest stabiliser of a family weighs when one thing changes, by the closed forms."""

    family: str
    what: str        # "10 % more supply voltage"
    before: float    # kg
    after: float     # kg; inf: none is left

    def words(self) -> str:
        """Return one sentence."""
        less = 1e3 * (self.before - self.after)
        if self.after == float("inf"):
            return f"{self.what}: no {self.family} is left."
        if abs(less) < 0.5:
            return f"{self.what} changes nothing for a {self.family}."
        return f"{self.what} {'saves' if less > 0.0 else 'costs'} {abs(less):.0f} g ({self.family})."


@dataclass(frozen=True)
class Relaxed:
    """A requirement that could be relaxed so that something fits: by which factor."""

    what: str
    factor: float

    def words(self) -> str:
        """Return one sentence."""
        way = "more" if self.factor > 1.0 else "less"
        return f"{abs(self.factor - 1.0):.0%} {way} {self.what}"


@dataclass(frozen=True)
class SizeAnswer:
    """Everything `balance size` says."""

    question: Question
    needs: tuple[Need, ...]
    surveys: tuple[Survey, ...]
    confirmed: tuple[Confirmed, ...]
    by_push: tuple[Confirmed, ...]       # front: less mass, more push
    by_power: tuple[Confirmed, ...]      # front: less mass, less power
    best: tuple[Confirmed, ...]          # lightest of each family with its binding quantity, lightest first
    rotors: tuple[RotorCheck, ...]       # beside `best`
    sensitivities: tuple[Sensitivity, ...]
    relax: tuple[Relaxed, ...]           # where nothing passes

    @property
    def passed(self) -> bool:
        """True when something fits."""
        return bool(self.best)


def answer(asked: Question, workers: int, state: str, tell: Tell) -> SizeAnswer:
    """Return the whole answer. Cost: a second for the closed forms, then what `search` simulates."""
    surveys, confirmed = search(asked, workers, state, tell)
    good = [c for c in confirmed if c.passed]
    best = best_few(good)
    wanted = needs(asked, surveys)
    rotors = tuple(rotor_check(asked, c.candidate, c.rms_torque, asked.goal.fell * wanted[0].pole) for c in best)
    tell("what a little more or less of everything would change")
    return SizeAnswer(asked, wanted, surveys, confirmed, front(good, lambda c: -c.push), front(good, lambda c: c.power),
                      best, rotors, sensitivities(asked, surveys) if best else (),
                      () if best else relaxed(asked, surveys))


def best_few(good: Sequence[Confirmed]) -> tuple[Confirmed, ...]:
    """Return the lightest of each family whose binding quantity is known, lightest first."""
    lightest: dict[str, Confirmed] = {}
    for c in good:
        now = lightest.get(c.candidate.family)
        if c.binding and (now is None or c.added < now.added):
            lightest[c.candidate.family] = c
    return tuple(sorted(lightest.values(), key=lambda c: c.added))


def front(good: Sequence[Confirmed], cost: Callable[[Confirmed], float]) -> tuple[Confirmed, ...]:
    """Return those that nothing else beats in added mass and `cost` at once, lightest first (Pareto)."""
    kept: list[Confirmed] = []
    for c in sorted(good, key=lambda c: (c.added, cost(c))):
        if not kept or cost(c) < cost(kept[-1]):
            kept.append(c)
    return tuple(kept)


def lightest(one: Survey) -> float:
    """Return the least added mass of a family by the closed forms in kg; inf: none can do it.

    Momentum grows with a rotor's length, so what a candidate has too much of is taken off its rotors first.
    """
    able, columns = one.enough, one.grid
    if not len(able):
        return float("inf")
    left = np.maximum(1.0 / one.margin[able], np.minimum(THINNEST / columns.length[able], 1.0))
    rotors = columns.rotors * columns.rotor_mass[able]
    return float((columns.added[able] - (1.0 - left) * rotors).min())


def sensitivities(asked: Question, surveys: Sequence[Survey]) -> tuple[Sensitivity, ...]:
    """Return what a tenth more of each thing changes, family by family, where anything of the family can do it."""
    changes = (("10 % more supply voltage", more_voltage), ("10 % more rotor diameter", more_diameter),
               ("10 % more top speed", more_speed), ("10 % less safety factor", less_safety))
    found = []
    for words, change in changes:
        other = change(asked, STEP)
        if other is not None:
            found += [Sensitivity(s.grid.family, words, lightest(s), lightest(survey(other, s.grid.family)))
                      for s in surveys if len(s.enough)]
    return tuple(found)


def relaxed(asked: Question, surveys: Sequence[Survey]) -> tuple[Relaxed, ...]:
    """Return which limits could be relaxed so that something fits by the closed forms, the nearest first."""
    changes = (("supply voltage", more_voltage), ("rotor diameter", more_diameter), ("rotor length", more_length),
               ("top speed", more_speed), ("added mass", more_mass))
    found = []
    for words, change in changes:
        factor = _least_factor(lambda f, c=change: _any(c(asked, f), asked))  # type: ignore[misc]
        if factor is not None:
            found.append(Relaxed(words, factor))
    most = max((float(s.margin.max()) for s in surveys if len(s.grid)), default=0.0)
    if 0.0 < most < 1.0:
        found.append(Relaxed("of every trial", most))
    return tuple(sorted(found, key=lambda r: abs(r.factor - 1.0)))


def _any(changed: Question | None, asked: Question) -> bool:
    """Tell whether any family can do it."""
    return changed is not None and any(len(survey(changed, f).enough) for f in asked.sizing.families)


def _least_factor(fits: Callable[[float], bool]) -> float | None:
    """Return the least factor above 1 that fits, to 2 %; None where none up to the farthest does or it fits already."""
    if not fits(FARTHEST) or fits(1.0):
        return None
    low, high = 1.0, FARTHEST
    while high / low > 1.02:
        middle = (low * high) ** 0.5
        low, high = (low, middle) if fits(middle) else (middle, high)
    return high


def _resized(asked: Question, sizing: Sizing) -> Question:
    goal = replace(asked.goal, size=sizing)
    return question(asked.machine, goal, asked.stances, asked.parts)


def more_voltage(asked: Question, factor: float) -> Question | None:
    """Return the question with more supply voltage; None without a supply."""
    machine: Machine = asked.machine
    if machine.supply is None:
        return None
    supply = replace(machine.supply, voltage=factor * machine.supply.voltage)
    return replace(asked, machine=replace(machine, supply=supply))


def more_diameter(asked: Question, factor: float) -> Question:
    """Return the question with more room across."""
    space = replace(asked.sizing.space, diameter=factor * asked.sizing.space.diameter)
    return _resized(asked, replace(asked.sizing, space=space))


def more_length(asked: Question, factor: float) -> Question:
    """Return the question with more room along the axis."""
    space = replace(asked.sizing.space, length=factor * asked.sizing.space.length)
    return _resized(asked, replace(asked.sizing, space=space))


def more_speed(asked: Question, factor: float) -> Question:
    """Return the question with a higher top speed."""
    return _resized(asked, replace(asked.sizing, top_speed=factor * asked.sizing.top_speed))


def more_mass(asked: Question, factor: float) -> Question:
    """Return the question with more mass allowed."""
    return _resized(asked, replace(asked.sizing, most_mass=factor * asked.sizing.most_mass))


def less_safety(asked: Question, factor: float) -> Question:
    """Return the question with a smaller safety factor, at least 1."""
    return _resized(asked, replace(asked.sizing, safety=max(asked.sizing.safety / factor, 1.0)))
