"""Margins against published examples. Tolerances are the ones the reference values are known to."""

from __future__ import annotations

import control
import numpy as np
import pytest

from balance.design.ideal import continuous_view
from tests.oracle.loops import continuous, held, of, phases, sampled


def test_disk_margin_example():
    """6.01: P. Seiler, A. Packard, P. Gahinet, "An introduction to disk margins", IEEE CSM 40(5), 2020."""
    m = of(continuous([25], [1, 10, 10, 10]))
    assert m.gain_upper == pytest.approx(3.6, rel=1e-5)
    assert np.rad2deg(m.phase) == pytest.approx(29.11, rel=1e-4)
    assert m.phase_crossover == pytest.approx(1.78444, rel=1e-5)
    assert m.delay == pytest.approx(0.284724, rel=1e-5)
    assert m.peak_sensitivity == pytest.approx(2.48666, rel=1e-5)
    assert m.disk == pytest.approx(0.458, abs=6e-4)
    assert (2 + m.disk) / (2 - m.disk) == pytest.approx(1.594, abs=6e-4)
    assert np.rad2deg(2 * np.arctan(m.disk / 2)) == pytest.approx(25.8, abs=0.05)


@pytest.mark.parametrize(("num", "den", "gain", "modulus"), [
    ([1], [1, 2, 3, 4], 2.0, 0.41698), ([-0.01, 0.1], [1, 3, 2], 300.0, None), ([200], [1, 21, 20, 0], 2.1, None)])
def test_gain_margins(num, den, gain, modulus):
    """6.02: python-control tests/margin_test.py and examples (read)."""
    m = of(continuous(num, den))
    assert m.gain_upper == pytest.approx(gain, rel=1e-5)
    if modulus:
        assert m.modulus == pytest.approx(modulus, rel=1e-4)


def test_phase_margins():
    """6.02: 200/(s³+21s²+20s) from python-control; 1/(s(s+1)) from JuliaControl/ControlSystems.jl tests (read)."""
    m = of(continuous([200], [1, 21, 20, 0]))
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((9.3528, 3.0655), rel=1e-4)
    m = of(continuous([1], [1, 1, 0]))
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((51.8273, 0.786151), rel=1e-5)


def test_an_unstable_loop_has_no_margins():
    """6.02: 50/(5s³+10.25s²+6.25s+1) is unstable closed; it becomes stable at the gain factor 0.23625 (read)."""
    assert not of(continuous([50], [5, 10.25, 6.25, 1])).stable
    assert np.isnan(of(continuous([50], [5, 10.25, 6.25, 1])).gain_upper)
    m = of(continuous([50 * 0.2], [5, 10.25, 6.25, 1]))
    assert m.stable
    assert m.gain_upper * 0.2 == pytest.approx(0.23625, rel=1e-4)


def test_many_crossings():
    """6.04 (a): python-control tests/margin_test.py (read)."""
    num = np.array([4, 0.4, 1]) * 8.75
    den = np.polymul(np.polymul([100, 1], [1, 0.22, 1]), [0.01, 0.008, 1])
    m = of(continuous(num, den))
    assert m.gain_upper == pytest.approx(2.2716, rel=1e-4)
    assert [p for _, p in phases(m)] == pytest.approx([97.594, -157.784, 134.7359], rel=1e-4)
    assert m.modulus == pytest.approx(0.55909, rel=2e-4)


def test_conditionally_stable():
    """6.04 (b), (c): python-control tests (read); (c) Y. Bavafa-Toosi, J. Control Syst. Eng. 3(1), 2015."""
    m = of(continuous(np.polymul([1, 0.1], [1, 0.1]), [1, 1, 0, 0, 0]))
    assert m.gain_lower == pytest.approx(0.0625, rel=1e-5)
    assert np.rad2deg(m.phase) == pytest.approx(37.1746, rel=1e-4)
    num = 0.002 * np.poly([-0.02, -0.05, -5, -10])
    den = np.poly([0.0005, -0.0001, -0.01, -0.2, -1, -100, -100])
    assert not of(continuous(num, den)).stable
    m = of(continuous(1000 * num, den))
    assert np.rad2deg(m.phase) == pytest.approx(22.5215, rel=1e-4)
    assert (m.gain_lower, m.gain_upper) == pytest.approx((0.1793, 22.798), rel=1e-3)
    assert np.rad2deg(of(continuous(5000 * num, den)).phase) == pytest.approx(21.2101, rel=1e-4)


