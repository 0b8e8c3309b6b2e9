"""What a little more or less of everything would change, by the closed forms off the grid.

A grid's steps are larger than what a tenth more of something saves.  So the rotors of the best kinds (shape, material,
motor, gear or drive) are made to measure: at each of many diameters as thin as the trials allow, and where that is
thinner than can be made, slower; diameters are shares of the room there is, so that nothing jumps when the room grows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf

import numpy as np
from numpy.typing import NDArray

from balance.size.change import less_safety, more_diameter, more_speed, more_voltage
from balance.size.closed import margins
from balance.size.grid import SMALLEST, THINNEST, Grid, columns
from balance.size.question import Question
from balance.size.search import Survey

Array = NDArray[np.float64]
Kind = tuple[int, int, int, float]
"""Shape, material, motor, and gear ratio of a wheel or drive of a gimbal."""

STEP = 1.1
"""A tenth more."""
KINDS = 8
"""Of each family, the lightest by the grid: a change of a tenth brings no others to the front."""
DIAMETERS = 120
"""A step of 1.5 % in diameter."""
FLAT = 3e-3
"""Of the mass: what steps in diameter may leave, so that less is not told."""
HALVINGS = 18
"""Of the rotor's momentum on a scale of logarithms over THINNEST_SHARE: to 3e-5."""
THINNEST_SHARE = 1e-3
"""Of the momentum that the whole room would give, least looked at."""


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
        if abs(less) < max(0.5, 1e3 * FLAT * self.before):
            return f"{self.what} hardly changes anything for a {self.family}."
        return f"{self.what} {'saves' if less > 0.0 else 'costs'} {abs(less):.0f} g ({self.family})."


def sensitivities(asked: Question, surveys: Sequence[Survey]) -> tuple[Sensitivity, ...]:
    """Return what a tenth more of each thing changes, family by family, where anything of the family can do it."""
    changes = (("10 % more supply voltage", more_voltage), ("10 % more rotor diameter", more_diameter),
               ("10 % more top speed", more_speed), ("10 % less safety factor", less_safety))
    asks = [(words, change(asked, STEP)) for words, change in changes]
    families = [(one.grid.family, best_kinds(one)) for one in surveys if len(one.enough)]
    now = {family: made_to_measure(asked, family, kinds) for family, kinds in families}
    return tuple(Sensitivity(family, words, now[family], made_to_measure(other, family, kinds))
                 for words, other in asks if other is not None for family, kinds in families)


def best_kinds(one: Survey) -> tuple[Kind, ...]:
    """Return the kinds of the lightest sufficient candidates of the grid."""
    g, kinds = one.grid, dict[Kind, None]()
    for i in one.enough:
        last = float(g.ratio[i]) if g.drive[i] < 0 else float(g.drive[i])
        kinds[int(g.shape[i]), int(g.material[i]), int(g.motor[i]), last] = None
        if len(kinds) == KINDS:
            break
    return tuple(kinds)


def made_to_measure(asked: Question, family: str, kinds: Sequence[Kind]) -> float:
    """Return the least added mass in kg with rotors of these kinds made to measure; inf: none can do it."""
    if not kinds:
        return inf
    across = np.geomspace(SMALLEST / asked.sizing.space.diameter, 1.0, DIAMETERS) * asked.sizing.space.diameter
    low, high = np.full(len(kinds) * DIAMETERS, THINNEST_SHARE), np.ones(len(kinds) * DIAMETERS)
    for _ in range(HALVINGS):
        middle = np.sqrt(low * high)
        can, _ = _can(asked, _rotors(asked, family, kinds, across, middle))
        low, high = np.where(can >= 1.0, low, middle), np.where(can >= 1.0, middle, high)
    made = _rotors(asked, family, kinds, across, high)
    can, holds = _can(asked, made)
    able = (can >= 1.0) & (holds >= 1.0) & (made.added <= asked.sizing.most_mass)
    return float(made.added[able].min()) if able.any() else inf


def _can(asked: Question, made: Grid) -> tuple[Array, Array]:
    """Return can ÷ must of momentum and torque, and of what gimbal drives hold, (n,) each."""
    return margins(made, asked.parts, asked.machine, asked.goal, asked.lines)[:2]


def _rotors(asked: Question, family: str, kinds: Sequence[Kind], across: Array, share: Array) -> Grid:
    """Return every kind at every diameter with `share` of the momentum that the whole room's length would give."""
    shape, material, motor, last = (np.repeat(np.array(v), len(across)) for v in zip(*kinds, strict=True))
    room = asked.sizing.space.length
    length = np.maximum(room * share, min(THINNEST, room))
    roomy = replace(asked.sizing, most_mass=inf)                             # none left out: rows stay where they are
    if family != "reaction wheel":
        last = last.astype(np.int64)
    return columns(family, roomy, asked.parts, asked.machine.supply, asked.count, shape, material,
                   np.tile(across, len(kinds)), length, motor, last, room * share / length)
