"""What each contact line needs, by the closed forms turned round: torque, momentum, power, bandwidth, with the reason.

The stabiliser's own mass is on board: it is looked for until the lightest one that does it weighs what was assumed.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf, log, pi

import numpy as np

from balance.goal.goal import Goal
from balance.size.closed import BareLine, delay, discounted
from balance.size.demand import Seen, demands
from balance.size.question import Question
from balance.size.search import Survey

DELAY_LEFT = 0.3
"""pole × delay above which little is left for any controller (the agreement's physics; `design.limits`)."""


@dataclass(frozen=True)
class Need:
    """What one contact line asks of any stabiliser, safety factor left out."""

    stance: str
    added: float        # kg of stabiliser assumed on board
    pole: float         # 1/s
    torque: float       # N·m, with all the momentum one could wish
    momentum: float     # N·m·s, with all the torque one could wish
    both: float         # N·m·s, with twice the least torque
    power: float        # W about the line: twice the least torque at the fastest lean rate
    bandwidth: float    # Hz of the drive; inf where the loop's own delay is too long already
    trial: str          # that sets torque and momentum
    reasons: tuple[str, ...]


def needs(question: Question, surveys: tuple[Survey, ...]) -> tuple[Need, ...]:
    """Return the need about each line with the lightest sufficient stabiliser's mass on board."""
    added = settled_mass(question, surveys)
    return tuple(need(question, line, added) for line in question.lines)


def settled_mass(question: Question, surveys: tuple[Survey, ...], most: int = 20) -> float:
    """Return the added mass in kg at which assumed and found agree (a fixed point); the last one after `most` rounds."""
    assumed = 0.0
    for _ in range(most):
        found = min((_lightest(question, one, assumed) for one in surveys), default=inf)
        if found in (assumed, inf):
            return assumed
        assumed = found
    return assumed


def _lightest(question: Question, one: Survey, assumed: float) -> float:
    """Return the least added mass in kg among those that do it on a machine that carries `assumed`; inf: none does."""
    goal, sizing = question.goal, question.sizing
    columns = replace(one.grid, added=np.full(len(one.grid), assumed))
    able = np.ones(len(columns), dtype=bool)
    for line in question.lines:
        s = seen_with(line, assumed)
        p = np.full(len(columns), float(s.pole[0]))
        can = discounted(columns, question.parts, question.machine, line, p, question.count,
                         1.0 / sizing.safety, 1.0 / sizing.safety, goal.require.momentum_used or 1.0)
        must = max(float(d[0]) for d in demands(goal, s).values()) if goal.trials else 0.0
        able &= can >= must * np.exp(p * delay(columns, question.parts, goal)) + standing(question, line, s)
    return float(one.grid.added[able].min()) if able.any() else inf


def seen_with(line: BareLine, added: float) -> Seen:
    """Return what the line sees with `added` kg at the stabiliser's place, (1,) columns."""
    m = line.mass + added
    height = np.hypot(line.mass * line.height + added * line.up, line.mass * line.offset + added * line.out) / m
    J = line.inertia + added * (line.up**2 + line.out**2)
    return Seen(np.array([m]), np.array([height]), np.array([J]), np.array([m * line.gravity * height]))


def standing(question: Question, line: BareLine, s: Seen) -> float:
    """Return the momentum in N·m·s that the offset error takes in one phase: m g δ t."""
    return float((s.stiffness / s.height)[0]) * question.sizing.offset_error * question.sizing.phase


def need(question: Question, line: BareLine, added: float) -> Need:
    """Return what one line needs."""
    goal, s = question.goal, seen_with(line, added)
    p, J = float(s.pole[0]), float(s.inertia[0])
    asked = {name: float(d[0]) for name, d in demands(goal, s).items()}
    trial = max(asked, key=lambda n: asked[n])
    late = goal.loop.latency + 0.5 / goal.loop.rate + goal.loop.jitter
    demand, steady = asked[trial] * float(np.exp(p * late)), standing(question, line, s)
    torque, momentum = demand * p, demand + steady
    both = -2.0 * demand * log(0.5) + steady                 # (T/p)(1 − e^{−pq/T}) = demand with T = 2 p demand
    left = DELAY_LEFT / p - late
    bandwidth = 1.0 / (2.0 * pi * left) if left > 0.0 else inf
    rate = asked[trial] / J
    return Need(line.name, added, p, torque, momentum, both, 2.0 * torque * rate, bandwidth, trial,
                _reasons(question, goal, trial, p, demand, steady, late))


def _reasons(question: Question, goal: Goal, trial: str, p: float, demand: float, steady: float,
             late: float) -> tuple[str, ...]:
    """Return one line each for torque, momentum, power and bandwidth."""
    sizing = question.sizing
    error = (f"; {1e3 * sizing.offset_error:.3g} mm of offset error for {sizing.phase:.3g} s take {steady:.3g} of it"
             if steady else "")
    return (f"`{trial}` asks for {demand:.3g} N·m·s, {1e3 * late:.3g} ms late; torque below that times the pole, "
            f"{p:.3g} 1/s, never catches up",
            f"no torque, however large, brings `{trial}` back with less{error}",
            "the torque turns with the body, at the lean rate the trial leaves it with",
            f"pole × delay must stay below {DELAY_LEFT:g}; sampling, latency and jitter take {p * late:.2g} of it")
