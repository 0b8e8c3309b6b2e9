"""Rotor checks of a candidate, against hand arithmetic and their twins."""

from dataclasses import replace
from math import inf, pi

import pytest

from balance.api.load import load
from balance.maths.unbalance import aliased
from balance.size.parts import read_parts
from balance.size.question import question
from balance.size.rotor import dropped, rotor_check, windage
from balance.size.search import survey


@pytest.fixture(scope="module")
def asked():
    job = load("designs/bench-rig.yaml")
    return question(job.machine, job.goal, job.stances, read_parts(job.goal))


@pytest.fixture(scope="module")
def wheel(asked):
    one = survey(asked, "reaction wheel")
    return replace(one.grid.take(int(one.enough[0])), shape="disc", hollow=0.0, diameter=0.1, length=0.01, material="steel",
                   motor="hub-340", ratio=1.0, speed=300.0)


def test_numbers_of_a_steel_disc(asked, wheel):
    found = rotor_check(asked, wheel, 0.2, 1.0)
    mass = 7850 * pi * 0.05**2 * 0.01
    spin = 0.5 * mass * 0.05**2
    assert found.energy == pytest.approx(0.5 * spin * 300**2, rel=1e-9)
    # annulus with a bore of 8 %: (3+ν)/4 ρω²(R² + (1−ν)/(3+ν) r²), Timoshenko & Goodier (from memory)
    peak = 3.29 / 4 * 7850 * 360**2 * (0.05**2 + 0.71 / 3.29 * 0.004**2)
    assert found.stress == pytest.approx(peak, rel=1e-9)
    assert found.strength_safety == pytest.approx(340e6 / peak, rel=1e-9)
    assert found.unbalance == pytest.approx(6.3e-3 / 300 * mass, rel=1e-9)
    assert found.shaking == pytest.approx(mass * 6.3e-3 * 300, rel=1e-9)
    assert found.burst_speed < found.burst_ductile                # the peak reaches the strength before the mean does
    inertia = spin + asked.parts.motors["hub-340"].rotor_inertia
    assert found.spin_up == pytest.approx(inertia * 0.98 * 300 / (0.060 * 30), rel=0.1)   # the motor's line adds a little
    assert found.runtime == inf
    assert dropped(9.80665) == 1.0


def test_faster_is_worse(asked, wheel):
    slow, fast = rotor_check(asked, wheel, 0.2, 1.0), rotor_check(asked, replace(wheel, speed=360.0), 0.2, 1.0)
    assert fast.strength_safety < slow.strength_safety
    assert fast.windage > slow.windage
    assert fast.spin_up > slow.spin_up
    assert rotor_check(asked, wheel, 0.4, 1.0).winding_rise > 3.9 * slow.winding_rise      # with the square of the torque


def test_crossing_of_the_flexible_mode(asked, wheel):
    assert rotor_check(asked, wheel, 0.2, 1.0, mode=120.0).crossing == 120.0
    assert rotor_check(asked, wheel, 0.2, 1.0, mode=400.0).crossing == inf               # the wheel never turns so fast


def test_runtime_needs_a_battery(asked, wheel):
    sizing = replace(asked.sizing, battery=5.0 * 3600)
    found = rotor_check(replace(asked, sizing=sizing), wheel, 0.2, 1.0)
    assert found.runtime == pytest.approx(5 * 3600 * 24 / ((0.2 / 0.060) ** 2 * 0.15), rel=1e-9)


def test_aliasing():
    assert aliased(2 * pi * 480, 500) == pytest.approx(20)
    assert aliased(2 * pi * 120, 500) == pytest.approx(120)
    assert aliased(2 * pi * 500, 500) == pytest.approx(0, abs=1e-9)


def test_windage_grows_with_speed_and_size():
    # laminar below Re 3e5: M = 3.87/√Re ρω²R⁵/2, so power grows with ω^2.5 and R^4
    assert windage(0.1, 200) / windage(0.1, 100) == pytest.approx(2**2.5, rel=1e-9)
    assert windage(0.1, 100) / windage(0.05, 100) == pytest.approx(2**4, rel=1e-9)
    assert windage(0.3, 0.0) == 0.0
