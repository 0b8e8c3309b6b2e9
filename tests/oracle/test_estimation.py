"""Published and derived numbers of estimation and noise: references 5.05, 5.06, 5.08, 13.01, 13.02, 13.03."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import solve_continuous_are, solve_discrete_are

from balance.design.noise import (
    BIAS_INSTABILITY,
    allan_crossing,
    allan_deviation,
    allan_model,
    in_band,
    per_sample,
    random_walk,
    sampled_noise,
    stationary_covariance,
)


def filter_gain(F, H, Q, R):
    """The filter's gain from the Riccati equation, as `design.kalman` takes it."""
    P = solve_discrete_are(F.T, H.T, Q, R)
    return P @ H.T @ np.linalg.inv(H @ P @ H.T + R)


@pytest.mark.parametrize(("index", "alpha", "beta"), [
    (0.01, 0.131851, 0.00931745), (0.1, 0.36, 0.08), (1.0, 0.75, 0.5), (10.0, 0.978714, 1.45898)])
def test_tracking_index(index, alpha, beta):
    """5.05, Kalata, IEEE Trans. AES 1984 (formula from memory, re-derived): closed form against the Riccati equation."""
    r = (4 + index - np.sqrt(8 * index + index**2)) / 4
    closed = 1 - r**2, 2 * (2 - (1 - r**2)) - 4 * np.sqrt(1 - (1 - r**2))
    assert closed == pytest.approx((alpha, beta), rel=1e-5)
    F, H = np.array([[1.0, 1.0], [0.0, 1.0]]), np.array([[1.0, 0.0]])
    push = np.array([[0.5], [1.0]])
    K = filter_gain(F, H, index**2 * push @ push.T, np.eye(1))
    assert K.ravel() == pytest.approx((alpha, beta), rel=1e-5)


def test_scalar_random_walk():
    """5.05: q = r = 1, the golden section."""
    one = np.eye(1)
    assert filter_gain(one, one, one, one)[0, 0] == pytest.approx(0.618034, rel=1e-6)


def test_stationary_covariance():
    """5.06, closed forms (Åström & Murray for the first order): sampled exactly, then the discrete Lyapunov equation."""
    transition, W = sampled_noise(np.array([[-1.0]]), np.array([[0.1]]), 0.01)
    assert stationary_covariance(transition, W)[0, 0] == pytest.approx(0.05, rel=1e-9)
    zeta, omega, q = 0.2, 3.0, 2.0
    A = np.array([[0.0, 1.0], [-omega**2, -2 * zeta * omega]])
    transition, W = sampled_noise(A, np.diag([0.0, q]), 0.01)
    X = stationary_covariance(transition, W)
    assert X[0, 0] == pytest.approx(0.0925926, rel=1e-6)
    assert X[1, 1] == pytest.approx(0.8333333, rel=1e-6)


def gain_interval(F, L):
    """Return the factors at the plant input between which Doyle's loop is stable, by eigenvalues."""
    A, B, C = np.array([[1.0, 1.0], [0.0, 1.0]]), np.array([[0.0], [1.0]]), np.array([[1.0, 0.0]])

    def stable(m):
        return np.linalg.eigvals(np.block([[A, -m * B @ F], [L @ C, A - B @ F - L @ C]])).real.max() < 0.0

    edges = []
    for far in (0.5, 1.5):
        good, bad = 1.0, far
        for _ in range(60):
            middle = 0.5 * (good + bad)
            good, bad = (middle, bad) if stable(middle) else (good, middle)
        edges.append(good)
    return edges


@pytest.mark.parametrize(("q", "gain", "low", "high"), [(60.0, 10.0, 0.929746, 1.01), (1.0, 4.236068, 0.920844, 1.055728)])
def test_an_estimator_has_no_guaranteed_margins(q, gain, low, high):
    """5.08, J.C. Doyle, IEEE TAC 23 (1978) (example from memory, upper bound re-derived); trap 6."""
    A, B, C, ones = np.array([[1.0, 1.0], [0.0, 1.0]]), np.array([[0.0], [1.0]]), np.array([[1.0, 0.0]]), np.ones((2, 2))
    F = B.T @ solve_continuous_are(A, B, q * ones, np.eye(1))
    L = solve_continuous_are(A.T, C.T, q * ones, np.eye(1)) @ C.T
    assert F.ravel() == pytest.approx([gain, gain], rel=1e-6)
    assert L[0, 0] == pytest.approx(gain, rel=1e-6)
    assert gain_interval(F, L) == pytest.approx([low, high], rel=1e-4)


