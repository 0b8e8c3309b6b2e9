"""The answer: fronts of mass against push and against power, the best few with what limits them, or what to relax."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from balance.size.change import more_diameter, more_length, more_mass, more_speed, more_voltage
from balance.size.confirm import Confirmed
from balance.size.need import Need, needs
from balance.size.question import Question
from balance.size.rotor import RotorCheck, rotor_check
from balance.size.search import Survey, search, survey
from balance.size.sensitivity import Sensitivity, sensitivities

Tell = Callable[[str], None]

FARTHEST = 8.0
"""Relaxing a limit by more than this factor is no advice."""


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
    rotors = tuple(rotor_check(asked, c.candidate, c.rms_torque, asked.goal.fell * wanted[0].pole, c.mode)
                   for c in best)
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
