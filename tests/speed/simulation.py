"""Times the trial loop against scipy's integrator under the same sampled law, in the same run.

    python -m tests.speed.simulation

prints microseconds per simulated second and the ratio; the machine at hand decides the first, the ratio travels better.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from scipy.integrate import solve_ivp

from balance.design.build import design_stance
from balance.design.records import Design
from balance.goal.goal import Goal
from balance.goal.read import read_goal
from balance.goal.trials import Start, Trial
from balance.kernel.drive import unit_input
from balance.kernel.equations import derivative
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.simulate.run import run_one
from balance.stance.build import build_stance

CASES = (("bench-rig", "line"), ("scout-wheels", "on-fore-right"), ("quay-gyros", "on-left-right"))


@dataclass(frozen=True)
class Timed:
    """One machine: seconds of computing per simulated second, ours and scipy's; and where the lean stood at the end."""

    name: str
    ours: float
    scipy: float
    end_lean: float
    scipy_lean: float

    def __str__(self) -> str:
        return (f"{self.name:<16} {1e6 * self.ours:9.0f} µs per simulated second; solve_ivp {1e6 * self.scipy:9.0f} µs: "
                f"{self.scipy / self.ours:7.0f} times as long")


def prepared(name: str, stance: str) -> tuple[Goal, Design]:
    """Return the goal and one stance's design of a shipped design file."""
    goal = read_goal(f"designs/{name}.yaml")
    goal = replace(goal, loop=replace(goal.loop, jitter=0.0))    # scipy's loop keeps time
    machine = read_machine(f"plants/{goal.machine.rsplit('/', 1)[-1]}")
    return goal, design_stance(build_plant(machine, build_stance(machine, stance)), goal)


def quickest(run: Callable[[], float], times: int) -> tuple[float, float]:
    """Return (the shortest time in s, what the run answered)."""
    best, answer = math.inf, 0.0
    for _ in range(times):
        start = time.perf_counter()
        answer = run()
        best = min(best, time.perf_counter() - start)
    return best, answer


def by_scipy(design: Design, lean: float, lasts: float) -> float:
    """Return the lean after `lasts` s of the same law and drives with scipy's RK45 (1e-6), restarted at each sample."""
    plant, law = design.plant, design.law
    rows, body, out = plant.unit_parameters, plant.body_parameters, np.zeros(2 + 2 * len(plant.units))
    wheels = "wheel_speed" in plant.model.states[-1]
    X, memory, asked = np.zeros_like(out), np.zeros(len(law.C)), np.zeros(len(rows))
    X[0] = plant.balanced_lean + lean

    def rate(_: float, x: np.ndarray) -> np.ndarray:
        given = [unit_input(rows, i, x[2 + 2 * i], x[3 + 2 * i], x[1], asked[i]) for i in range(len(rows))]
        derivative(x, np.array([g[0] for g in given]), 0.0, body, rows, out)
        if wheels:
            out[3::2] = [g[1] for g in given]
        return out.copy()

    for _ in range(round(lasts / law.sample_time)):
        measured = np.array(X[[0, 1, *range(2, len(X), 2)]] if wheels else X)
        measured[0] -= plant.balanced_lean
        cut = np.clip(law.C @ memory + law.D @ measured, -law.output_limit, law.output_limit)
        following = np.clip(law.allotment * cut - law.levelling @ measured, -law.input_limits, law.input_limits)
        memory = law.A @ memory + law.B @ measured + law.E * cut
        X = solve_ivp(rate, (0.0, law.sample_time), X, rtol=1e-6).y[:, -1]
        asked = following                                       # one sample of latency
    return float(X[0] - plant.balanced_lean)


def measure(lasts: float, times: int) -> list[Timed]:
    """Time each shipped kind of machine over `lasts` simulated seconds."""
    lean, lines = 0.01, []
    for name, stance in CASES:
        goal, design = prepared(name, stance)
        trial = Trial(start=Start(lean, toward="outward"), lasts=lasts)

        def ours(design: Design = design, goal: Goal = goal, trial: Trial = trial) -> float:
            return run_one(design, goal, "speed", trial, "outward", False).end_lean

        ours()                                                   # compiled, or loaded from the cache
        mine, end = quickest(ours, times)
        other, answer = quickest(lambda d=design: by_scipy(d, lean, lasts), 1)
        lines.append(Timed(name, mine / lasts, other / lasts, end, answer))
    return lines


if __name__ == "__main__":
    for line in measure(5.0, 9):
        print(line)