@pytest.mark.parametrize(("num", "den", "T", "gain", "phase", "modulus"), [
    ([2], [1, 3, 2, 0], 0.01, 2.955761, 32.398492, 0.429535),
    ([2], [1, 3, 3, 1], 0.1, 3.4927, 65.4212, 0.5763),
    ([1.1 * 4 * np.pi**2], [1, 0.8 * np.pi, 4 * np.pi**2], 0.05, 2.3842, 18.161, 0.2695),
    ([5e4], [1, 101, 10101, 10100, 10000], 1e-3, 18.8766, 26.3564, 0.4068)])
def test_sampled_loops(num, den, T, gain, phase, modulus):
    """6.05: zero-order-hold sampled loops, python-control tests/margin_test.py (read)."""
    m = of(sampled(num, den, T))
    assert m.gain_upper == pytest.approx(gain, rel=1e-4)
    assert np.rad2deg(m.phase) == pytest.approx(phase, rel=1e-5)
    assert m.modulus == pytest.approx(modulus, rel=5e-4)


def test_both_gain_limits_of_an_unstable_plant():
    """6.06: JuliaControl/ControlSystems.jl test_analysis, issue 1045 (read); the low limit stands at DC."""
    A = np.array([[-1.42119805189796, 1, 1.42119805189796, 0],
                  [-1.5105265612217906, -1.4146551592967844, 1.009901951359278, 0], [0, 0, 0, 1], [0, 0, 0.5, 0]])
    m = of(continuous_view(A, np.array([0, 0, 0, 0.1]), np.array([10.006246098625127, 14.146551592967842, 0, 0])))
    assert m.gain_lower == pytest.approx(0.873365, rel=1e-5)
    assert m.gain_upper == pytest.approx(2.00525, rel=1e-4)     # stored to 1e-3
    assert np.rad2deg(m.phase) == pytest.approx(10.6004, rel=1e-4)


@pytest.mark.parametrize(("Ms", "upper", "lower", "phase"), [
    (1.2, 6, 0.545455, 49.2486), (1.4, 3.5, 0.583333, 41.8497), (1.6, 2.66667, 0.615385, 36.4199),
    (2.0, 2, 0.666667, 28.955)])
def test_bounds_from_the_sensitivity_peak(Ms, upper, lower, phase):
    """6.07: GM ≥ Ms/(Ms−1), low gain ≤ Ms/(Ms+1), PM ≥ 2 asin(1/(2 Ms)): Åström & Hägglund (from memory).

    Each of the loops above must keep to the bound of its own Ms; the table's numbers are the bound's.
    """
    assert (Ms / (Ms - 1), Ms / (Ms + 1)) == pytest.approx((upper, lower), rel=1e-5)
    assert np.rad2deg(2 * np.arcsin(0.5 / Ms)) == pytest.approx(phase, rel=1e-5)
    k = Ms * 0.9
    m = of(continuous([k], [1, 2, 3, 4]))
    own = m.peak_sensitivity
    assert m.gain_upper >= own / (own - 1) * (1 - 1e-9)
    assert m.phase >= 2 * np.arcsin(0.5 / own) * (1 - 1e-9)


def _magnetic_levitation(gain):
    kT, v0, mass, km, c, g = 613.65, -16.18, 0.2, 3.13e-3 * 0.2 / 2, 1.0, 9.81
    z0 = -v0 / kT
    u0 = np.sqrt(g * z0**2 * mass / km)
    A = np.array([[0, 1], [2 * (km / mass) * u0**2 / z0**3, -c]])
    plant = control.ss(A, [[0], [-2 * (km / mass) * u0 / z0**2]], [[kT, 0]], 0)
    law = control.tf2ss(control.tf([-0.5 * gain * 0.024, -0.5 * gain], [0.002, 1]))
    loop = plant * law
    return z0, u0, A, loop


