"""The benchmark runs and its kernels agree; how fast the machine is fails no test."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.kernel import layout
from tests.speed.lanes import by_c, by_lanes, by_scipy, case, ratios

SAME = 1e-10
"""Same steps, sums rounded in another order (measured: 2e-13 in 0.3 s)."""


@pytest.mark.parametrize("noisy", [False, True])
def test_the_c_kernel_does_the_same_work(noisy) -> None:
    """End leans and peaks of 128 trials, noise included; one tenth of a percent of inertia is told apart.

    Time at a limit is not compared: C leaves out the law's own.
    """
    given = case(128, 0.3, noisy)
    ours, (states, out) = by_lanes(given), by_c(given)
    np.testing.assert_allclose(ours.end_lean, states[0], rtol=0.0, atol=SAME)
    out[4] = np.maximum(out[4], np.abs(ours.end_momentum))   # the C kernel looks at the beginnings of steps only
    for name, row in (("peak_lean_rate", 2), ("peak_torque", 3), ("peak_momentum", 4), ("peak_current", 5)):
        np.testing.assert_allclose(getattr(ours, name), out[row], rtol=SAME, atol=SAME, err_msg=name)
    assert np.all(out[0] == 1.0)
    bodies = given.batch.bodies.copy()
    bodies[:, layout.INERTIA] *= 1.001
    assert np.all(np.abs(by_lanes(replace(given, batch=replace(given.batch, bodies=bodies))).end_lean - states[0]) > SAME)


def test_scipy_tells_the_same_story() -> None:
    """The lean after 0.3 s, to 1e-5 rad: scipy's relative tolerance of 1e-6 over 150 restarts."""
    given = case(64, 0.3, False)
    assert by_lanes(given).end_lean[5] == pytest.approx(by_scipy(given, 5), abs=1e-5)


def test_the_ratios_can_be_measured(record_property) -> None:
    """Every ratio comes out; they are recorded, not judged."""
    for word, ratio in ratios(64, 0.05, 1).items():
        record_property(word, ratio)
        assert np.isfinite(ratio), word
