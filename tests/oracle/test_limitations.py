"""What delay and saturation allow at best: references 6.08, 7.05, 7.06; analytic PI and PID rules: 8.01, 8.02."""

from __future__ import annotations

import control
import numpy as np
import pytest
from scipy.optimize import brentq, minimize

from balance.design.records import Margins


def rightmost(k_p, k_d, tau, omega=1.0, n=14):
    """Return the largest real part of the roots of s² − ω² + (k_p + k_d s) e^{−sτ}: Chebyshev collocation of the delay line.

    Standard spectral discretisation of a delay system (Breda, Maset, Vermiglio 2005, from memory).
    """
    k = np.arange(n + 1)
    x = np.cos(np.pi * k / n)
    c = np.where((k == 0) | (k == n), 2.0, 1.0) * (-1.0) ** k
    D = np.outer(c, 1 / c) / (x[:, None] - x[None, :] + np.eye(n + 1))
    D -= np.diag(D.sum(axis=1))
    D *= 2.0 / tau
    A = np.kron(D, np.eye(2))
    A[:2] = 0.0
    A[:2, :2] = [[0.0, 1.0], [omega**2, 0.0]]
    A[:2, -2:] += [[0.0, 0.0], [-k_p, -k_d]]
    return np.linalg.eigvals(A).real.max()


def best_rightmost(tau):
    """Return the smallest reachable real part over proportional and derivative gains, ω = 1."""
    found = minimize(lambda g: rightmost(g[0], g[1], tau), [1.02, tau], method="Nelder-Mead",
                     options={"xatol": 1e-9, "fatol": 1e-13, "maxiter": 600})
    return found.fun


def test_largest_delay_of_a_law_without_memory():
    """7.05: PD on a delayed pendulum reaches τ = √2/ω and no further (Stepan; Insperger, Milton, Stepan 2011)."""
    assert best_rightmost(1.41) < 0.0
    assert best_rightmost(1.416) > -1e-7          # the optimum is a multiple root at the origin: never left of it
    omega = 5.8554
    assert 1e3 * np.sqrt(2.0) / omega == pytest.approx(241.523, rel=1e-4)
    assert pytest.approx(0.2943, rel=1e-6) == 3.0 * 9.81 * 0.1**2      # shortest stick a hand balances, τ = 0.1 s


@pytest.mark.parametrize(("phase", "largest"), [(30.0, 0.45486), (45.0, 0.32639), (60.0, 0.2225)])
def test_crossover_inequality(phase, largest):
    """7.06, Åström, "Limitations on control system performance" (0.326 from memory): p τ at crossover slope −1/2."""
    def room(pt):
        w = np.geomspace(1e-2, 1e3, 200_001)       # in units of p
        return np.max(np.pi - np.radians(phase) - np.pi / 4 - w * pt - 2.0 * np.arctan(1.0 / w))

    assert brentq(room, 1e-3, 1.0) == pytest.approx(largest, rel=1e-4)


def describing(ratio):
    """Saturation's describing function at amplitude over limit."""
    return 2.0 / np.pi * (np.arcsin(1.0 / ratio) + np.sqrt(1.0 - 1.0 / ratio**2) / ratio)


def test_describing_function_of_saturation():
    """6.08 (Khalil; Slotine & Li), and the amplitude at which a loop with a low gain limit is lost."""
    assert describing(2.0) == pytest.approx(0.6089978, rel=1e-6)
    assert 1.0 - describing(2.0) == pytest.approx(0.3910022, rel=1e-6)
    library = control.describing_function(control.saturation_nonlinearity(1.0), [2.0])
    assert np.real(library[0]) == pytest.approx(describing(2.0), rel=2e-3)          # by sampling the sine
    for lowest, ratio in ((0.482995, 2.567903), (0.5, 2.475414)):
        assert brentq(lambda r, k=lowest: describing(r) - k, 1.01, 50.0) == pytest.approx(ratio, rel=1e-5)


def margins(L, low, high):
    """Return margins of a continuous loop with dead time, read off its response: no state space holds a dead time."""
    w = np.geomspace(low, high, 400_001)
    value = L(1j * w)
    S, T = 1.0 / np.abs(1.0 + value), np.abs(value / (1.0 + value))
    phase = np.unwrap(np.angle(value))
    at = np.flatnonzero(np.diff(np.signbit(np.log(np.abs(value)))))
    cross = [brentq(lambda x: np.log(abs(L(1j * x))), w[i], w[i + 1]) for i in at]
    pm = min(np.angle(-L(1j * x)) for x in cross)
    delay = min((np.angle(-L(1j * x)) % (2 * np.pi)) / x for x in cross)
    factors = []
    for i in np.flatnonzero(np.diff(np.signbit(value.imag))):
        if value[i].real < 0.0 and abs(phase[i + 1] - phase[i]) < 0.5:
            x = brentq(lambda x: L(1j * x).imag, w[i], w[i + 1])
            factors.append(-1.0 / L(1j * x).real)
    lower = max((k for k in factors if k < 1.0), default=0.0)
    upper = min((k for k in factors if k > 1.0), default=np.inf)
    return Margins(True, lower, upper, pm, cross[0], delay, delay, 1.0 / S.max(), np.nan, S.max(), T.max(), ())


def test_analytic_rules_with_a_dead_time():
    """8.01, S. Skogestad, J. Process Control 13 (2003), margin table (from memory, derived again)."""
    lag = margins(lambda s: 0.5 * np.exp(-s) / s, 1e-3, 20.0)
    assert (lag.gain_upper, np.degrees(lag.phase), lag.delay) == pytest.approx((3.1416, 61.352, 2.1416), rel=1e-4)
    assert lag.peak_sensitivity == pytest.approx(1.5905, rel=2e-4)
    integrating = margins(lambda s: 0.5 * np.exp(-s) * (1 + 1 / (8 * s)) / s, 1e-3, 20.0)
    assert (integrating.gain_upper, np.degrees(integrating.phase)) == pytest.approx((2.9634, 46.864), rel=1e-4)
    assert integrating.delay == pytest.approx(1.5896, rel=1e-4)
    assert (integrating.peak_sensitivity, integrating.peak_complementary) == pytest.approx((1.7035, 1.2994), rel=2e-4)
    double = margins(lambda s: 0.0625 * np.exp(-s) * (1 + 1 / (8 * s)) * (1 + 8 * s) / s**2, 1e-3, 20.0)
    assert (double.gain_lower, double.gain_upper) == pytest.approx((0.165316, 2.760988), rel=1e-4)
    assert np.degrees(double.phase) == pytest.approx(33.1094, rel=1e-4)
    assert (double.peak_sensitivity, double.peak_complementary) == pytest.approx((1.95882, 1.83227), rel=2e-4)


def test_pi_by_poles_and_by_loop_shaping():
    """8.02 (a control library's design test, READ): a negative integral gain is a warning, not a design."""
    w0, zeta = 2.0, 0.7
    kp = 2 * zeta * w0 - 1.0
    Ti = kp / w0**2
    assert (kp, Ti) == pytest.approx((1.8, 0.45), rel=1e-9)
    assert np.roots([1.0, 1.0 + kp, kp / Ti]).real == pytest.approx([-1.4, -1.4], rel=1e-9)
    w = 0.8
    P = 1.0 / (1j * w + 1.0) ** 4
    C = abs(P) * np.exp(1j * (-np.pi + np.radians(60.0))) / P
    assert C.real == pytest.approx(0.822747347, rel=1e-7)
    assert -C.imag * w == pytest.approx(-0.4547258, rel=1e-7)
