"""The law's tick against matrix arithmetic, and how several units share what one of them cannot give."""

from __future__ import annotations

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel.tick import law_tick, measure, share_out


def test_tick_is_the_state_space_law():
    rng = np.random.default_rng(5)
    k, m = 3, 4
    A, B, E, C, D = (rng.normal(size=s) for s in ((k, k), (k, m), k, k, m))
    x = rng.normal(size=k)
    ours, spare = x.copy(), np.zeros(k)
    clipped = 0
    for _ in range(20):
        y = rng.normal(size=m)
        v = C @ x + D @ y
        cut = float(np.clip(v, -0.7, 0.7))
        x = A @ x + B @ y + E * cut
        got = law_tick(ours, y, A, B, E, C, D, 0.7, spare)
        assert got == pytest.approx((v, cut), rel=1e-12)         # a dozen double operations
        np.testing.assert_allclose(ours, x, rtol=1e-12, atol=1e-12)
        clipped += v != cut
    assert 0 < clipped < 20                                       # both sides of the clip were met


def test_the_memory_sees_the_limited_command():
    """Anti-windup of the past-command memory: x⁺ = v', not v."""
    x, one = np.zeros(1), np.ones(1)
    law_tick(x, np.array([5.0]), np.zeros((1, 1)), np.zeros((1, 1)), one, np.zeros(1), one, 0.8, np.zeros(1))
    assert x[0] == 0.8


def test_lean_is_measured_from_the_balanced_lean():
    body = np.zeros(at.BODY_SIZE)
    body[at.BALANCED] = -0.02
    y = np.zeros(3)
    measure(np.array([0.01, 0.5, 30.0, 2.0]), 0.0, (0.0, 0.0), body, np.array([0, 1, 2]), np.zeros(0), 0, 0, y)
    np.testing.assert_allclose(y, [0.03, 0.5, 30.0], rtol=1e-12)


def shared(v, allotment, most, line, levelling=None, y=None):
    n = len(allotment)
    out = np.zeros(n)
    y = np.zeros(1) if y is None else y
    levelling = np.zeros((n, y.size)) if levelling is None else levelling
    cut = share_out(v, y, np.array(allotment), levelling, np.array(most), np.array(line), out)
    return out, cut


def test_what_one_unit_cannot_give_goes_to_the_other():
    line = [1.0, 0.5]
    out, cut = shared(1.2, [0.5, 1.0], [0.4, 2.0], line)
    assert cut
    assert out[0] == 0.4
    assert np.dot(line, out) == pytest.approx(1.2, rel=1e-12)     # the torque about the line is kept


def test_nothing_is_shared_that_nobody_has():
    out, cut = shared(5.0, [0.5, 1.0], [0.4, 1.0], [1.0, 0.5])
    assert cut
    np.testing.assert_allclose(out, [0.4, 1.0])


def test_a_unit_with_reversed_share_takes_over_with_its_own_sign():
    out, _ = shared(1.0, [0.5, -0.5], [0.3, 1.0], [1.0, -1.0])
    np.testing.assert_allclose(out, [0.3, -0.7], rtol=1e-12)


def test_a_unit_square_to_the_line_takes_nothing_over():
    out, _ = shared(1.0, [1.0, 0.0], [0.6, 1.0], [1.0, 0.0])
    np.testing.assert_allclose(out, [0.6, 0.0])


def test_a_single_unit_is_only_clipped():
    assert shared(2.0, [1.0], [1.5], [0.0]) == (pytest.approx([1.5]), True)
    assert shared(1.0, [1.0], [1.5], [0.0]) == (pytest.approx([1.0]), False)


def test_levelling_moves_no_torque_about_the_line():
    line, y = np.array([1.0, 0.5]), np.array([10.0, -20.0])
    levelling = np.array([[0.01, -0.02], [-0.02, 0.04]])          # cᵀN = 0
    out, _ = shared(0.3, [0.5, 1.0], [9.0, 9.0], line, levelling, y)
    assert line @ out == pytest.approx(0.3, rel=1e-12)
    assert out[0] != pytest.approx(0.15)


def test_back_calculation_stands_at_its_closed_form():
    """Reference 8.04: u = u_sat + T_t K_i e = 4.8 while saturated. Åström & Hägglund, "PID Controllers" (from memory).

    u = K_p e + I, I' = K_i e + (sat(u) - u)/T_t as a law of ours at 1 ms: x = I, v = x + K_p e, and the memory moves by
    T (K_i e + (v' - v)/T_t); the standing value does not depend on T.
    """
    kp, ki, tt, e, T = 72.8, 72.0, 0.25, 0.1, 1e-3
    A, B, E = np.array([[1.0 - T / tt]]), np.array([[T * ki - T / tt * kp]]), np.array([T / tt])
    x, spare, v = np.zeros(1), np.zeros(1), 0.0
    for _ in range(5000):                                         # 20 T_t: e^{-20} = 2e-9 of the way left
        v, cut = law_tick(x, np.array([e]), A, B, E, np.ones(1), np.array([kp]), 3.0, spare)
    assert v == pytest.approx(4.8, rel=1e-8)
    assert cut == 3.0


def test_without_back_calculation_it_winds_up():
    """The twin: the same integrator that does not see the limit grows for ever."""
    x, v = np.zeros(1), 0.0
    for _ in range(5000):
        v, _ = law_tick(x, np.array([0.1]), np.ones((1, 1)), np.array([[72e-3]]), np.zeros(1), np.ones(1),
                        np.array([72.8]), 3.0, np.zeros(1))
    assert v > 40.0
