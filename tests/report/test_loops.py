"""The loop as drawn: phase on the right sheet, turns counted on loops whose count is known in closed form."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.design.loop import BrokenLoop
from balance.report.loops import count_turns, phase_degrees, picture_loop

T = 0.002


def counted(A: list[list[float]], b: list[float], c: list[float]):
    broken = BrokenLoop(np.array(A), np.array(b), np.array(c), T)
    w = np.geomspace(1.0, np.pi / T, 2000)
    return count_turns(broken, 1e-5, w, broken.response(w))


@pytest.mark.parametrize(("gain", "turns"), [(0.5, 0), (2.0, 1)])
def test_one_unstable_pole(gain, turns):
    """L = k (a − 1)/(z − a), a > 1: closed pole a − k(a − 1), inside the circle for 1 < k < (a + 1)/(a − 1)."""
    a = 1.01
    count = counted([[a]], [1.0], [gain * (a - 1.0)])
    assert (count.needed, count.found, count.sure) == (1, turns, True)
    assert (abs(a - gain * (a - 1.0)) < 1.0) is (count.found == count.needed)


@pytest.mark.parametrize(("gain", "turns"), [(0.1, 0), (1.9, 0), (2.1, -1)])
def test_an_integrator_is_passed_on_the_outside(gain, turns):
    """L = k/(z − 1): closed pole 1 − k, stable for 0 < k < 2; beyond, one pole outside turns once clockwise."""
    count = counted([[1.0]], [1.0], [gain])
    assert (count.needed, count.found, count.sure) == (0, turns, True)


def test_two_integrators_and_an_unstable_pole():
    """L = k (z − b)(z − d)/((z − 1)² (z − a)): found − needed is minus the number of closed poles outside."""
    a, zeros = 1.02, np.poly([0.99, 0.98])
    for gain in (0.001, 0.2):
        A = np.array([[1.0, 1.0, 0.0], [0.0, 1.0, 1.0], [0.0, 0.0, a]])
        top = gain * zeros
        # c from the numerator: c (zI − A)⁻¹ b with b = e₃ is (c₁ + c₂ (z − 1) + c₃ (z − 1)²)/((z − 1)² (z − a))
        c = np.array([np.polyval(top, 1.0), np.polyval(np.polyder(top), 1.0), top[0]])
        count = counted(A.tolist(), [0.0, 0.0, 1.0], c.tolist())
        outside = int(np.sum(np.abs(np.roots(np.polyadd(np.poly([1.0, 1.0, a]), top))) > 1.0))
        assert count.sure
        assert count.needed - count.found == outside


def test_phase_is_drawn_next_to_minus_180_where_the_gain_is_one(answered):
    picture = picture_loop(answered("bench-rig", "line").designs[0])
    (crossing, *_) = picture.phase_crossings
    here = np.interp(np.log(crossing.frequency), np.log(picture.frequency), picture.phase)
    assert here + 180.0 == pytest.approx(np.degrees(crossing.value), abs=0.1)      # grid of 1200 points, linear between
    turned = phase_degrees(picture.loop * np.exp(1e-9j), picture.magnitude)
    assert np.allclose(turned, picture.phase, atol=1e-6)


def test_refused_designs_have_no_loop(answered):
    assert picture_loop(replace(answered("bench-rig", "line").designs[0], refused="nothing acts")) is None
