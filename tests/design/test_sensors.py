"""Margins at a sensor mean what they say: scale that one measurement, and stability is lost where they say."""

from __future__ import annotations

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.loop import actuator_break, sample_plant
from balance.design.sensors import sensor_margins
from balance.goal.goal import Complementary
from tests.design.machines import shipped


def radius(sampled, law, name, factor):
    """Spectral radius with one measurement scaled: a scaled row of C, nothing of the sensor break's own algebra."""
    C = sampled.C.copy()
    C[sampled.measured.index(name)] *= factor
    from dataclasses import replace
    return np.abs(np.linalg.eigvals(actuator_break(replace(sampled, C=C), law).closed())).max()


@pytest.mark.parametrize(("name", "stance", "filtered"), [
    ("bench-rig", "line", False), ("bench-rig", "line", True), ("bench-rig-pid", "line", False),
    ("scout-wheels", "on-fore-left", False), ("quay-gyros", "on-left-right", True)])
def test_each_limit_is_where_the_eigenvalues_cross(name, stance, filtered):
    plant, g = shipped(name, stance, **({"estimator": Complementary(0.2)} if filtered else {}))
    design = design_stance(plant, g)
    sampled = sample_plant(plant, design.law.sample_time, design.law.latency)
    found = sensor_margins(design)
    assert {n for n, _ in found} <= set(design.law.measurements)
    assert len(found) >= 3
    for sensor, m in found:
        assert m.stable
        if m.gain_lower > 1e-3:
            assert radius(sampled, design.law, sensor, m.gain_lower * 0.995) > 1.0 > \
                radius(sampled, design.law, sensor, m.gain_lower * 1.005)
        if np.isfinite(m.gain_upper):
            assert radius(sampled, design.law, sensor, m.gain_upper * 0.995) < 1.0 < \
                radius(sampled, design.law, sensor, m.gain_upper * 1.005)


def test_at_the_lean_sensor_is_not_at_the_torque():
    """The twin: the two places give different numbers (the wheel's own feedback stays closed at the sensor)."""
    plant, g = shipped("bench-rig", "line")
    design = design_stance(plant, g)
    at_lean = dict(sensor_margins(design))["lean"]
    assert abs(at_lean.phase - design.margins.phase) > 0.05


def test_whole_samples_of_a_late_sensor_agree_with_the_phase():
    """A sensor late by whole samples: stable just below the reported delay, unstable just above (within one sample)."""
    plant, g = shipped("bench-rig", "line")
    design = design_stance(plant, g)
    law, T = design.law, design.law.sample_time
    sampled = sample_plant(plant, T, law.latency)
    m = dict(sensor_margins(design))["lean_rate"]
    loop = actuator_break(sampled, law)
    N, row, column = len(sampled.A), sampled.C[1], law.measurements.index("lean_rate")

    def late(count):
        """Build the loop with a shift register in the rate's path."""
        size = len(loop.A) + count
        A = np.zeros((size, size))
        closed = loop.closed()
        take = np.concatenate([sampled.B * law.D[column], law.B[:, column] + law.E * law.D[column]])
        A[:len(closed), :len(closed)] = closed - np.outer(take, np.concatenate([row, np.zeros(len(law.memory))]))
        A[:len(closed), -1] += take
        A[len(closed), :N] = row
        for i in range(1, count):
            A[len(closed) + i, len(closed) + i - 1] = 1.0
        return np.abs(np.linalg.eigvals(A)).max()

    whole = int(m.delay / T)
    assert whole >= 2
    assert late(whole - 1) < 1.0 < late(whole + 2)
