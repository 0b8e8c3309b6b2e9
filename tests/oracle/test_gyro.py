"""Gyroscopes: stabilisation, sleeping top, textbook couples, single against pair (references 3.01, 3.03, 3.04, 3.07)."""

from __future__ import annotations

from math import pi, radians, sin, sqrt

import numpy as np
import pytest
from scipy.optimize import brentq

from balance.base.units import to_si
from balance.kernel import layout as at
from balance.kernel.equations import derivative, gimbal_terms
from balance.kernel.gauge import line_momentum
from balance.plant.linear import linear_model


def gyro(I1, c1, k1, I2, c2, k2, H):
    """Return the kernel's arrays of I1 q1″ + c1 q1′ − k1 q1 + H q2′ = 0, I2 q2″ + c2 q2′ − k2 q2 − H q1′ = 0.

    q1 is the lean of a body of stiffness k1, q2 the angle of a single gimballed flywheel with a spring of −k2.
    """
    body, unit = np.zeros(at.BODY_SIZE), np.zeros((1, at.UNIT_SIZE))
    body[at.INERTIA], body[at.BODY_DRAG], body[at.STIFF_SIN] = I1, c1, k1
    unit[0, at.KIND], unit[0, at.COUNT], unit[0, at.E_GXS0], unit[0, at.MOMENTUM] = at.GIMBAL_TORQUE, 1, 1.0, H
    unit[0, at.GIMBAL_INERTIA], unit[0, at.GIMBAL_DAMPING], unit[0, at.GIMBAL_SPRING] = I2, c2, -k2
    return body, unit


def poles(body, unit):
    """Return the eigenvalues of the closed-form linear model, which must be those of the kernel's Jacobian."""
    A = linear_model(body, unit, ("gyro",), float(body[at.STIFF_SIN]), float(body[at.INERTIA])).A
    J, step = np.zeros((4, 4)), 1e-6
    for j in range(4):
        ends = []
        for side in (step, -step):
            X, out = np.zeros(4), np.zeros(4)
            X[j] = side
            derivative(X, np.zeros(1), 0.0, body, unit, out)
            ends.append(out)
        J[:, j] = (ends[0] - ends[1]) / (2 * step)
    assert pytest.approx(J, rel=1e-8, abs=1e-8 * np.abs(A).max()) == A
    return np.linalg.eigvals(A)


def test_two_unstable_modes():
    """3.01: Thomson & Tait, Chetaev (theorem from memory, re-derived; eigenvalues computed)."""
    I1, k1, I2, k2 = 2.0, 30.0, 0.02, 0.5
    growth = lambda H: poles(*gyro(I1, 0, k1, I2, 0, k2, H)).real.max()               # noqa: E731
    critical = sqrt(I1 * k2) + sqrt(I2 * k1)
    assert critical == pytest.approx(1.7745967, rel=1e-7)
    # near the limit growth rises as √(H_crit − H): 1e-3 of it stands at a few millionths
    assert brentq(lambda H: growth(H) - 1e-3, 1.7, critical + 1e-3, xtol=1e-12) == pytest.approx(critical, rel=1e-5)
    p = poles(*gyro(I1, 0, k1, I2, 0, k2, 1.70))
    fast = p[np.argmax(p.real)]
    assert (fast.real, abs(fast.imag)) == pytest.approx((1.27278, 4.21248), rel=1e-5)
    for H, low, high, tolerance in ((1.78, 4.06771, 4.76065, 1e-5), (2.5, 1.822268, 10.626822, 1e-6)):
        p = poles(*gyro(I1, 0, k1, I2, 0, k2, H))
        assert np.abs(p.real).max() == pytest.approx(0.0, abs=1e-6)
        assert np.sort(np.abs(p.imag))[[0, 2]] == pytest.approx([low, high], rel=tolerance)


@pytest.mark.parametrize(("c1", "c2", "k2", "H", "growth"), [
    (0.0, 0.01, 0.5, 2.5, 0.0417635),        # damping the gimbal destabilises
    (0.0, 0.0, -0.5, 50.0, 0.0774535),       # one unstable mode is never stabilised
    (0.05, -0.01, 0.5, 2.5, 0.27604)])
def test_what_defeats_it(c1, c2, k2, H, growth):
    """3.01: derived."""
    assert poles(*gyro(2.0, c1, 30.0, 0.02, c2, k2, H)).real.max() == pytest.approx(growth, rel=1e-4)


@pytest.mark.parametrize("H", [0.5, 5.0, 50.0, 500.0])
def test_an_odd_number_of_unstable_modes_keeps_a_real_positive_root(H):
    """3.01's note: the parity rule."""
    p = poles(*gyro(2.0, 0.0, 30.0, 0.02, 0.0, -0.5, H))
    real = p[np.abs(p.imag) < 1e-9 * np.abs(p).max()].real
    assert real.max() > 0.0


