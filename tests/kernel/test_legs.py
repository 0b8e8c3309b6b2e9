"""Legs that give: the equations derived again by sympy, energy without dissipation, blows and loads that come at rest."""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest
import sympy as sp
from scipy.integrate import solve_ivp

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.equations import derivative
from balance.kernel.legs import hinge_moves
from tests.kernel.rigs import events, law, run, wheel
from tests.kernel.test_equations import TOLERANCE, lagrange, solved

NOTHING = 1e-11
"""s: so short that only what is sudden moves anything."""

m, g, h, d, L, I_c, drag, k, damping, trunk, legs_torque = sp.symbols("m g h d L I_c drag k damping trunk legs")
psi, u, ud, chi, v, vd, I_w, alpha, s, sd, tau = sp.symbols("psi u ud chi v vd I_w alpha s sd tau")
NUMBERS = (m, g, h, d, L, I_c, drag, k, damping, I_w, alpha)


def place():
    """Return (across, up) of the centre of mass: the legs' hinge, then the trunk about it."""
    return (L * sp.sin(chi) + (h - L) * sp.sin(psi) + d * sp.cos(psi),
            L * sp.cos(chi) + (h - L) * sp.cos(psi) - d * sp.sin(psi))


def energies():
    """Return T and V of the trunk on its legs with a wheel that turns at s + alpha u about its own axis."""
    moving = sum((sp.diff(x, psi) * u + sp.diff(x, chi) * v) ** 2 for x in place())
    T = m * moving / 2 + I_c * u**2 / 2 + I_w * (s + alpha * u) ** 2 / 2
    return T, m * g * place()[1] + k * (psi - chi) ** 2 / 2


@cache
def symbolic():
    T, V = energies()
    give = damping * (u - v)
    turned = sp.symbols("turned")                                          # the wheel's own angle: ignorable
    return solved((psi, u, chi, v, s, tau, trunk, legs_torque, *NUMBERS),
                  lagrange(T, V, [(psi, u, ud), (chi, v, vd), (turned, s, sd)],
                           [trunk - give, legs_torque + give - drag * v, tau]), [ud, vd, sd])


def random_rig(rng):
    """Return the numbers, the kernel's body and its rows: one wheel, then the legs."""
    numbers = [rng.uniform(2, 20), 9.81, rng.uniform(0.3, 0.8), rng.uniform(-0.05, 0.05), 0.0, rng.uniform(0.05, 1.0),
               rng.uniform(0, 0.3), rng.uniform(5, 900), rng.uniform(0, 3), rng.uniform(1e-3, 2e-2), rng.uniform(0.3, 1)]
    numbers[4] = numbers[2] * rng.uniform(0.1, 0.9)
    mass, down, high, side, hinge, own, loss, stiff, loses, spin, share = numbers
    body = np.zeros(at.BODY_SIZE)
    # the kernel's J holds the wheel's spin inertia about the line, locked
    body[at.INERTIA] = own + mass * (high**2 + side**2) + spin * share**2
    body[at.STIFF_SIN], body[at.STIFF_COS], body[at.BODY_DRAG] = mass * down * high, mass * down * side, loss
    body[at.MASS], body[at.GRAVITY], body[at.HEIGHT], body[at.OFFSET] = mass, down, high, side
    body[at.BALANCED], body[at.TOUCH_DOWN], body[at.FELL] = -np.arctan2(side, high), np.inf, 0.8
    body[at.LANDS_OUTWARD] = np.inf
    rows = np.vstack([wheel(inertia=spin, share=share, torque=1e3, speed=1e4), np.zeros((1, at.UNIT_SIZE))])
    rows[1, [at.KIND, at.ROLE, at.OWN_INERTIA]] = at.WHEEL, at.LEGS, 1.0
    rows[1, [at.HINGE, at.HINGE_STIFFNESS, at.HINGE_DAMPING]] = hinge, stiff, loses
    return numbers, body, rows


