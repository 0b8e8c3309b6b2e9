"""Energy and angular momentum of the kernel's motion without dissipation, over five seconds of free fall and swing.

Nothing stops the fall here: the machine swings right round its line, so every term of the equations is exercised.
Energies are written from vectors (frames, spin and gimbal axes), not from the kernel's rows.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from balance.kernel import layout as at
from balance.kernel.equations import derivative, gravity_torque

LASTS = 5.0
DRIFT = 1e-9
"""Of the peak energy or momentum: DOP853 at 1e-12 keeps some 1e-11; a wrong term drifts by 1e-3 and more."""

E_LINE, UP, OUT = np.array([1.0, 0, 0]), np.array([0, 0, 1.0]), np.array([0, -1.0, 0])
MASS, HEIGHT, OFFSET, OWN, GRAVITY = 5.0, 0.4, 0.02, 0.3, 9.81


def body(radius=0.0):
    row = np.zeros(at.BODY_SIZE)
    row[at.INERTIA] = OWN + MASS * (HEIGHT**2 + OFFSET**2)
    row[at.STIFF_SIN], row[at.STIFF_COS] = MASS * GRAVITY * HEIGHT, MASS * GRAVITY * OFFSET
    row[at.MASS], row[at.HEIGHT], row[at.OFFSET], row[at.GRAVITY] = MASS, HEIGHT, OFFSET, GRAVITY
    row[at.FOOT_RADIUS] = radius
    return row


def body_energy(X, radius=0.0):
    """Return the kinetic and the potential energy (J) of the body without its rotors."""
    s, c, r = np.sin(X[0]), np.cos(X[0]), radius
    across = (r + (HEIGHT - r) * c - OFFSET * s) * X[1]
    up = (-(HEIGHT - r) * s - OFFSET * c) * X[1]
    height = r + (HEIGHT - r) * c - OFFSET * s
    return 0.5 * MASS * (across**2 + up**2) + 0.5 * OWN * X[1] ** 2, MASS * GRAVITY * height


def motion(row, units, X):
    """Integrate the kernel's derivative with no inputs; the last state is ∫ M dt, the gravity's impulse."""
    size = len(X)
    out, none = np.zeros(size), np.zeros(len(units))

    def rates(_, y):
        derivative(y[:size], none, 0.0, row, units, out)
        return np.append(out, gravity_torque(y[0], row))

    run = solve_ivp(rates, (0.0, LASTS), np.append(X, 0.0), method="DOP853", rtol=1e-12, atol=1e-12, max_step=0.02)
    assert run.success
    return run.y.T


def drift(values, scale):
    return float(np.abs(np.asarray(values) - values[0]).max() / scale)


def test_rolling_body_keeps_its_energy():
    path = motion(body(0.08), np.zeros((0, at.UNIT_SIZE)), np.array([0.05, 0.0]))
    parts = np.array([body_energy(X, 0.08) for X in path])
    assert np.abs(path[:, 0]).max() > 1.5                              # it really fell
    assert drift(parts.sum(axis=1), parts[:, 0].max()) < DRIFT
    point = np.array([body_energy(X, 0.07) for X in path])            # the twin
    assert drift(point.sum(axis=1), point[:, 0].max()) > 1e-3


@pytest.mark.parametrize(("ratio", "sense"), [(1.0, 1.0), (5.0, 1.0), (5.0, -1.0)])
def test_wheel(ratio, sense):
    """Energy, momentum about the line, and the wheel's own axial momentum, which its motor (off) does not change."""
    spin, rotor = 6e-3, 2e-4
    axis = np.array([0.8, 0.6, 0.0])
    share = axis @ E_LINE
    row, unit = body(), np.zeros((1, at.UNIT_SIZE))
    across = 4e-3
    row[at.INERTIA] += share**2 * (spin + rotor) + (1 - share**2) * (across + rotor / 2)
    unit[0, at.COUPLING] = share * (spin + sense * ratio * rotor)
    unit[0, at.OWN_INERTIA] = spin + ratio**2 * rotor

    def turning(X, speed, inertia, off):
        omega = X[1] * E_LINE + speed * axis
        L = off * omega + (inertia - off) * (axis @ omega) * axis
        return 0.5 * omega @ L, L @ E_LINE, axis @ L

    path = motion(row, unit, np.array([0.05, 0.0, 120.0, 0.0]))
    found = []
    for X in path:
        kinetic, potential = body_energy(X)
        parts = [turning(X, X[2], spin, across), turning(X, sense * ratio * X[2], rotor, rotor / 2)]
        moving = kinetic + sum(p[0] for p in parts)
        about = (OWN + MASS * (HEIGHT**2 + OFFSET**2)) * X[1] + sum(p[1] for p in parts)
        axial = parts[0][2] + sense * ratio * parts[1][2]
        found.append([moving + potential, moving, about - X[-1], about, axial])
    total, moving, balanced, about, axial = np.array(found).T
    assert np.abs(path[:, 0]).max() > 3.0
    assert drift(total, moving.max()) < DRIFT
    assert drift(balanced, np.abs(about).max()) < DRIFT
    assert drift(axial, np.abs(axial).max()) < DRIFT
    assert np.ptp(path[:, 2]) > 1.0                                   # while the speed against the body does change
    # the twin: a kernel whose gear has the other sense does not keep this energy
    unit[0, at.COUPLING] = share * (spin - sense * ratio * rotor)
    path = motion(row, unit, np.array([0.05, 0.0, 120.0, 0.0]))
    total = [sum(body_energy(X)) + turning(X, X[2], spin, across)[0]
             + turning(X, sense * ratio * X[2], rotor, rotor / 2)[0] for X in path]
    assert drift(total, moving.max()) > 1e-6


