"""The least momentum with which a candidate passes while momentum, or torque, is divided by the safety factor.

The rotor is made thinner, and where it is as thin as can be narrower, until the machine only just passes with either of
the two divided by the safety factor.  The one that fails first then binds: divided by five per cent more, the machine fails.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from balance.machine.machine import Machine
from balance.size.candidate import WHEEL, Candidate, fitted, web_of
from balance.size.grid import THINNEST
from balance.size.question import Question
from balance.size.trial import Pairs, Tested, hardest, quick, thorough

HARD, HARDER = 2, 6
"""Trials that stand for all while the size is searched, and those it is then held against; all are run as built."""
FINE = 0.012
"""Relative width at which the search ends: well inside the five per cent by which the twin must fail."""
TWIN = 1.05
"""The binding quantity divided by the safety factor and this must fail."""
LEAST, MOST = 0.1, 1.6
"""Factors on the candidate's momentum between which the least is looked for."""


@dataclass(frozen=True)
class Trimmed:
    """A candidate as small as the trials let it be, or why there is none."""

    candidate: Candidate
    tested: Tested | None     # the whole of it, as built
    binding: str              # "momentum" | "torque" | ""
    limited_by: str           # what fails first when that is made smaller
    factor: float             # of the momentum of the candidate it was made from
    refused: str              # "" where it passes


def with_momentum(candidate: Candidate, factor: float) -> Candidate:
    """Return the candidate with `factor` times the momentum: by its top speed, the torque of a wheel unchanged."""
    return replace(candidate, speed=candidate.speed * factor)


def with_torque(candidate: Candidate, factor: float, question: Question) -> Candidate:
    """Return the candidate with `factor` times its torque: at the wheel; of a gimbal, the drive's torque and rate."""
    motors, drives = question.parts.motors or {}, question.parts.drives or {}
    if candidate.family == WHEEL:
        most = min(question.wheel_torque(motors[candidate.motor], candidate.ratio), candidate.torque_limit)
        return replace(candidate, torque_limit=factor * most)
    drive = drives[candidate.drive]
    return replace(candidate, torque_limit=factor * min(drive.torque, candidate.torque_limit),
                   rate_limit=factor * min(drive.rate, candidate.rate_limit))


def smaller(candidate: Candidate, factor: float) -> Candidate:
    """Return the candidate with about `factor` times its momentum: a shorter rotor first, then a narrower one.

    Momentum grows with the fourth power of the diameter; the speed stays, and with it what the motor gives.
    """
    length = max(candidate.length * factor, min(THINNEST, candidate.length))
    diameter = candidate.diameter * min(candidate.length * factor / length, 1.0) ** 0.25
    return replace(candidate, length=length, web=web_of(length), diameter=diameter)


def weakened(binding: str, candidate: Candidate, factor: float, question: Question) -> Machine:
    """Return the machine with one quantity of its stabiliser divided by `factor`: "momentum" or "torque"."""
    if binding == "momentum":
        return built(with_momentum(candidate, 1.0 / factor), question)
    return built(with_torque(candidate, 1.0 / factor, question), question)


def built(candidate: Candidate, question: Question) -> Machine:
    """Return the machine with the candidate in it."""
    return fitted(question.machine, candidate, question.sizing, question.parts, question.count)


def trim(candidate: Candidate, question: Question) -> Trimmed:
    """Return the candidate trimmed; what no size of it passes, or what the loop does not meet, is said in `refused`."""
    goal, safety = question.goal, question.sizing.safety
    first = quick(weakened("momentum", candidate, safety, question), goal, question.pairs())
    hard = hardest(first, HARD)

    def passes(factor: float) -> bool:
        made = smaller(candidate, factor)
        return all(quick(weakened(what, made, safety, question), goal, hard).passed for what in ("momentum", "torque"))

    guess = first.momentum_used / (goal.require.momentum_used or 1.0)
    found = least(passes, min(max(guess, LEAST), MOST))
    if found is None:
        return Trimmed(candidate, None, "", "", 0.0, first.failed[0] if first.failed else "no size of it has the torque")
    made = smaller(candidate, found)
    whole = thorough(built(made, question), goal, question.stances)
    if not whole.passed:
        return Trimmed(made, whole, "", "", found, whole.failed[0])
    binding, limited_by = _binding(made, hard, question)
    missed = _with_safety(made, hardest(first, HARDER), question)
    return Trimmed(made, whole, binding, limited_by, found, missed if binding else "what binds is not one quantity")


def _binding(made: Candidate, hard: Pairs, question: Question) -> tuple[str, str]:
    """Return the quantity whose lack fails first, and what it fails; ("", "") where neither does."""
    for what in ("momentum", "torque"):
        weak = quick(weakened(what, made, TWIN * question.sizing.safety, question), question.goal, hard)
        if not weak.passed:
            return what, weak.failed[0]
    return "", ""


def _with_safety(made: Candidate, pairs: Pairs, question: Question) -> str:
    """Return what these trials find with the safety factor taken off; "" where they pass."""
    for what in ("momentum", "torque"):
        tested = quick(weakened(what, made, question.sizing.safety, question), question.goal, pairs)
        if not tested.passed:
            return f"with {what} over the safety factor: {tested.failed[0]}"
    return ""


def least(passes: Callable[[float], bool], guess: float) -> float | None:
    """Return the smallest factor from LEAST to MOST that passes, to FINE, from a guess; None where MOST does not."""
    low = high = guess
    step = 1.03
    if passes(guess):
        while passes(low / step):
            high = low = low / step
            step *= step
            if low < LEAST:
                return low
        low = low / step
    else:
        while True:
            low, high = high, high * step
            step *= step
            if passes(high):
                break
            if high > MOST:
                return None
    while high / low > 1.0 + FINE:
        middle = (low * high) ** 0.5
        low, high = (low, middle) if passes(middle) else (middle, high)
    return high