def test_allan_suite():
    """13.01, W.J. Riley, NIST SP 1065, pp. 107-108: a thousand points, and nine."""
    x, values = 1234567890, []
    for _ in range(1000):
        values.append(x / (2**31 - 1))
        x = 16807 * x % (2**31 - 1)
    data = np.array(values)
    assert round(data[1] * (2**31 - 1)) == 395529916
    for m, plain, overlapping in ((1, 0.2922319, 0.2922319), (10, 0.09965736, 0.09159953), (100, 0.03897804, 0.03241343)):
        assert allan_deviation(data, m) == pytest.approx(plain, rel=1e-6)
        assert allan_deviation(data, m, overlapping=True) == pytest.approx(overlapping, rel=1e-6)
    assert data.std(ddof=1) == pytest.approx(0.2884664, rel=1e-6)
    nine = np.array([892.0, 809, 823, 798, 671, 644, 883, 903, 677])
    assert allan_deviation(nine, 1) == pytest.approx(91.22945, rel=1e-6)
    assert allan_deviation(nine, 2) == pytest.approx(115.8082, rel=1e-6)
    assert allan_deviation(nine, 2, overlapping=True) == pytest.approx(85.95287, rel=1e-6)
    assert np.isnan(allan_deviation(nine, 5))                            # the twin: no two whole windows


def test_densities_in_the_units_of_data_sheets():
    """13.02: angle random walk, RMS in a band, per sample (definitions of IEEE Std 952, from memory)."""
    density = np.radians(0.005)
    assert np.degrees(random_walk(density, 3600.0)) == pytest.approx(0.3, rel=1e-6)
    assert np.degrees(in_band(density, 100.0)) == pytest.approx(0.05, rel=1e-6)
    assert np.degrees(in_band(density, 100.0, first_order=True)) == pytest.approx(0.0626657, rel=1e-5)
    assert np.degrees(per_sample(np.radians(0.25), 100.0)) == pytest.approx(1.7678, rel=1e-4)
    assert np.degrees(random_walk(np.radians(0.003), 3600.0)) == pytest.approx(0.18, rel=1e-9)
    assert np.degrees(random_walk(density, 60.0)) == pytest.approx(0.0387298, rel=1e-5)
    assert np.degrees(per_sample(density, 1000.0)) == pytest.approx(0.111803, rel=1e-5)
    assert pytest.approx(0.664282, rel=1e-5) == BIAS_INSTABILITY


def test_allan_slopes():
    """13.03: white noise and random walk, and where they cross; and a simulated log of each (tolerances of the source)."""
    N, K = np.radians(0.005), np.radians(1e-4)
    assert np.degrees(allan_model(N, 0.0, 100.0)) == pytest.approx(0.0005, rel=1e-9)
    assert np.degrees(allan_model(0.0, K, 100.0)) == pytest.approx(0.0005773503, rel=1e-6)
    crossing = allan_crossing(N, K)
    assert crossing == pytest.approx(86.60254, rel=1e-6)
    assert np.degrees(allan_model(N, K, crossing)) == pytest.approx(0.0007598357, rel=1e-5)
    rng, rate = np.random.default_rng(5), 100.0
    white = N * np.sqrt(rate) * rng.standard_normal(400_000)
    assert allan_deviation(white, 100, overlapping=True) == pytest.approx(allan_model(N, 0.0, 1.0), rel=0.06)
    walk = np.cumsum(K / np.sqrt(rate) * rng.standard_normal(400_000))
    assert allan_deviation(walk, 1000, overlapping=True) == pytest.approx(allan_model(0.0, K, 10.0), rel=0.12)
