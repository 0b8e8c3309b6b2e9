"""Closed forms of what no controller can beat against quadrature of the same manoeuvre, and against each other."""

from __future__ import annotations

from math import cos, exp, inf

import numpy as np
import pytest

from balance.plant import limits

J, P = 0.35, 5.8
QUADRATURE = 1e-6
"""Relative: `any_law` promises this where T(s) has a kink inside a panel."""


def by_sum(torque, until):
    return limits.any_law(torque, until, J, P)


def test_constant_torque_to_a_momentum():
    T, q = 0.8, 0.2
    closed = limits.torque_and_momentum(T, q, J * P**2, P)
    assert closed == pytest.approx(by_sum(lambda _: T, q / T), rel=1e-12)
    assert closed < min(limits.torque_only(T, J * P**2), limits.impulsive(q, J, P))
    assert limits.torque_and_momentum(T, 1e3, J * P**2, P) == pytest.approx(limits.torque_only(T, J * P**2), rel=1e-12)
    assert limits.torque_and_momentum(1e6, q, J * P**2, P) == pytest.approx(limits.impulsive(q, J, P), rel=1e-5)
    assert limits.torque_and_momentum(0.0, q, J * P**2, P) == 0.0


def test_torque_along_a_motor_line():
    """T = T₀ − (T₀/q₀) q and q̇ = T: T₀ e^{−s T₀/q₀}."""
    T0, q0 = 0.8, 0.4
    assert limits.falling_line(T0, q0, J, P) == pytest.approx(by_sum(lambda s: T0 * exp(-s * T0 / q0), inf), rel=1e-9)
    assert limits.falling_line(T0, q0, J, P) < limits.torque_only(T0, J * P**2)


@pytest.mark.parametrize(("corner", "decay", "end"), [(0.2, 0.3, 0.5), (0.2, 0.3, inf), (0.2, 0.3, 0.1), (0.0, 0.3, inf),
                                                      (inf, 0.3, 0.4)])
def test_wheel_with_a_corner(corner, decay, end):
    torque = lambda s: 0.8 if s <= corner else 0.8 * exp(-(s - corner) / decay)             # noqa: E731
    closed = limits.wheel_discounted(0.8, corner, decay, end, P) / (J * P)
    assert closed == pytest.approx(by_sum(torque, end), rel=QUADRATURE)
    assert limits.wheel_discounted(0.0, corner, decay, end, P) == 0.0


@pytest.mark.parametrize("stop", [0.3, 1.0, 1.5])
def test_gimbal_to_its_stop(stop):
    h, rate = 1.3, 4.0
    closed = limits.gimbal_discounted(h, rate, stop, P) / (J * P)
    assert closed == pytest.approx(by_sum(lambda s: h * rate * cos(rate * s), stop / rate), rel=1e-9)
    # a very fast gimbal gives the whole of what it stores at once
    assert limits.gimbal_discounted(h, 1e7, stop, P) == pytest.approx(h * np.sin(stop), rel=1e-5)


def test_latency_and_words():
    assert limits.late(1.0, P, 0.0) == 1.0
    assert limits.late(1.0, P, 0.02) == pytest.approx(exp(-P * 0.02), rel=1e-12)
    assert limits.limited_by(0.09, 0.1, 1.0, False) == "torque"
    assert limits.limited_by(0.09, 1.0, 0.1, False) == "momentum"
    assert limits.limited_by(0.09, 0.1, 1.0, True) == "gimbal rate"
    assert limits.limited_by(0.09, 1.0, 0.1, True) == "gimbal angle"