def test_lagrange():
    rng = np.random.default_rng(3)
    for _ in range(60):
        numbers, body, rows = random_rig(rng)
        lean, bend, rate, other, speed = rng.uniform([-0.8, -0.4, -4, -4, -300], [0.8, 0.4, 4, 4, 300])
        on_trunk, on_legs, motor = rng.uniform([-9, -9, -2], [9, 9, 2])
        X, out = np.array([lean, rate, speed, 0.0, other, lean - bend]), np.zeros(6)
        derivative(X, np.array([motor, on_legs]), on_trunk, body, rows, out)
        due = symbolic()((lean, rate, lean - bend, other, speed, motor, on_trunk, on_legs, *numbers))
        found = np.array([out[1], out[4], out[2]])
        np.testing.assert_allclose(found, due, rtol=TOLERANCE, atol=TOLERANCE * np.abs(due).max())
        assert (out[0], out[5]) == (rate, other)
        rows[1, at.HINGE] *= 1.001                                         # the twin
        derivative(X, np.array([motor, on_legs]), on_trunk, body, rows, out)
        assert abs(out[1] - due[0]) > 1e-6 * np.abs(due).max()


def test_the_hinge_s_acceleration_is_its_place_s_second_difference():
    """What the hinge does beyond turning with the trunk, along a path given by polynomials."""
    rng = np.random.default_rng(4)
    _, _, rows = random_rig(rng)
    a, b = rng.uniform(-0.5, 0.5, (2, 3))

    def leans(t):
        return a[0] + a[1] * t + a[2] * t * t, b[0] + b[1] * t + b[2] * t * t

    def beyond(t):
        trunk_, legs_ = leans(t)
        hinge = rows[1, at.HINGE]
        return hinge * np.array([np.sin(legs_) - np.sin(trunk_), np.cos(legs_) - np.cos(trunk_)])

    X, dX = np.array([a[0], a[1], 0.0, 0.0, b[1], b[0]]), np.array([a[1], 2 * a[2], 0.0, 0.0, 2 * b[2], b[1]])
    step = 1e-3
    moved = hinge_moves(X, dX, rows)
    np.testing.assert_allclose(moved[:2], beyond(0.0), atol=1e-15)
    np.testing.assert_allclose(moved[2:], (beyond(step) - 2 * beyond(0.0) + beyond(-step)) / step**2, rtol=1e-4, atol=1e-6)


def test_energy_is_kept_without_damping():
    """The kernel's derivative by DOP853 at 1e-12: 5 s of falling and ringing; drift below 1e-9 of the peak energy."""
    numbers, body, rows = random_rig(np.random.default_rng(6))
    numbers[6] = numbers[8] = body[at.BODY_DRAG] = rows[1, at.HINGE_DAMPING] = 0.0
    energy = sp.lambdify((psi, u, chi, v, s, *NUMBERS), sum(energies()), "numpy")
    moving = sp.lambdify((psi, u, chi, v, s, *NUMBERS), energies()[0], "numpy")

    def rates(_, X):
        out = np.zeros(6)
        derivative(X, np.zeros(2), 0.0, body, rows, out)
        return out

    path = solve_ivp(rates, (0.0, 5.0), [0.1, 0.0, 50.0, 0.0, 0.0, 0.05], method="DOP853", rtol=1e-12, atol=1e-12).y
    states = (path[0], path[1], path[5], path[4], path[2])
    kept, peak = energy(*states, *numbers), moving(*states, *numbers).max()
    assert np.abs(path[0]).max() > 1.0
    assert np.abs(kept - kept[0]).max() < 1e-9 * peak
    rows[1, at.HINGE_DAMPING] = 0.05                                       # the twin
    path = solve_ivp(rates, (0.0, 5.0), [0.1, 0.0, 50.0, 0.0, 0.0, 0.05], method="DOP853", rtol=1e-12, atol=1e-12).y
    assert kept[0] - energy(path[0], path[1], path[5], path[4], path[2], *numbers)[-1] > 1e-4 * peak


