"""The same trials once more in steps a quarter as long: what the integrator's own error is worth."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.goal.goal import Goal
from balance.machine.machine import Machine
from balance.simulate.events import directions
from balance.simulate.records import TrialResult
from balance.simulate.run import run_one, run_trials

Array = NDArray[np.float64]

FINER = 4.0
"""An integrator of order four is 256 times more exact then: the difference is the coarser run's error."""


@dataclass(frozen=True)
class Audit:
    """One trial run twice: largest differences of the two histories over the time both lasted."""

    name: str
    stance: str
    toward: str
    lean: float            # rad
    momentum: float        # share of the momentum capacity
    verdict: str           # of the trial as it is run
    finer_verdict: str     # of the same in finer steps

    @property
    def same_verdict(self) -> bool:
        """True when both runs end alike."""
        return self.verdict == self.finer_verdict


def audit_trials(design: Design, goal: Goal, machine: Machine) -> tuple[Audit, ...]:
    """Run every trial of `goal` twice, the second time with steps a quarter as long; none where the design was refused."""
    coarse = run_trials(design, goal, machine, True)
    asked = [(name, trial, toward) for name, trial in goal.trials.items() for toward in directions(trial)]
    finer = [run_one(design, goal, *one, True, finer=FINER) for one in (asked if coarse else [])]
    return tuple(_compared(*pair, design.plant.momentum_capacity) for pair in zip(coarse, finer, strict=True))


def _compared(one: TrialResult, finer: TrialResult, capacity: float) -> Audit:
    """Compare two runs of one trial sample by sample; the last, which may be cut short, is left out where they differ."""
    assert one.trace is not None
    assert finer.trace is not None
    rows = min(one.trace.time.size, finer.trace.time.size)
    if one.trace.time[rows - 1] != finer.trace.time[rows - 1]:
        rows -= 1
    return Audit(one.name, one.stance, one.toward, _apart(one.trace.lean, finer.trace.lean, rows),
                 _apart(one.trace.momentum, finer.trace.momentum, rows) / capacity if capacity > 0.0 else 0.0,
                 one.verdict, finer.verdict)


def _apart(a: Array, b: Array, rows: int) -> float:
    """Return the largest difference over the first rows."""
    return float(np.abs(a[:rows] - b[:rows]).max(initial=0.0))
