"""Every reported limit of gain and delay stands where a closed-loop eigenvalue crosses the unit circle."""

from __future__ import annotations

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.loop import actuator_break, sample_plant
from tests.design.machines import random_goal, random_plant


def radius(sampled, law, factor=1.0, delay=0.0):
    met = sampled.with_extra_delay(delay) if delay else sampled
    return np.abs(np.linalg.eigvals(actuator_break(met, law).closed(factor))).max()


@pytest.mark.parametrize("seed", range(300))
def test_limits_are_bracketed_by_eigenvalues(seed):
    """Half a percent on either side of each limit: stable inside, unstable outside."""
    rng = np.random.default_rng([7, seed])
    plant, goal = random_plant(rng), random_goal(rng)
    design = design_stance(plant, goal)
    assert not design.refused
    m, law = design.margins, design.law
    assert m.stable
    sampled = sample_plant(plant, law.sample_time, law.latency)
    assert radius(sampled, law) < 1.0
    if m.gain_lower > 1e-4:
        assert radius(sampled, law, m.gain_lower * 1.005) < 1.0 < radius(sampled, law, m.gain_lower * 0.995)
    if np.isfinite(m.gain_upper):
        assert radius(sampled, law, m.gain_upper * 0.995) < 1.0 < radius(sampled, law, m.gain_upper * 1.005)
    assert np.isfinite(m.delay)                                    # an unstable plant never bears any delay
    assert radius(sampled, law, delay=m.delay * 0.995) < 1.0 < radius(sampled, law, delay=m.delay * 1.005)
    lean = np.linspace(m.gain_lower * 1.01, min(m.gain_upper, 50.0) * 0.99, 12)
    assert all(radius(sampled, law, k) < 1.0 for k in lean)        # and nothing is lost in between