@pytest.mark.parametrize(("gain", "Ms", "lower"), [(1, 1.18294, 0.25804), (5, 1.4317, 0.051608), (20, 2.13995, 0.012902)])
def test_magnetic_levitation(gain, Ms, lower):
    """7.01: R.M. Murray, CDS 110 (2024) lecture notebook L8a (parameters read); ∫ln|S|dω = π p whatever the gain."""
    z0, u0, A, loop = _magnetic_levitation(gain)
    assert (z0, u0) == pytest.approx((0.0263668, 2.087541), rel=1e-5)
    assert np.sort(np.linalg.eigvals(A)) == pytest.approx([-27.78309, 26.78309], rel=1e-6)
    view = continuous_view(np.asarray(loop.A), np.asarray(loop.B)[:, 0], np.asarray(loop.C)[0])
    m = of(view)
    assert m.peak_sensitivity == pytest.approx(Ms, rel=1e-4)
    assert m.gain_lower == pytest.approx(lower, rel=1e-4)
    w = np.concatenate([[0.0], np.geomspace(1e-3, 1e7, 400_000)])
    area = np.trapezoid(-np.log(np.abs(1 + view.response(w))), w)
    assert area == pytest.approx(84.14156, rel=2e-3)              # the tail beyond 1e7 rad/s and the grid


def test_unstable_pole_and_delay():
    """7.03: |T|max ≥ e^{pτ}: G. Stein, "Respect the unstable" (from memory); a sampled, delayed loop must obey it."""
    assert [np.exp(x) for x in (5.6 * 0.02, 5.6 * 0.05, 10 * 0.05)] == pytest.approx([1.118513, 1.32313, 1.648721], rel=1e-6)
    p, tau = 5.6, 0.05
    A, b = np.array([[0, 1], [p * p, 0]]), np.array([0.0, 1.0])
    k = np.array([2.2 * p * p, 2.4 * p])
    view = held(A, b, k, 0.001)
    extra = view.growth(1.0, tau)
    assert extra < 0                                             # still stable with 50 ms of delay
    m = of(view)
    assert m.delay > tau
    assert m.peak_complementary > 1.0


def test_pid_pole_placement_on_a_pendulum():
    """8.03: (s² + 8.4 s + 36)(s + 2) on θ̈ = 20 θ + u: standard pole placement (derived)."""
    kp, ki, kd = 72.8, 72.0, 10.4
    assert np.polymul([1, 8.4, 36], [1, 2]) == pytest.approx([1, kd, kp - 20, ki])
    m = of(continuous([kd, kp, ki], [1, 0, -20, 0]))
    assert m.gain_lower == pytest.approx(0.369822, rel=1e-5)
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((53.3681, 10.10001), rel=1e-5)
    assert m.delay == pytest.approx(92.2226e-3, rel=1e-4)
    assert (m.peak_sensitivity, m.peak_complementary) == pytest.approx((1.121457, 1.763971), rel=1e-4)


def test_polynomial_margins_are_wrong_for_fast_sampling():
    """Trap 1: on a 2 ms reaction-wheel loop the library's polynomial margins miss; eigenvalues side with ours."""
    from tests.oracle.wheels import two_millisecond_loop
    A, b, k, T = two_millisecond_loop()
    loop = held(A, b, k, T)
    m = of(loop)
    for factor, stable in ((m.gain_lower * 1.005, True), (m.gain_lower * 0.995, False)):
        assert (loop.growth(factor, 0.0) < 0) is stable
    from scipy.signal import cont2discrete
    Ad, Bd, *_ = cont2discrete((A, b[:, None], np.eye(3), np.zeros((3, 1))), T)
    gm, pm, *_ = control.stability_margins(control.ss(Ad, Bd, k[None], 0, T))[:2]
    assert abs(pm - np.rad2deg(m.phase)) > 5.0 or abs(gm - m.gain_lower) > 0.1
