"""Several loops at once against a published example and an independent library."""

from __future__ import annotations

import control
import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.loop import close, sample_plant
from balance.design.sensors import all_sensors
from balance.maths.structured import structured_bound
from tests.design.machines import shipped


def satellite(frequency):
    """Return S − ½ of the spinning satellite under output feedback, loop broken at both outputs."""
    A, C, K = np.array([[0, 10], [-10, 0]]), np.array([[1, 10], [-10, 1]]), np.array([[1, -2], [0, 1]])
    P = C @ np.linalg.inv(1j * frequency * np.eye(2) - A)
    return np.linalg.inv(np.eye(2) + P @ K) - 0.5 * np.eye(2)


def test_spinning_satellite():
    """6.01, second part: P. Seiler, A. Packard, P. Gahinet, "An introduction to disk margins", IEEE CSM 40(5), 2020.

    Printed 0.3754; the exact structured value is 0.376152 at ω → 0 (the agreement's page: both bounds of μ coincide).
    """
    slow = 1.0 / structured_bound(satellite(1e-6))
    assert slow == pytest.approx(0.376152, rel=1e-5)
    assert 1.0 / structured_bound(satellite(0.1)) == pytest.approx(0.376987, rel=1e-3)
    assert 20 * np.log10((2 + slow) / (2 - slow)) == pytest.approx(3.3, abs=0.05)
    assert np.degrees(2 * np.arctan(slow / 2)) == pytest.approx(21.26, abs=0.05)
    plain = 1.0 / np.linalg.norm(satellite(1e-6), 2)                       # the twin: without scaling it is too small
    assert plain < 0.9 * slow


@pytest.mark.parametrize("size", [2, 3, 4])
def test_random_matrices_against_slycot(size):
    """SLICOT's AB13MD (slycot), another upper bound of μ by another method (Fan, Tits, Doyle)."""
    from slycot import ab13md

    rng = np.random.default_rng(size)
    for _ in range(20):
        M = rng.normal(size=(size, size)) + 1j * rng.normal(size=(size, size))
        bound = ab13md(M, np.ones(size, int), 2 * np.ones(size, int))[0]
        assert structured_bound(M) == pytest.approx(bound, rel=1e-4)
        assert structured_bound(M) >= np.abs(np.linalg.eigvals(M)).max() * (1 - 1e-12)


@pytest.mark.parametrize(("name", "stance"), [
    ("bench-rig", "line"), ("scout-wheels", "on-fore-left"), ("quay-gyros", "on-left-right")])
def test_shipped_loops_against_the_library(name, stance):
    """python-control's disk_margins (σ = 0) on the same sensor loop, over a fine grid: never below ours but for its grid."""
    plant, goal = shipped(name, stance)
    design = design_stance(plant, goal)
    law = design.law
    sampled = sample_plant(plant, law.sample_time, law.latency)
    A, Y = close(sampled, law), sampled.rows(law.measurements)
    # open the loop at all measurements: what the law returns for what it is shown
    m = len(law.measurements)
    B = np.vstack([np.outer(sampled.B, law.D), law.B + np.outer(law.E, law.D)])
    C = np.hstack([Y, np.zeros((m, len(law.memory)))])
    opened = A - B @ C
    loop = control.ss(opened, -B, C, np.zeros((m, m)), law.sample_time)
    w = np.geomspace(1e-3, np.pi / law.sample_time * 0.999, 600)
    theirs = control.disk_margins(loop, w)[0]
    ours = all_sensors(design)
    assert abs(ours / theirs - 1.0) < 0.01
    assert ours <= theirs * (1.0 + 1e-4)
    assert ours < design.margins.disk                                       # all at once bears less than one
