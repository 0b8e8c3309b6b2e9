"""A candidate put to the test: its controller designed, its trials run, judged as `balance check` judges."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from balance.check.judge import judge
from balance.check.records import Verdict
from balance.check.recovery import caught, worst_cases
from balance.design.build import design_stance, law_for
from balance.design.limits import loop_limits
from balance.design.loop import close, sample_plant
from balance.design.margins import UNSTABLE
from balance.design.records import Design, Response
from balance.goal.goal import Goal
from balance.machine.machine import Machine
from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.simulate.records import TrialResult
from balance.simulate.run import run_trials
from balance.stance.build import build_stance

Pairs = tuple[tuple[str, str], ...]
"""(stance, trial) pairs."""


@dataclass(frozen=True)
class Tested:
    """What the tests said of one machine; `failed` names what was not met, with the trial or requirement in words."""

    designs: tuple[Design, ...]
    trials: tuple[TrialResult, ...]
    failed: tuple[str, ...]

    @property
    def passed(self) -> bool:
        """True when nothing failed."""
        return not self.failed

    @property
    def momentum_used(self) -> float:
        """Largest share of the capacity used in any trial."""
        return max((t.momentum_used for t in self.trials), default=0.0)

    @property
    def power(self) -> float:
        """Largest power drawn from the supply in any trial, W."""
        return max((t.peak_bus_power for t in self.trials), default=0.0)


def nominal(goal: Goal) -> Goal:
    """Return the goal without its limits on the worst case within tolerances: those are searched at the end, once."""
    others = {name: None for name in vars(goal.require) if name.startswith("worst_")}
    return replace(goal, require=replace(goal.require, **others))


def thorough(machine: Machine, goal: Goal, stances: Sequence[str]) -> Tested:
    """Design, measure margins, run every trial and judge all of it; tolerances left out."""
    asked = nominal(goal)
    designs = tuple(design_stance(_plant(machine, s, goal), asked) for s in stances)
    trials = tuple(t for d in designs for t in run_trials(d, asked, machine, False))
    bare = _outcomes(asked, designs, trials)
    if not bare:                                             # else `judge` runs each failed trial again to say what it needs
        bare = tuple(words(v) for v in judge(asked, designs, trials) if not v.passed)
    return Tested(designs, trials, bare)


def quick(machine: Machine, goal: Goal, pairs: Pairs) -> Tested:
    """Run only these trials, on laws whose margins nobody measures; what the trials are asked for is judged on them."""
    designs: list[Design] = []
    trials: list[TrialResult] = []
    for stance in dict.fromkeys(s for s, _ in pairs):
        chosen = {n: t for n, t in goal.trials.items() if (stance, n) in pairs}
        design = unmeasured(_plant(machine, stance, goal), goal)
        designs.append(design)
        trials += run_trials(design, replace(goal, trials=chosen), machine, False)
    return Tested(tuple(designs), tuple(trials), _outcomes(goal, tuple(designs), tuple(trials)))


def unmeasured(plant: Plant, goal: Goal) -> Design:
    """Return the design of one stance without margins and response: the law is the same, and a hundred times as quick."""
    sampled = sample_plant(plant, 1.0 / goal.loop.rate, goal.loop.latency)
    law = law_for(plant, goal) if plant.acts else "cannot act about this line"
    if isinstance(law, str):
        return design_stance(plant, goal)                    # says why, and measures nothing either
    poles = np.linalg.eigvals(close(sampled, law)).astype(np.complex128)
    none = np.zeros(0)
    return Design(plant, law, poles, poles, UNSTABLE, loop_limits(plant, sampled.sample_time, sampled.latency), None,
                  Response(none, none.astype(np.complex128)), None, refused="")


def hardest(tested: Tested, many: int) -> Pairs:
    """Return the (stance, trial) pairs that used the most momentum, hardest first, each once; lost ones before all."""
    rank = sorted(tested.trials, key=lambda t: (t.verdict == "recovered", -t.momentum_used))
    return tuple(dict.fromkeys((t.stance, t.name) for t in rank))[:many]


def words(verdict: Verdict) -> str:
    """Say which requirement a verdict is about."""
    return f"{verdict.name.replace('_', ' ')} ({verdict.stance})"


def _outcomes(goal: Goal, designs: tuple[Design, ...], trials: tuple[TrialResult, ...]) -> tuple[str, ...]:
    """Return what the trials did not meet, without asking what they would have needed."""
    said = [f"{d.plant.stance.name}: {d.refused}" for d in designs if d.refused]
    said += [f"{t.name} {t.toward} ({t.stance}): {t.verdict}" for t in trials if not caught(goal, t)]
    for design in designs:
        own = [t for t in trials if t.stance == design.plant.stance.name]
        if own:
            said += [words(v) for v in worst_cases(goal, design, own) if not v.passed]
    return tuple(said)


def _plant(machine: Machine, stance: str, goal: Goal) -> Plant:
    return build_plant(machine, build_stance(machine, stance), goal.fell)
