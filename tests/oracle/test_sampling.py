"""Sampling with hold and delay against published and closed-form values."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import cont2discrete

from balance.maths.sampled import hold, hold_late


def test_two_by_two_hold():
    """9.01: JuliaControl/ControlSystems.jl test_discrete (reference numbers read)."""
    Ad, Bd = hold(np.array([[-5.0, -3], [2, -9]]), np.diag([1.0, 2]), 0.01)
    assert Ad.ravel() == pytest.approx([0.950947837, -0.0279708822, 0.0186472548, 0.913653327], rel=1e-8)
    assert Bd.ravel() == pytest.approx([0.00975316142, -0.000286356011, 9.54520036e-05, 0.0191245148], rel=1e-7)


def test_pendulum_with_a_fractional_delay():
    """9.02: θ̈ = 20θ + u, h = 10 ms, delay 4 ms; method of Åström & Wittenmark (from memory)."""
    A, B = np.array([[0, 1.0], [20, 0]]), np.array([[0], [1.0]])
    Phi, Gamma = hold(A, B, 0.01)
    assert Phi.ravel() == pytest.approx([1.00100017, 0.0100033337, 0.200066673, 1.00100017], rel=1e-8)
    assert Gamma[:, 0] == pytest.approx([5.000833e-05, 0.0100033337], rel=1e-6)
    assert np.sort(np.linalg.eigvals(Phi)) == pytest.approx([0.9562639, 1.0457364], rel=1e-7)
    late, new, old = hold_late(A, B, 0.01, 0.004)
    assert late == pytest.approx(Phi, rel=1e-12)
    assert new[:, 0] == pytest.approx([1.80011e-05, 0.00600072], rel=1e-5)
    assert old[:, 0] == pytest.approx([3.20073e-05, 0.0040026136], rel=1e-5)
    assert new + old == pytest.approx(Gamma, abs=1e-15)


def test_textbook_holds():
    """9.03: Åström & Wittenmark, ch. 2-3 examples (from memory)."""
    Phi, Gamma = hold(np.array([[0, 1.0], [0, -1]]), np.array([[0], [1.0]]), 1.0)
    assert [Gamma[0, 0], Phi[1, 1] + 1.0] == pytest.approx([0.3679, 1.3679], rel=2e-4)
    _, new, old = hold_late(np.array([[-1.0]]), np.array([[1.0]]), 1.0, 0.5)
    assert (new[0, 0], old[0, 0]) == pytest.approx((0.393469, 0.238651), rel=1e-5)
    _, new, old = hold_late(np.array([[0, 1.0], [0, 0]]), np.array([[0], [1.0]]), 1.0, 0.5)
    assert [*new[:, 0], *old[:, 0]] == pytest.approx([0.125, 0.5, 0.375, 0.5], rel=1e-9)


def test_exponential_and_its_integral():
    """9.04: MB05ND documentation example (SLICOT reference, read)."""
    A = np.array([[5.0, 4, 3, 2, 1], [1, 6, 0, 4, 3], [2, 0, 7, 6, 5], [1, 3, 1, 8, 7], [2, 5, 7, 1, 9]])
    Phi, Gamma = hold(A, np.eye(5), 0.1)
    assert (Phi[0, 0], Phi[4, 4]) == pytest.approx((1.8391, 3.4134), rel=5e-5)
    assert (Gamma[0, 0], Gamma[4, 4]) == pytest.approx((0.1347, 0.1863), rel=5e-4)


def test_pendulum_with_a_servo():
    """9.04: pendulum on a position servo, T = 40 ms: applieddigitalcontrols.com ch. 7.10 (read)."""
    damping = 2 * 0.707 * 20                                     # the page prints 28.3, 1333 and 94.3, rounded
    A = np.array([[0, 1, 0, 0], [9.81 / 0.3, 0, 400 / 0.3, damping / 0.3], [0, 0, 0, 1], [0, 0, -400, -damping]])
    Phi, _ = hold(A, np.zeros((4, 1)), 0.04)
    assert [*Phi[0], Phi[2, 2]] == pytest.approx([1.0262, 0.0403, 0.7240, 0.0619, 0.7839], abs=1e-4)


def test_third_order_pendulum_model():
    """9.04: K. Moudgalya's course material (plant read); discretised by library."""
    A = np.array([[-16.8, 46.9, 539.1], [1, 0, 0], [0, 1, 0]])
    Phi, Gamma = hold(A, np.array([[1.0], [0], [0]]), 0.01)
    assert np.sort(np.linalg.eigvals(Phi).real) == pytest.approx([0.837526, 0.9505775, 1.0618244], rel=1e-5)
    num, _, _ = cont2discrete(([-12.4, 1.82], [1, 16.8, -46.9, -539.1]), 0.01)
    first = np.array([0, -12.4, 1.82]) @ Gamma[:, 0]
    assert first == pytest.approx(-0.0005866315, rel=1e-5)
    assert num[0, 1] == pytest.approx(first, rel=1e-9)