def flywheel(count, axis, spin_axis):
    """Return the kernel's row of a free gimbal (no torque, damping or spring) and what a vector energy needs."""
    g, s = np.array(axis, float), np.array(spin_axis, float)
    unit = np.zeros((1, at.UNIT_SIZE))
    H, It, frame = 1.5, 4e-3, 6e-3
    unit[0, at.KIND], unit[0, at.COUNT], unit[0, at.MOMENTUM], unit[0, at.TRANSVERSE] = at.GIMBAL_TORQUE, count, H, It
    unit[0, at.GIMBAL_INERTIA] = frame + It
    unit[0, at.E_S0], unit[0, at.E_GXS0], unit[0, at.KAPPA] = s @ E_LINE, np.cross(g, s) @ E_LINE, g @ E_LINE
    return unit, (H, It, frame, g, s)


def flywheels(X, count, numbers):
    """Return (kinetic energy beyond the held spin's, momentum about the line) of the flywheels and their frames."""
    H, It, frame, g, s0 = numbers
    energy = momentum = 0.0
    for way in (1.0, -1.0)[:count]:
        angle = way * X[2]
        s = s0 * np.cos(angle) + np.cross(g, s0) * np.sin(angle)
        omega = X[1] * E_LINE + way * X[3] * g
        L = frame * omega + It * (omega - (omega @ s) * s)
        energy += 0.5 * omega @ L
        momentum += (L + way * H * s) @ E_LINE
    return energy, momentum


GYROS = [(2, (0, 1, 0), (0, 0, 1)), (1, (0, 1, 0), (0, 0, 1)), (1, (0.48, 0.8, 0.36), (0.64, -0.6, 0.48)),
         (2, (0.48, 0.8, 0.36), (0.64, -0.6, 0.48))]


@pytest.mark.parametrize(("count", "axis", "spin_axis"), GYROS)
def test_gimballed_flywheels_with_the_motor_off(count, axis, spin_axis):
    """Pair and single, square and at any axes (κ ≠ 0, e·s₀ ≠ 0): energy and momentum about the line."""
    unit, numbers = flywheel(count, axis, spin_axis)
    row = body()
    row[at.INERTIA] += count * numbers[2]
    path = motion(row, unit, np.array([0.05, 0.0, 0.0, 0.0]))
    found = []
    for X in path:
        kinetic, potential = body_energy(X)
        own, momentum = flywheels(X, count, numbers)
        about = (OWN + MASS * (HEIGHT**2 + OFFSET**2)) * X[1] + momentum
        found.append([kinetic + own + potential, kinetic + own, about - X[4], about])
    total, moving, balanced, about = np.array(found).T
    assert np.abs(path[:, 2]).max() > 0.1                             # the gimbals do turn
    assert drift(total, moving.max()) < DRIFT
    assert drift(balanced, max(np.abs(about).max(), numbers[0])) < DRIFT


def test_a_gimbal_with_damping_loses_energy():
    """The twin: the same balance is broken by what should break it."""
    unit, numbers = flywheel(2, (0, 1, 0), (0, 0, 1))
    unit[0, at.GIMBAL_DAMPING] = 1e-3
    row = body()
    row[at.INERTIA] += 2 * numbers[2]
    path = motion(row, unit, np.array([0.05, 0.0, 0.0, 0.0]))
    total = np.array([sum(body_energy(X)) + flywheels(X, 2, numbers)[0] for X in path])
    assert total[0] - total[-1] > 1e-4
    assert (np.diff(total) <= 1e-9).all()
