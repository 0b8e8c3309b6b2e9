"""What is asked of the sizing: machine, goal, stances and parts together, with what follows from them."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

from balance.goal.goal import Goal
from balance.goal.sizing import Sizing
from balance.machine.machine import Machine
from balance.machine.motors import Gear
from balance.plant.motors import Drive, drive_of
from balance.size.candidate import GEARED
from balance.size.closed import BareLine, bare_lines, parallel
from balance.size.parts import Parts, StockMotor, bare

FORMAT = 4
"""Of the state file: counts up whenever what is kept, or how it is found, changes."""


@dataclass(frozen=True)
class Question:
    """Everything one candidate needs to be tested; goes to worker processes as it is."""

    machine: Machine
    goal: Goal
    stances: tuple[str, ...]
    parts: Parts
    sizing: Sizing
    lines: tuple[BareLine, ...]
    count: int                  # 1 where all contact lines are parallel

    def pairs(self) -> tuple[tuple[str, str], ...]:
        """Return every (stance, trial)."""
        return tuple((s, t) for s in self.stances for t in self.goal.trials)

    def wheel_torque(self, motor: StockMotor, ratio: float) -> float:
        """Return the largest torque of a motor through its gear at a standing wheel in N·m."""
        return self.drive(motor, ratio).stall_torque

    def drive(self, motor: StockMotor, ratio: float) -> Drive:
        """Return a motor through its gear on the machine's supply, as the wheel feels it."""
        gear = Gear(ratio=ratio, efficiency=GEARED) if ratio != 1.0 else Gear()
        return drive_of(bare(motor), gear, self.machine.supply)

    def key(self) -> str:
        """Return a word that changes whenever anything that is asked changes: a state file belongs to one question."""
        told = repr((FORMAT, self.machine, self.goal, self.stances, self.parts))
        return hashlib.sha256(told.encode()).hexdigest()[:16]


def question(machine: Machine, goal: Goal, stances: tuple[str, ...], parts: Parts) -> Question:
    """Put a question together; `goal.size` is there.  Raises InputError as `build_stance` does."""
    assert goal.size is not None
    lines = bare_lines(machine, goal.size, stances)
    return Question(machine, goal, stances, parts, goal.size, lines, parallel(lines))
