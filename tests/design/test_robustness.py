"""The worst case within the tolerances: never better than stated, worse the wider they are, and true of a built machine."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from balance.design.build import design_stance
from balance.design.loop import sample_plant
from balance.design.margins import margins_of
from balance.design.records import Design, Margins, Robustness
from balance.design.robustness.ranges import ranges_of, told
from balance.design.robustness.screen import JUDGED, screen_of
from balance.design.robustness.worst import deviation, worst_case
from balance.design.sampled_margins import at_actuator
from balance.machine.tolerances import PairMismatch, Tolerances
from tests.design.machines import goal, plant_of, random_goal, random_plant, shipped, wheel_machine

FULL = Tolerances(mass=0.03, height=0.006, offset=0.003, inertia=0.05, torque_constant=0.08, voltage=0.15, bandwidth=0.2,
                  flywheel_momentum=0.03, pair_mismatch=PairMismatch(0.02, 0.02))
SEARCHED = 2e-3
"""Relative: what steps of a hundredth of the range and a screen good to a thousandth may leave of a lowest value."""


def better(name: str, one: float, other: float) -> bool:
    """Tell whether a margin `one` is better than `other` beyond what the search leaves open."""
    if name == "gain_lower":
        return one < other * (1.0 - SEARCHED)
    return one > other * (1.0 + SEARCHED)


@cache
def found(name: str, stance: str, wide: float = 1.0) -> tuple[Design, Robustness]:
    """Return a shipped design and its worst case under `FULL` times `wide`."""
    plant, asked = shipped(name, stance)
    design = design_stance(plant, asked)
    loop = replace(asked.loop, latency_tolerance=wide * 3e-4, jitter=wide * 5e-4)
    tolerances = replace(FULL, **{k: wide * getattr(FULL, k) for k in ("mass", "height", "offset", "inertia",
                                                                      "torque_constant", "voltage", "bandwidth")})
    worst = worst_case(design, ranges_of(plant, tolerances, loop))
    assert worst is not None
    return design, worst


CASES = [("bench-rig-pid", "line"), ("bench-rig-sensed", "line"), ("scout-wheels", "on-fore-left"),
         ("quay-gyros", "on-left-right")]


@pytest.mark.parametrize(("name", "stance"), CASES)
def test_never_better_than_as_stated_and_told_with_its_cause(name: str, stance: str) -> None:
    design, worst = found(name, stance)
    assert worst.stable
    assert [case.margin for case in worst.cases] == list(JUDGED)
    for case in worst.cases:
        assert case.nominal == getattr(design.margins, case.margin)
        assert not better(case.margin, case.value, case.nominal)
        assert case.at, case.margin
        for one in worst.ranges:
            assert one.low <= case.at.get(one.name, 0.0) <= one.high


@pytest.mark.parametrize(("name", "stance"), CASES[:2])
def test_wider_tolerances_are_never_better(name: str, stance: str) -> None:
    narrow, wide = found(name, stance, 0.5)[1], found(name, stance)[1]
    for small, large in zip(narrow.cases, wide.cases, strict=True):
        assert not better(large.margin, large.value, small.value)
        assert better(large.margin, small.value, large.value), "and here worse in earnest"


@pytest.mark.parametrize(("name", "stance"), [CASES[0], CASES[2]])
def test_no_machine_drawn_at_random_within_the_tolerances_is_worse(name: str, stance: str) -> None:
    design, worst = found(name, stance)
    rng = np.random.default_rng(5)
    points = np.clip(rng.uniform(-1.3, 1.3, (300, len(worst.ranges))), -1.0, 1.0)     # many of them on faces and edges
    scores = screen_of(design.plant, design.law).scores([deviation(worst.ranges, x) for x in points])
    for column, case in enumerate(worst.cases):
        counted = {"gain_lower": 1.0 - case.value, "gain_upper": case.value - 1.0}.get(case.margin, case.value)
        assert scores[:, column].min() >= counted * (1.0 - 2.0 * SEARCHED)


def test_the_worst_case_is_that_of_a_machine_built_so() -> None:
    """The same margins from a machine file edited to the worst case, the law held as it was."""
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    worst = worst_case(design, ranges_of(design.plant, Tolerances(height=0.01, torque_constant=0.1), asked.loop))
    disk = worst.cases[JUDGED.index("disk")]
    assert set(disk.at) == {"height", "torque_constant"}
    h = 0.28 + disk.at["height"]
    machine = wheel_machine(height=h, inertia=0.33 + 3.2 * (h**2 - 0.28**2))
    built = replace(plant_of(machine), allotment=design.plant.allotment)
    sampled = sample_plant(built, 0.002, 0.002).with_gain(1.0 + disk.at["torque_constant"])
    assert margins_of(at_actuator(sampled, design.law)).disk == pytest.approx(disk.value, rel=1e-9)   # rounding of a search
    untouched = sample_plant(built, 0.002, 0.002)
    assert margins_of(at_actuator(untouched, design.law)).disk > 1.01 * disk.value, "the twin: a motor as stated"


def test_a_later_command_is_an_added_delay() -> None:
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    worst = worst_case(design, ranges_of(design.plant, None, replace(asked.loop, jitter=0.004)))
    assert [one.name for one in worst.ranges] == ["latency"]
    delay = worst.cases[JUDGED.index("delay")]
    assert delay.at == {"latency": 0.004}
    assert delay.value == pytest.approx(design.margins.delay - 0.004, abs=1e-8)      # s: tolerance of the root


def test_the_screen_ranks_by_the_margins_that_are_reported() -> None:
    """Off the grid of 220 points, on random loops: half a per cent of the margins with refined crossings.

    The upper gain limit lies where few points are (5 %); the delay is phase/ω here and an eigenvalue of the loop sampled
    anew there: they part by a fraction of a sample.
    """
    rng = np.random.default_rng(11)
    tried = 0
    while tried < 12:
        design = design_stance(random_plant(rng), random_goal(rng))
        if not design.margins.stable:
            continue
        tried += 1
        (row,) = screen_of(design.plant, design.law).scores([{}])
        exact = [getattr(design.margins, name) for name in JUDGED]
        exact[JUDGED.index("gain_lower")] = 1.0 - exact[JUDGED.index("gain_lower")]
        exact[JUDGED.index("gain_upper")] -= 1.0
        for name, quick, true in zip(JUDGED, row, exact, strict=True):
            fraction = 0.25 * design.law.sample_time if name == "delay" else 0.0
            assert quick == pytest.approx(true, rel=0.05 if name == "gain_upper" else 5e-3, abs=fraction), name


def test_tolerances_too_wide_for_the_law_are_told_with_the_place() -> None:
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    worst = worst_case(design, ranges_of(design.plant, Tolerances(torque_constant=0.8), asked.loop))
    assert not worst.stable
    for case in worst.cases:
        assert math.isnan(case.value)
        assert case.at["torque_constant"] == pytest.approx(-0.8, abs=1e-12)
    assert told(worst.cases[0].at, worst.ranges) == "torque constant −80\u00a0%"
    # the law bears 0.339 of its torque: 0.8 is too wide, 0.6 is not
    borne = worst_case(design, ranges_of(design.plant, Tolerances(torque_constant=0.6), asked.loop))
    assert design.margins.gain_lower < 0.4
    assert borne.stable


def test_nothing_to_move_or_nothing_to_hold_is_no_worst_case() -> None:
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    assert worst_case(design, ()) is None
    assert ranges_of(design.plant, None, asked.loop) == ()
    assert ranges_of(design.plant, Tolerances(flywheel_momentum=0.1), asked.loop) == (), "no flywheel on this machine"
    some = ranges_of(design.plant, FULL, asked.loop)
    assert worst_case(replace(design, refused="nothing acts"), some) is None
    unstable = Margins(False, *[math.nan] * 10, ())
    assert worst_case(replace(design, margins=unstable), some) is None


def test_a_motor_off_by_a_share_divides_both_gain_limits() -> None:
    """In closed form: the loop gain is times 1 + k, so the factors left are the nominal ones over it; the rest follows."""
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    worst = worst_case(design, ranges_of(design.plant, Tolerances(torque_constant=0.1), asked.loop))
    cases = {case.margin: case for case in worst.cases}
    assert cases["gain_lower"].value == pytest.approx(design.margins.gain_lower / 0.9, rel=1e-8)     # refined crossings
    assert cases["gain_upper"].value == pytest.approx(design.margins.gain_upper / 1.1, rel=1e-8)
    assert cases["gain_lower"].at["torque_constant"] == pytest.approx(-0.1, rel=1e-12)
    assert cases["gain_upper"].at["torque_constant"] == pytest.approx(0.1, rel=1e-12)


def test_mass_moves_no_pole_but_takes_gain() -> None:
    """More of the same mass: stiffness and inertia grow alike, the pole stays, and the same torque does less by 1 + μ.

    The rotor's own inertia (0.7 % of the body's) is scaled with it in J but not in the wheel's row: a part in a thousand.
    """
    asked = goal()
    design = design_stance(plant_of(wheel_machine()), asked)
    worst = worst_case(design, ranges_of(design.plant, Tolerances(mass=0.1), asked.loop))
    assert worst.worst.stiffness / worst.worst.inertia_free == pytest.approx(
        design.plant.stiffness / design.plant.inertia_free, rel=1e-3)
    lower = next(case for case in worst.cases if case.margin == "gain_lower")
    assert lower.at == {"mass": pytest.approx(0.1)}
    assert lower.value > 1.1 * design.margins.gain_lower, "the wheel's own momentum, which mass does not slow, weighs more"
