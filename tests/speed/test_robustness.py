"""The benchmark runs and compares like with like; how fast the machine is fails no test."""

from __future__ import annotations

from tests.speed.robustness import measure


def test_screened_and_exact_are_the_same_loops(record_property) -> None:
    """The disk margin off the grid of 220 points is within a thousandth of the refined one (parabola at the peak)."""
    for line in measure(4):
        record_property(line.name, line.exact / line.screened)
        print(line)
        assert 0.0 < line.apart < 1e-3
        assert line.screened > 0.0
