"""Numbers as a person reads them."""

from __future__ import annotations

from math import inf, nan, radians

import pytest

from balance.report.amounts import amount, figure, fixed, listed, share, speed

SPACE = "\u00a0"


@pytest.mark.parametrize(("value", "words"), [
    (0.0, "0"), (1.0, "1.00"), (-2.5, "−2.50"), (0.99996, "1.00"), (9.996, "10.0"), (123456.0, "123456"),
    (1.5e-7, f"1.50{SPACE}×{SPACE}10⁻⁷"), (2.0e9, f"2.00{SPACE}×{SPACE}10⁹"), (nan, "not defined"), (inf, "no limit"),
    (-inf, "−∞")])
def test_figures(value, words):
    assert figure(value) == words


@pytest.mark.parametrize(("value", "unit", "words"), [
    (radians(12.0), "rad", "12.0°"), (radians(90.0), "rad/s", f"90.0{SPACE}deg/s"), (0.012, "s", f"12.0{SPACE}ms"),
    (1.2, "s", f"1.20{SPACE}s"), (0.354, "m", f"354{SPACE}mm"), (3.2, "kg*m^2", f"3.20{SPACE}kg·m²"), (0.5, "", "0.500"),
    (inf, "s", "no limit"), (nan, "rad", "not defined")])
def test_amounts_in_the_unit_a_person_reads(value, unit, words):
    assert amount(value, unit) == words


def test_small_differences_from_zero_do_not_shout():
    assert fixed(radians(-0.0004), "rad", 3) == "0°"
    assert fixed(radians(-0.0006), "rad", 3) == "−0.001°"
    assert fixed(5.8e-6, "m", 2) == f"0.01{SPACE}mm"


def test_words():
    assert speed(471.23889803846896) == f"4500{SPACE}rpm"       # 471.2389 rad/s · 60/2π
    assert share(0.316) == f"32{SPACE}%"
    assert [listed(()), listed(("a",)), listed(("a", "b", "c"))] == ["", "a", "a, b and c"]
