"""LQR against published gains and closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import cont2discrete

from balance.design.ideal import continuous_lqr, continuous_view
from balance.design.lqr import lqr_gain, riccati_residual
from tests.oracle.loops import held, of
from tests.oracle.wheels import first_cube, pendulum, second_cube


def _sampled(A, b, T):
    Ad, Bd, *_ = cont2discrete((A, np.reshape(b, (len(A), -1)), np.eye(len(A)), np.zeros((len(A), 1))), T)
    return Ad, Bd


def test_first_cube_from_parameters_to_gains():
    """2.01: parameters read in a stored script (MichaelMMMMM/CuBa); they equal Gajamohan et al., IROS 2012 (from memory)."""
    A, b = first_cube()
    assert [A[1, 0], A[1, 1], A[1, 2], A[2, 2]] == pytest.approx([99.3756933, -0.2118864, 0.0103866, -0.0981059], rel=1e-5)
    assert [b[1], b[2]] == pytest.approx([-207.731777, 1962.11774], rel=1e-8)
    assert np.sort(np.linalg.eigvals(A).real) == pytest.approx([-10.0805379, -0.0877185, 9.8582641], rel=1e-5)
    K = continuous_lqr(A, b[:, None], np.eye(3), np.eye(1))[0]
    assert pytest.approx([-181.024502, -19.0330551, -1.00005], rel=1e-5) == K
    Ad, Bd = _sampled(A, b, 0.02)
    Kd, P = lqr_gain(Ad, Bd, np.eye(3), np.eye(1))
    assert Kd[0] == pytest.approx([-4.633296, -0.4820459, -0.0210895], rel=1e-5)
    assert np.abs(np.linalg.eigvals(Ad - Bd @ Kd)).max() == pytest.approx(0.8288517, rel=1e-6)
    assert riccati_residual(Ad, Bd, np.eye(3), np.eye(1), P) < 1e-6                     # rounding: P is 1e5 times Q
    assert riccati_residual(Ad, Bd, np.eye(3), np.eye(1), P * 1.01) > 1e-2              # the twin: not a solution


def test_swapped_lengths_are_another_machine():
    """2.01, note: the second script of the repository swaps the two lengths, and gives other numbers."""
    m_b, m_w = 0.419, 0.204
    A, b = pendulum((m_b * 0.085 + m_w * 0.075) * 9.81, 3.34e-3 + m_w * 0.075**2, 0.57e-3, 1.02e-3, 0.05e-3)
    assert (A[1, 0], b[1]) == pytest.approx((111.304, -222.841), rel=1e-5)
    assert continuous_lqr(A, b[:, None], np.eye(3), np.eye(1))[0, 0] == pytest.approx(-179.372, rel=1e-5)


def test_margins_of_the_sampled_cube_and_one_more_sample():
    """2.03: derived; limits bracketed by z-plane roots."""
    A, b = first_cube()
    Ad, Bd = _sampled(A, b, 0.02)
    Kd = lqr_gain(Ad, Bd, np.eye(3), np.eye(1))[0][0]
    loop = held(A, b, Kd, 0.02)
    m = of(loop)
    assert (m.gain_lower, m.gain_upper) == pytest.approx((0.178087, 1.710864), rel=1e-5)
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((41.75703, 62.01565), rel=1e-5)
    assert m.delay_estimate == pytest.approx(11.75184e-3, rel=1e-4)
    assert m.delay == pytest.approx(13.21e-3, rel=1e-3)                                 # true, by eigenvalues (physics page)
    assert m.peak_sensitivity == pytest.approx(2.406738, rel=1e-4)
    assert 1.0 + loop.growth(1.0, 0.02) == pytest.approx(1.195771, rel=1e-5)            # one extra sample: unstable


def test_second_cube_with_expensive_control():
    """2.04: parameters and weights read in MichaelMMMMM/CuBa; outputs by library."""
    A, b = second_cube()
    assert [A[1, 0], A[1, 1], A[1, 2], A[2, 2]] == pytest.approx([76.725324, -0.4967003, 0.005030391, -0.24671221], rel=1e-6)
    assert [b[1], b[2]] == pytest.approx([-236.523954, 11600.1603], rel=1e-8)
    assert np.sort(np.linalg.eigvals(A).real) == pytest.approx([-9.0138276, -0.241678, 8.5120931], rel=1e-5)
    K = continuous_lqr(A, b[:, None], np.eye(3), 5e6 * np.eye(1))[0]
    assert pytest.approx([-1.0378866, -0.11563218, -0.000468987], rel=1e-5) == K
    poles = np.linalg.eigvals(A - np.outer(b, K))
    assert np.sort(poles.real) == pytest.approx([-9.079269, -8.537903, -5.0356956], rel=1e-5)
    m = of(continuous_view(A, b, K))
    assert m.gain_lower == pytest.approx(0.3775037, rel=1e-6)
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((62.12263, 20.30949), rel=1e-6)
    assert m.delay == pytest.approx(53.3861e-3, rel=1e-5)


def test_cart_pendulum_tutorial():
    """1.10: University of Michigan Control Tutorials (Messner, Tilbury), inverted pendulum (read)."""
    M, m, b, inertia, length, g = 0.5, 0.2, 0.1, 0.006, 0.3, 9.8
    p = inertia * (M + m) + M * m * length**2
    A = np.array([[0, 1, 0, 0], [0, -(inertia + m * length**2) * b / p, m**2 * g * length**2 / p, 0], [0, 0, 0, 1],
                  [0, -m * length * b / p, m * g * length * (M + m) / p, 0]])
    B = np.array([[0], [(inertia + m * length**2) / p], [0], [m * length / p]])
    assert np.sort(np.linalg.eigvals(A).real) == pytest.approx([-5.6041, -0.1428, 0, 5.5651], rel=1e-3, abs=1e-9)
    light = np.diag([1.0, 0, 1, 0])
    assert continuous_lqr(A, B, light, np.eye(1))[0] == pytest.approx([-1, -1.6567, 18.6854, 3.4594], rel=1e-4)
    heavy = np.diag([5000.0, 0, 100, 0])
    assert continuous_lqr(A, B, heavy, np.eye(1))[0] == pytest.approx([-70.7107, -37.8345, 105.5298, 20.9238], rel=1e-4)
    Ad, Bd = _sampled(A, B, 0.01)
    assert (Ad[2, 2], Ad[3, 2]) == pytest.approx((1.0015593, 0.3119195), rel=1e-5)
    assert lqr_gain(Ad, Bd, heavy, np.eye(1))[0][0] == pytest.approx([-61.9933, -33.504, 95.0597, 18.83], rel=1e-4)


def _care(A, B, Q, R=None):
    """Return the Riccati solution from the gain alone: P from the Lyapunov equation of the closed loop."""
    from scipy.linalg import solve_continuous_lyapunov
    R = np.eye(B.shape[1]) if R is None else R
    K = continuous_lqr(A, B, Q, R)
    closed = A - B @ K
    return solve_continuous_lyapunov(closed.T, -(Q + K.T @ R @ K)), closed


def test_riccati_benchmarks():
    """5.01: J. Abels & P. Benner, CAREX, SLICOT Working Note 1999-14 (data and exact solutions read)."""
    X, _ = _care(np.array([[0, 1.0], [0, 0]]), np.array([[0], [1.0]]), np.diag([1.0, 2]))
    assert pytest.approx(np.array([[2, 1], [1, 2]]), rel=1e-9) == X
    X, _ = _care(np.diag([1.0, -2]), np.array([[1.0], [0]]), np.ones((2, 2)))
    assert [X[0, 0], X[0, 1], X[1, 1]] == pytest.approx([2.41421356, 0.292893219, 0.228553391], rel=1e-8)
    X, _ = _care(np.array([[0, 0.1234], [0, 0]]), np.array([[0], [1.0]]), np.eye(2))
    assert [X[0, 0], X[0, 1], X[1, 1]] == pytest.approx([9.04863848, 1, 1.11660199], rel=1e-8)
    e = 0.5
    A, B = np.array([[3 - e, 1], [4, 2 - e]]), np.ones((2, 1))
    Q = np.array([[4 * e - 11, 2 * e - 5], [2 * e - 5, 2 * e - 2]])
    X = np.array([[2.0, 1], [1, 1]])
    assert np.abs(A.T @ X + X @ A - X @ B @ B.T @ X + Q).max() < 1e-12                  # exact in small integers
    assert np.sort_complex(np.linalg.eigvals(A - B @ B.T @ X)) == pytest.approx([-e - 1j, -e + 1j], rel=1e-6)


@pytest.mark.parametrize(("a", "b", "q1", "q2", "r", "K"), [
    (0.0, 1.0, 1.0, 1.0, 1.0, (1.0, 1.73205081)), (0.0, 1.0, 100.0, 0.0, 1.0, (10.0, 4.47213595)),
    (10.0, 1.0, 1.0, 1.0, 1.0, (20.0498756, 6.4109088)), (20.0, 5.0, 100.0, 1.0, 0.1, (35.8747549, 4.934562)),
    (10.0, 1.0, 1e-9, 1e-9, 1.0, (20.0, 6.3245553))])
def test_closed_forms_of_a_pendulum(a, b, q1, q2, r, K):
    """5.03: Anderson & Moore; double integrator read in Tedrake, "Underactuated Robotics"."""
    found = continuous_lqr(np.array([[0, 1.0], [a, 0]]), np.array([[0], [b]]), np.diag([q1, q2]), np.array([[r]]))[0]
    assert found == pytest.approx(K, rel=1e-7)
    k1 = (a + np.sqrt(a * a + b * b * q1 / r)) / b
    assert found == pytest.approx((k1, np.sqrt(2 * k1 / b + q2 / r)), rel=1e-7)


def test_more_riccati_cases():
    """5.04: inputs read in RobotLocomotion/drake Riccati and LQR tests (third: Pappas, Laub & Sandell 1980, ex. 2)."""
    K = continuous_lqr(np.array([[-3.0, 2], [1, 1]]), np.array([[0], [1.0]]), 3 * np.eye(2), 3 * np.eye(1))[0]
    assert pytest.approx([0.7406598, 3.2276982], rel=1e-6) == K
    K = lqr_gain(np.array([[1.0, 1], [0, 1]]), np.array([[0], [1.0]]), np.diag([1.0, 0]), 0.3 * np.eye(1))[0][0]
    assert pytest.approx([0.6645415, 1.5320569], rel=1e-6) == K
    A = np.diag([1.0, 1, 1], 1)
    A[0] = [0.5, 1, 0, 0]
    _, P = lqr_gain(A, np.array([[0], [0], [0], [1.0]]), np.diag([1.0, 0, 0, 0]), 0.25 * np.eye(1))
    assert P[0, 0] == pytest.approx(1.32891383, rel=1e-8)


def test_guaranteed_margins():
    """5.07: gain (½, ∞), phase ≥ 60°, |1 + L| ≥ 1: Anderson & Moore; Safonov & Athans 1977 (from memory)."""
    A, b = np.array([[0, 1.0], [0, 0]]), np.array([0, 1.0])
    m = of(continuous_view(A, b, np.array([1.0, np.sqrt(2)])))
    assert (np.rad2deg(m.phase), m.phase_crossover) == pytest.approx((65.5302, 1.553774), rel=1e-5)
    A = np.array([[0, 1.0], [10, 0]])
    m = of(continuous_view(A, b, continuous_lqr(A, b[:, None], np.eye(2), np.eye(1))[0]))
    assert m.gain_lower == pytest.approx(0.4987562, rel=1e-6)
    assert np.rad2deg(m.phase) == pytest.approx(60.62907, rel=1e-5)
    assert m.peak_sensitivity == pytest.approx(1.0, abs=1e-6)
    m = of(continuous_view(A, b, np.array([20.0, 2 * np.sqrt(10)])))                    # least energy: bounds attained
    assert (m.gain_lower, np.rad2deg(m.phase)) == pytest.approx((0.5, 60.0), rel=1e-6)


@pytest.mark.parametrize(("bits", "third", "radius"), [(None, -0.0210895, 0.8288517), (10, -0.021484375, 0.8257117),
                                                       (13, -0.0211181641, 0.8286081)])
def test_rounded_gains(bits, third, radius):
    """15.03: the discrete gains of 2.01 rounded to 10 and 13 fractional bits (derived)."""
    A, b = first_cube()
    Ad, Bd = _sampled(A, b, 0.02)
    K = np.array([-4.6332960, -0.4820459, -0.0210895])
    if bits is not None:
        K = np.round(K * 2**bits) / 2**bits
    assert K[2] == pytest.approx(third, rel=1e-8)
    assert np.abs(np.linalg.eigvals(Ad - Bd * K)).max() == pytest.approx(radius, rel=1e-5)