def test_sleeping_top():
    """3.03: (I3 ω)² > 4 m g l I1 (formula read); as a body and a gimbal of the same inertia and the same negative spring."""
    I1, I3, weight = 0.8e-3, 0.5e-3, 0.4 * 9.81 * 0.05
    growth = lambda w: poles(*gyro(I1, 0, weight, I1, 0, weight, I3 * w)).real.max()    # noqa: E731
    assert growth(50.2) == pytest.approx(0.0, abs=1e-6)
    assert growth(50.0) > 0.1
    # growth rises as the square root of what is missing: 1e-2 1/s stands within 1e-6 of the limit
    speed = brentq(lambda w: growth(w) - 1e-2, 50.0, 50.2, xtol=1e-10)
    assert speed == pytest.approx(50.11347, rel=1e-6)
    assert speed * 30 / pi == pytest.approx(478.548, rel=1e-5)


def couple(inertia, rpm, rate):
    """Return H γ̇ in N·m as the kernel has it: a flywheel turned at `rate` while its axis is square to the line."""
    _, units = gyro(1.0, 0.0, 0.0, 1.0, 0.0, 0.0, inertia * rpm * pi / 30)
    return -gimbal_terms(0, 0.0, rate, 0.0, units)[1]


def test_textbook_couples():
    """3.04: Khurmi & Gupta, ch. 14; Bevan, ch. 2 (worked examples, read)."""
    pitching = lambda degrees_, period: radians(degrees_) * 2 * pi / period             # noqa: E731
    disc = 5 * 0.15**2 / 2
    assert 5 * 9.81 * 0.6 / couple(disc, 300, 1.0) == pytest.approx(16.7, abs=0.06)                           # 14.1
    assert couple(400 * 0.3**2, 2400, 200 / 3.6 / 50) / 1e3 == pytest.approx(10.05, rel=1e-3)                  # 14.3
    assert couple(750 * 0.25**2, 1500, 1.0) / 1e3 == pytest.approx(7.363, rel=1e-3)                            # 14.5
    assert couple(3500 * 0.45**2, 3000, 0.1) / 1e3 == pytest.approx(22.27, rel=1e-3)                           # 14.6
    assert couple(3500 * 0.45**2, 3000, pitching(6, 40)) / 1e3 == pytest.approx(3.66, rel=2e-3)                # 14.6
    assert couple(20e3 * 0.6**2, 2000, pitching(6, 30)) / 1e3 == pytest.approx(33.073, rel=1e-3)               # 14.7
    assert pitching(6, 30) * 2 * pi / 30 == pytest.approx(0.0046, abs=5e-5)                                   # 14.7
    wheels = couple(180.0, 95 / 3.6 / 0.9 * 30 / pi, 0.003 * 2 * pi / 0.1 / 1.5)
    assert (wheels, wheels / 1.5) == pytest.approx((663.2, 442.0), rel=1e-3)                                  # 14.14
    lb_ft2, lbf_ft = to_si("1 lb*ft^2", "inertia"), to_si("1 lbf*ft", "torque")
    # Bevan takes g = 32.2 ft/s², half a thousandth more than the standard one
    assert couple(40 * lb_ft2, 500, 2 * pi / 5) / lbf_ft == pytest.approx(81.74, rel=1e-3)


def test_disc_askew_on_its_shaft():
    """3.04, 14.17: dL/dt of a disc turning about a fixed shaft; its 2° of wobble are 1° to either side."""
    spin, across, speed = 30 * 0.3**2 / 2, 30 * 0.3**2 / 4, 1200 * pi / 30
    turned = lambda tilt: spin * np.outer(n := np.array([sin(tilt), 0, np.cos(tilt)]), n) + across * (   # noqa: E731
        np.eye(3) - np.outer(n, n))
    omega = np.array([0.0, 0.0, speed])
    bearing = [np.linalg.norm(np.cross(omega, turned(radians(t)) @ omega)) for t in (1.0, 2.0)]
    assert bearing[0] == pytest.approx(186.0, rel=1e-3)
    assert bearing[1] > 1.9 * bearing[0]


def test_single_and_pair():
    """3.07: definition, e.g. Wie (from memory).  Useful: about the line; parasitic: about up, where e·s₀ is 1."""
    H, angle, rate = 2.0, radians(30.0), 3.0
    _, units = gyro(1.0, 0.0, 0.0, 1.0, 0.0, 0.0, H)
    about_up = units.copy()
    about_up[0, at.E_S0], about_up[0, at.E_GXS0] = 1.0, 0.0
    useful = lambda u: -gimbal_terms(0, angle, rate, 0.0, u)[1]                         # noqa: E731
    assert useful(units) == pytest.approx(5.19615, rel=1e-5)
    assert abs(useful(about_up)) == pytest.approx(3.0, rel=1e-6)
    units[0, at.COUNT] = about_up[0, at.COUNT] = 2
    assert useful(units) == pytest.approx(10.3923, rel=1e-5)
    assert useful(about_up) == pytest.approx(0.0, abs=1e-12)
    assert line_momentum.py_func(np.array([0.0, 0.0, pi / 3, 0.0]), units) == pytest.approx(3.4641, rel=1e-5)
