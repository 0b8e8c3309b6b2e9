"""The benchmark itself runs and its figures mean what they say; how fast the machine is fails no test."""

from __future__ import annotations

import pytest

from tests.speed.startup import Timed, measure, one_run


def test_the_benchmark_prints_a_line_for_every_command(record_property) -> None:
    lines = measure(1)
    for line in lines:
        record_property(line.name, line.seconds / line.bare)
        print(line)
    assert [line.name.split(",")[-1].strip() for line in lines[2:]] == ["first use", "second use", "warm"]
    assert all(line.seconds > 0 for line in lines)
    first, second = lines[2:4]
    assert first.seconds > 2.0 * second.seconds, "the first use found compiled code, or the second did not"


def test_a_command_that_fails_is_no_benchmark() -> None:
    with pytest.raises(Exception, match="returned non-zero exit status 2"):
        one_run(("-m", "balance", "chekc"))


def test_a_missed_target_is_said() -> None:
    assert "MISSED" in str(Timed("x", 0.3, 0.02, 0.25))
    assert "met" in str(Timed("x", 0.2, 0.02, 0.25))