def generalised(body, rows, X):
    """Return the momenta (trunk's row, legs' row, wheel's own) of the sympy energies at a state, N·m·s."""
    mass, high, side = body[at.MASS], body[at.HEIGHT], body[at.OFFSET]
    spin, share = rows[0, at.OWN_INERTIA], rows[0, at.AXIS_SHARE]
    numbers = {m: mass, h: high, d: side, L: rows[1, at.HINGE], I_w: spin, alpha: share,
               I_c: body[at.INERTIA] - mass * (high**2 + side**2) - spin * share**2}
    T = energies()[0].subs(numbers).subs({psi: X[0], chi: X[5]})
    return np.array([float(sp.diff(T, x).subs({u: X[1], v: X[4], s: X[2]})) for x in (u, v, s)])


@pytest.mark.parametrize("lever", [0.1, 0.9, math.inf])
def test_a_blow_adds_its_share_to_either_momentum(lever):
    """P at height ℓ: virtual work P(L δχ + (ℓ − L) δψ) above the hinge, P ℓ δχ below it; a couple turns the trunk alone."""
    _, body, rows = random_rig(np.random.default_rng(8))
    before, moment = np.array([0.02, 0.3, 20.0, 0.0, -0.2, 0.01]), 0.4
    ran = run(body, rows, law(), events(NOTHING, jumps=[[0.0, moment, 0.0, lever]]), X=before)
    change = generalised(body, rows, ran.X) - generalised(body, rows, before)
    share = min(rows[1, at.HINGE] / lever, 1.0)
    assert (share == 1.0, share == 0.0) == (lever < 0.2, math.isinf(lever))
    np.testing.assert_allclose(change, [(1 - share) * moment, share * moment, 0.0], atol=1e-9)


def test_a_push_that_lasts_is_the_same_push():
    """The same impulse within 0.1 ms leaves the same momenta, to what springs and weight give meanwhile."""
    _, body, rows = random_rig(np.random.default_rng(8))
    before = np.array([0.02, 0.3, 20.0, 0.0, -0.2, 0.01])
    row = [0.0, 1e-4, 0.4 / 1e-4, *[0.0] * (outcome.LEVER - 3), 0.9]
    quick = run(body, rows, law(), events(NOTHING, jumps=[[0.0, 0.4, 0.0, 0.9]]), X=before)
    slow = run(body, rows, law(), events(1e-4, [row]), X=before)
    none = run(body, rows, law(), events(1e-4), X=before)
    np.testing.assert_allclose(slow.X[[1, 4]] - none.X[[1, 4]], quick.X[[1, 4]] - before[[1, 4]], rtol=2e-3)


def test_a_load_that_comes_at_rest_keeps_both_momenta():
    """A point of mass m at rest on the trunk: neither generalised momentum changes, the rates do."""
    _, body, rows = random_rig(np.random.default_rng(9))
    before = np.array([0.02, 0.3, 20.0, 0.0, -0.2, 0.01])
    mass, high, load, up = body[at.MASS], body[at.HEIGHT], 1.5, 0.6
    then = body.copy()
    then[at.MASS], then[at.INERTIA] = mass + load, body[at.INERTIA] + load * up**2
    then[at.HEIGHT], then[at.OFFSET] = (mass * high + load * up) / (mass + load), mass * body[at.OFFSET] / (mass + load)
    then[at.STIFF_SIN] += load * body[at.GRAVITY] * up
    finite = np.isfinite(body)
    less = np.where(finite, then - np.where(finite, body, 0.0), 0.0)
    ran = run(body, rows, law(), events(NOTHING, changes=[[0.0, load * up**2, *less]]), X=before)
    np.testing.assert_allclose(generalised(then, rows, ran.X), generalised(body, rows, before), atol=1e-9)
    assert np.abs(ran.X[[1, 4]] - before[[1, 4]]).min() > 1e-3


def test_the_release_sets_legs_and_trunk_going_together():
    _, body, rows = random_rig(np.random.default_rng(9))
    start = np.array([0.02, 0.0, 0.0, 0.0, 0.0, 0.02])
    ran = run(body, rows, law(), events(0.004 + NOTHING, release=(0.004, 0.3)), X=start)
    assert ran.X[[1, 4]] == pytest.approx([0.3, 0.3], abs=1e-6)
