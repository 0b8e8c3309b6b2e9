"""Reaction-wheel pendulums of the literature, in the reference page's form."""

from __future__ import annotations

import numpy as np
from scipy.linalg import solve_discrete_are
from scipy.signal import cont2discrete


def pendulum(mgl, inertia, wheel, drag, wheel_drag):
    """Return A, B of [θ, θ̇, wheel speed] under the motor torque on the wheel."""
    A = np.array([[0, 1, 0], [mgl / inertia, -drag / inertia, wheel_drag / inertia],
                  [-mgl / inertia, drag / inertia, -(wheel + inertia) * wheel_drag / (wheel * inertia)]])
    return A, np.array([0, -1 / inertia, (wheel + inertia) / (wheel * inertia)])


def first_cube():
    """2.01: an edge-balancing cube, parameters read in a stored student script (swapped lengths are its trap)."""
    l_b, l_w, m_b, m_w, I_b, I_w, C_b, C_w = 0.075, 0.085, 0.419, 0.204, 3.34e-3, 0.57e-3, 1.02e-3, 0.05e-3
    return pendulum((m_b * l_b + m_w * l_w) * 9.81, I_b + m_w * l_w**2, I_w, C_b, C_w)


def second_cube():
    """2.04: the cube as built."""
    l_b, l_w, m_b, m_w, I_b, I_w, C_b, C_w = 0.0751442, 0.08455, 0.294, 0.1298, 3.3e-3, 0.088e-3, 2.1e-3, 2.1268e-5
    return pendulum((m_b * l_b + m_w * l_w) * 9.81, I_b + m_w * l_w**2, I_w, C_b, C_w)


def two_millisecond_loop():
    """Return A, b, K, T of a 2 ms loop whose slow modes crowd around z = 1 (our own scenario)."""
    A, b = pendulum(20.6, 0.9, 0.012, 0.0, 2e-5)
    T = 0.002
    Ad, Bd, *_ = cont2discrete((A, b[:, None], np.eye(3), np.zeros((3, 1))), T)
    Q, R = np.diag([1 / 0.03**2, 1 / 0.15**2, 1 / 200.0**2]), np.array([[1 / 0.6**2]])
    P = solve_discrete_are(Ad, Bd, Q, R)
    return A, b, np.linalg.solve(R + Bd.T @ P @ Bd, Bd.T @ P @ Ad)[0], T
