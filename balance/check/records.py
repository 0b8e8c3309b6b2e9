"""Verdicts: one number against one limit."""

from __future__ import annotations

from dataclasses import dataclass

from balance.design.records import Design
from balance.goal.goal import Goal
from balance.machine.machine import Machine
from balance.simulate.records import TrialResult


@dataclass(frozen=True)
class Verdict:
    """One requirement judged on one stance."""

    name: str
    stance: str
    value: float | str
    unit: str
    limit: float | str
    sense: str          # "at most" | "at least" | "is"
    passed: bool
    reason: str


@dataclass(frozen=True)
class CheckResult:
    """The whole answer of the main job."""

    machine: Machine
    goal: Goal
    designs: tuple[Design, ...]        # one per stance asked for
    trials: tuple[TrialResult, ...]
    verdicts: tuple[Verdict, ...]

    @property
    def passed(self) -> bool:
        """True when every requirement is met."""
        return all(v.passed for v in self.verdicts)
