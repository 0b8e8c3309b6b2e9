"""The benchmark runs and compares like with like; how fast the machine is fails no test."""

from __future__ import annotations

import pytest

from tests.speed.simulation import measure


def test_both_integrators_tell_the_same_story(record_property) -> None:
    """After 0.4 s of recovery the leans agree to 1e-5 rad: scipy's relative tolerance of 1e-6 over 200 restarts."""
    for line in measure(0.4, 2):
        record_property(line.name, line.scipy / line.ours)
        print(line)
        assert line.end_lean == pytest.approx(line.scipy_lean, abs=1e-5)
        assert line.ours > 0.0
