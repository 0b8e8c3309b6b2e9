"""Retuning: a design whose worst case is too near the edge passes with weights chosen for it, and says what changed."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from balance.api.gains import gains
from balance.api.judge import judge_loop, judge_trials
from balance.api.load import load
from balance.api.recover import recover
from balance.design.pid import NOISE_SHARE
from balance.design.robustness.retune import FREE, OCTAVES, retune, scaled
from balance.design.robustness.screen import screen_of
from balance.goal.goal import Weights

ROOT = Path(__file__).parents[2]


def job_with(name: str, **control):
    """Return a shipped job that asks for a worst disk margin of 1.0, which its own weights do not keep."""
    job = load(str(ROOT / "designs" / f"{name}.yaml"))
    require = replace(job.goal.require, worst_disk_margin=1.0)
    return replace(job, goal=replace(job.goal, require=require, control=replace(job.goal.control, **control)))


def missed(job) -> list[str]:
    return [v.name for v in judge_loop(job, gains(job)) if not v.passed]


@pytest.fixture(scope="module")
def retuned():
    """The bench rig's design, retuned, once."""
    job = job_with("bench-rig", retune="robust")
    return job, gains(job)[0]


def test_the_design_passes_retuned_and_does_not_as_given(retuned) -> None:
    job, design = retuned
    assert [v.name for v in judge_loop(job, (design,)) if not v.passed] == []
    assert missed(job_with("bench-rig")) == ["worst_disk_margin"]


def test_it_says_what_changed_and_is_right(retuned) -> None:
    job, design = retuned
    changed = design.retuned
    given = gains(job_with("bench-rig"))[0]
    assert set(changed.scales) == set(FREE)
    assert all(2.0**-OCTAVES <= value <= 2.0**OCTAVES for value in changed.scales.values())
    # half a per cent: the screen's grid against refined crossings
    assert changed.before == pytest.approx(given.robustness.cases[0].value, rel=5e-3)
    assert changed.after == pytest.approx(design.robustness.cases[0].value, rel=5e-3)
    assert changed.after > changed.before
    octaves = np.log2([changed.scales[name] for name in FREE])
    by_hand = replace(job, goal=scaled(job_with("bench-rig").goal, octaves))
    assert np.allclose(gains(by_hand, worst=False)[0].law.K, design.law.K, rtol=1e-9)       # the same Riccati equation


def test_margin_is_not_bought_with_noise_or_sloth(retuned) -> None:
    job, design = retuned
    screen = screen_of(design.plant, design.law)
    assert screen.shaken() <= NOISE_SHARE * (1.0 + 1e-9)
    assert screen.slowest() <= job.goal.require.settling_time / 4.0 * (1.0 + 1e-9)


def test_what_the_trials_would_lose_is_taken_back(retuned) -> None:
    """The best weights use 17.1 % of the momentum in the worst trial, those given 14.7 %: asked for are 16 %."""
    job, design = retuned
    strict = replace(job, goal=replace(job.goal, require=replace(job.goal.require, momentum_used=0.16)))
    (held,) = gains(strict)
    assert design.retuned.part == 1.0
    assert 0.0 < held.retuned.part < 1.0
    assert all(v.passed for v in judge_trials(strict, (held,), recover(strict, (held,))))
    assert not all(v.passed for v in judge_trials(strict, (design,), recover(strict, (design,)))), "the twin: all the way"
    assert held.retuned.before < held.retuned.after < design.retuned.after
    assert held.retuned.after == pytest.approx(held.robustness.cases[0].value, rel=5e-3)       # the screen's grid
    plant, ranges = design.plant, design.robustness.ranges
    goal, changed = retune(plant, job.goal, ranges, lambda _: False)
    assert goal == job.goal
    assert changed.part == 0.0


def test_the_same_weights_every_time(retuned) -> None:
    job, design = retuned
    assert gains(job, worst=False)[0].retuned == design.retuned


def test_explicit_weights_are_rescaled_by_squares() -> None:
    goal = job_with("bench-rig", allow=None, weights=Weights((100.0, 4.0, 9.0), 2.0)).goal
    assert scaled(goal, np.array([1.0, 0.0, -1.0])).control.weights == Weights((25.0, 4.0, 36.0), 2.0)


def test_what_cannot_be_balanced_is_not_retuned() -> None:
    job = job_with("bench-rig", retune="robust")
    wheel = replace(job.machine.stabilisers["wheel"], axis=(0.0, 0.0, 1.0))
    (design,) = gains(replace(job, machine=replace(job.machine, stabilisers={"wheel": wheel})))
    assert design.refused
    assert design.retuned is None
    assert design.robustness is None
    assert math.isnan(design.margins.disk)
