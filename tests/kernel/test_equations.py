"""The equations of motion derived again by sympy from energies and momenta, and compared with the kernel at random states.

Nothing of the kernel's formulas is used: positions, frames and angular velocities are written as vectors, the rest is
differentiation.  A spinning rotor's momentum is held, so its angle is ignorable and Routh's function takes T's place.
"""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
import sympy as sp

from balance.kernel import layout as at
from balance.kernel.equations import STICKS, derivative, gravity_torque, lean_acceleration, wheel_drag

TOLERANCE = 1e-9
"""Relative: both sides are doubles, the symbolic one with a few hundred operations."""

theta, w, wd = sp.symbols("theta w wd")                                  # lean, its rate, its acceleration
E_LINE = sp.Matrix([1, 0, 0])


def lagrange(T, V, coordinates, force):
    """Return the residuals d/dt ∂T/∂q̇ − ∂T/∂q + ∂V/∂q − Q, the time derivative by the chain rule.

    `coordinates`: (q, q̇, q̈) each.
    """
    out = []
    for (q, v, _), Q in zip(coordinates, force, strict=True):
        p = sp.diff(T, v)
        moving = sum(sp.diff(p, a) * b + sp.diff(p, b) * c for a, b, c in coordinates)
        out.append(moving - sp.diff(T - V, q) - Q)
    return out


def solved(symbols, residuals, accelerations):
    """Return a function of the symbols' values that gives the accelerations."""
    M, f = sp.linear_eq_to_matrix(residuals, accelerations)
    compiled = sp.lambdify(symbols, (M, f), "numpy", cse=True)

    def at_values(values):
        matrix, right = compiled(*values)
        return np.linalg.solve(np.array(matrix, float), np.array(right, float).ravel())

    return at_values


# --- body with rolling feet -------------------------------------------------------------------------------------------

m, g, h, d, r, I_c, drag, torque = sp.symbols("m g h d r I_c drag torque")
BODY = (m, g, h, d, r, I_c, drag)


@cache
def body_energies():
    """Return T and V of a body rolling on balls: its centre of mass moved by θ, the contact rolled on by r θ."""
    y = r * theta + (h - r) * sp.sin(theta) + d * sp.cos(theta)
    z = r + (h - r) * sp.cos(theta) - d * sp.sin(theta)
    speed = sp.diff(y, theta) ** 2 + sp.diff(z, theta) ** 2
    return (m * speed + I_c) * w**2 / 2, m * g * z


def random_body(rng, radius=None):
    """Return numbers for BODY and the kernel's row."""
    numbers = [rng.uniform(2, 20), 9.81, rng.uniform(0.2, 0.8), rng.uniform(-0.05, 0.05),
               rng.uniform(0.0, 0.1) if radius is None else radius, rng.uniform(0.05, 1.0), rng.uniform(0, 0.3)]
    mass, down, high, side, ball, own, loss = numbers
    row = np.zeros(at.BODY_SIZE)
    row[at.INERTIA] = own + mass * (high**2 + side**2)
    row[at.STIFF_SIN], row[at.STIFF_COS], row[at.BODY_DRAG] = mass * down * high, mass * down * side, loss
    row[at.MASS], row[at.GRAVITY], row[at.HEIGHT], row[at.OFFSET], row[at.FOOT_RADIUS] = mass, down, high, side, ball
    return numbers, row


def kernel(X, inputs, push, body, units):
    out = np.zeros(2 + 2 * len(units))
    derivative(np.array(X, float), np.array(inputs, float), push, body, np.array(units).reshape(-1, at.UNIT_SIZE), out)
    return out


def test_body_on_rolling_feet():
    """J(θ)θ̈ = M(θ) + m r[(h − r) sin θ + δ cos θ]θ̇² − b θ̇ + d."""
    T, V = body_energies()
    ours = solved((theta, w, torque, *BODY), lagrange(T, V, [(theta, w, wd)], [torque - drag * w]), [wd])
    rng = np.random.default_rng(1)
    for _ in range(50):
        numbers, row = random_body(rng)
        lean, rate, push = rng.uniform(-1, 1), rng.uniform(-4, 4), rng.uniform(-9, 9)
        expected = ours((lean, rate, push, *numbers))
        assert kernel([lean, rate], [], push, row, [])[1] == pytest.approx(expected[0], rel=TOLERANCE, abs=1e-9)
        force = sp.lambdify((theta, *BODY), -sp.diff(V, theta))(lean, *numbers)
        assert gravity_torque(lean, row) == pytest.approx(force, rel=TOLERANCE, abs=1e-9)
        row[at.FOOT_RADIUS] *= 1.1                                      # the twin
        assert kernel([lean, rate], [], push, row, [])[1] != pytest.approx(expected[0], rel=1e-6)


# --- wheels through gears ---------------------------------------------------------------------------------------------

I_w, I_x, J_r, N, tilt, wheel_torque, viscous, Omega, Omega_dot, phi = sp.symbols(
    "I_w I_x J_r N tilt wheel_torque viscous Omega Omega_dot phi")


def axial_energy(omega, axis, spin, across):
    """Return the rotational energy of a body of revolution: `axis` (3,) unit, `omega` (3,) its angular velocity."""
    along = omega.dot(axis)
    return (spin * along**2 + across * (omega.dot(omega) - along**2)) / 2


@cache
def geared_wheel(sense):
    """Return θ̈, Ω̇ of a body with one wheel: motor rotor on the wheel's own axis, turning sense·N times the wheel."""
    axis = sp.Matrix([sp.cos(tilt), sp.sin(tilt) * sp.Rational(3, 5), sp.sin(tilt) * sp.Rational(4, 5)])
    T, V = body_energies()
    T += axial_energy(w * E_LINE + Omega * axis, axis, I_w, I_x)
    T += axial_energy(w * E_LINE + sense * N * Omega * axis, axis, J_r, J_r / 2)
    residuals = lagrange(T, V, [(theta, w, wd), (phi, Omega, Omega_dot)],
                         [torque - drag * w, wheel_torque - viscous * Omega])
    symbols = (theta, w, Omega, torque, wheel_torque, I_w, I_x, J_r, N, tilt, viscous, *BODY)
    return solved(symbols, residuals, [wd, Omega_dot])


@pytest.mark.parametrize("sense", [1, -1])
def test_geared_wheel(sense):
    """Mass matrix [[J, α(I + sN J_r)], [α(I + sN J_r), I + N² J_r]], J with rotor and wheel locked."""
    ours = geared_wheel(sense)
    rng = np.random.default_rng(2)
    for _ in range(50):
        numbers, body = random_body(rng)
        spin, across, rotor, ratio, loss = rng.uniform([1e-3, 1e-3, 1e-5, 1.0, 0.0], [1e-1, 5e-2, 1e-3, 8.0, 1e-3])
        lean, rate, speed, push, given, angle = rng.uniform(-1, 1, 6) * [1, 4, 300, 9, 3, 3]
        share = np.cos(angle)
        body[at.INERTIA] += share**2 * (spin + rotor) + (1 - share**2) * (across + rotor / 2)
        unit = np.zeros(at.UNIT_SIZE)
        unit[at.KIND], unit[at.AXIS_SHARE], unit[at.VISCOUS] = at.WHEEL, share, loss
        unit[at.COUPLING], unit[at.OWN_INERTIA] = share * (spin + sense * ratio * rotor), spin + ratio**2 * rotor
        expected = ours((lean, rate, speed, push, given, spin, across, rotor, ratio, angle, loss, *numbers))
        found = kernel([lean, rate, speed, 0], [given], push, body, [unit])
        assert [found[1], found[2]] == pytest.approx(list(expected), rel=TOLERANCE)
        assert found[3] == 0.0
        unit[at.COUPLING] = share * (spin - sense * ratio * rotor)      # the twin: the other sense
        assert kernel([lean, rate, speed, 0], [given], push, body, [unit])[1] != pytest.approx(expected[0], rel=1e-7)


# --- gimballed flywheels ----------------------------------------------------------------------------------------------

gamma, v, vd, H, I_s, I_t, F_s, F_p, F_g = sp.symbols("gamma v vd H I_s I_t F_s F_p F_g")
gimbal_torque, damping, spring = sp.symbols("gimbal_torque damping spring")
G_AXIS, S_AXIS = sp.Matrix(sp.symbols("g1 g2 g3")), sp.Matrix(sp.symbols("s1 s2 s3"))
FLYWHEEL = (H, I_s, I_t, F_s, F_p, F_g, damping, spring, *G_AXIS, *S_AXIS)


def routh(way):
    """Return Routh's function of one flywheel at gimbal angle way·γ with momentum way·H.

    The gimbal's frame has its principal axes along the spin axis, across it and along the gimbal's axis.
    """
    turned = S_AXIS * sp.cos(way * gamma) + G_AXIS.cross(S_AXIS) * sp.sin(way * gamma)
    frame = w * E_LINE + way * v * G_AXIS
    rate = sp.Symbol("rate")                                            # of the rotor in its frame
    # axis components by hand: s is square to g, which the free symbols do not know
    along = w * E_LINE.dot(turned)
    square = w**2 + v**2 + 2 * way * w * v * E_LINE.dot(G_AXIS)
    across = w * E_LINE.dot(G_AXIS.cross(turned))
    about_gimbal = w * E_LINE.dot(G_AXIS) + way * v
    T = I_s * (rate + along) ** 2 / 2 + I_t * (square - along**2) / 2
    T += (F_s * along**2 + F_p * across**2 + F_g * about_gimbal**2) / 2
    assert sp.expand(square - frame.dot(frame)).subs(G_AXIS[0] ** 2, 1 - G_AXIS[1] ** 2 - G_AXIS[2] ** 2).expand() == 0
    held = sp.solve(sp.Eq(sp.diff(T, rate), way * H), rate)[0]
    return (T - way * H * rate).subs(rate, held)


@cache
def gyro(count):
    """Return θ̈, γ̈ of a body with a single flywheel, or a pair whose gimbals are linked (one coordinate)."""
    T, V = body_energies()
    T += sum(routh(way) for way in (1, -1)[:count])
    push = count * (gimbal_torque - damping * v - spring * gamma)
    residuals = lagrange(T, V, [(theta, w, wd), (gamma, v, vd)], [torque - drag * w, push])
    return solved((theta, w, gamma, v, torque, gimbal_torque, *FLYWHEEL, *BODY), residuals, [wd, vd])


def random_flywheel(rng, count):
    """Return numbers for FLYWHEEL and the kernel's row, axes anywhere (g square to s₀)."""
    axis = rng.normal(size=3)
    axis /= np.linalg.norm(axis)
    spin = np.cross(axis, rng.normal(size=3))
    spin /= np.linalg.norm(spin)
    numbers = [rng.uniform(1, 20), *rng.uniform(5e-3, 5e-2, 2), *rng.uniform(5e-3, 9e-3, 3), rng.uniform(0, 0.5),
               rng.uniform(-2, 2)]
    row = np.zeros(at.UNIT_SIZE)
    row[at.KIND], row[at.COUNT], row[at.MOMENTUM], row[at.SPIN] = at.GIMBAL_TORQUE, count, numbers[0], numbers[1]
    row[at.TRANSVERSE], row[at.GIMBAL_INERTIA] = numbers[2], numbers[5] + numbers[2]
    row[at.SPIN_HELD] = numbers[3] - numbers[4]
    row[at.GIMBAL_DAMPING], row[at.GIMBAL_SPRING] = numbers[6], numbers[7]
    row[at.E_S0], row[at.E_GXS0], row[at.KAPPA] = spin[0], np.cross(axis, spin)[0], axis[0]
    row[at.DRIVE_TORQUE], row[at.RATE_LAG] = np.inf, rng.uniform(10, 100)
    return [*numbers, *axis, *spin], row


def frames(flywheel, unit):
    """Return what the frames add to J beside the part that turns with the spin axis (kg·m²)."""
    return unit[at.COUNT] * (flywheel[4] * (1 - unit[at.KAPPA] ** 2) + flywheel[5] * unit[at.KAPPA] ** 2)


@pytest.mark.parametrize("count", [1, 2])
def test_gimballed_flywheels(count):
    """Any axes, κ ≠ 0 and e·s₀ ≠ 0 too, by Routh's function."""
    ours = gyro(count)
    rng = np.random.default_rng(3)
    entries = (at.MOMENTUM, at.TRANSVERSE, at.E_S0, at.E_GXS0, at.GIMBAL_INERTIA, at.SPIN_HELD)
    seen = np.zeros(len(entries))
    for _ in range(50):
        numbers, body = random_body(rng)
        flywheel, unit = random_flywheel(rng, count)
        body[at.INERTIA] += frames(flywheel, unit)
        lean, rate, angle, turning, push, given = rng.uniform(-1, 1, 6) * [1, 4, 1.22, 6, 20, 10]
        expected = ours((lean, rate, angle, turning, push, given, *flywheel, *numbers))
        found = kernel([lean, rate, angle, turning], [given], push, body, [unit])
        assert found[0] == rate
        assert found[2] == turning
        assert [found[1], found[3]] == pytest.approx(list(expected), rel=TOLERANCE, abs=TOLERANCE * np.abs(expected).max())
        for i, entry in enumerate(entries):
            wrong = unit.copy()
            wrong[entry] *= 1.01
            off = kernel([lean, rate, angle, turning], [given], push, body, [wrong])[[1, 3]]
            seen[i] += np.abs(off - expected).max() > 1e-7 * np.abs(expected).max()
    assert seen.min() > 25                             # the twins: 1 % off shows in most states, whichever entry it is


@pytest.mark.parametrize("count", [1, 2])
def test_servo_is_a_torque_that_follows(count):
    """A servo's gimbal turns as commanded, and the body feels the torque that this takes; a weak drive gives its most."""
    ours = gyro(count)
    rng = np.random.default_rng(4)
    weak = 0
    for _ in range(50):
        numbers, body = random_body(rng)
        flywheel, unit = random_flywheel(rng, count)
        body[at.INERTIA] += frames(flywheel, unit)
        unit[at.KIND] = at.GIMBAL_SERVO
        lean, rate, angle, turning, push, command = rng.uniform(-1, 1, 6) * [1, 4, 1.22, 6, 20, 6]
        state = (lean, rate, angle, turning, push)
        found = kernel(state[:4], [command], push, body, [unit])
        assert found[3] == pytest.approx((command - turning) * unit[at.RATE_LAG], rel=1e-12)
        # the drive torque is what remains of γ̈'s own equation: linear in it, found from two tries
        one, two = (ours((*state, t, *flywheel, *numbers)) for t in (0.0, 1.0))
        need = (found[3] - one[1]) / (two[1] - one[1])
        assert found[1] == pytest.approx(ours((*state, need, *flywheel, *numbers))[0], rel=1e-8, abs=1e-8)
        unit[at.DRIVE_TORQUE] = 0.5 * abs(need)
        found = kernel(state[:4], [command], push, body, [unit])
        expected = ours((*state, 0.5 * need, *flywheel, *numbers))
        assert [found[1], found[3]] == pytest.approx(list(expected), rel=1e-8, abs=1e-8 * np.abs(expected).max())
        weak += abs(found[3] - (command - turning) * unit[at.RATE_LAG]) > 1e-3
    assert weak == 50


def test_units_add_up():
    """Several units act side by side: the body row holds the sum of what each would hold alone."""
    rng = np.random.default_rng(5)
    numbers, body = random_body(rng)
    (a, one), (b, two) = random_flywheel(rng, 1), random_flywheel(rng, 2)
    body[at.INERTIA] += frames(a, one) + frames(b, two)
    T, V = body_energies()
    names = [sp.symbols([f"{s}_{i}" for s in FLYWHEEL]) for i in (1, 2)]
    angles = [sp.symbols(f"gamma_{i} v_{i} vd_{i}") for i in (1, 2)]
    forces = [torque - drag * w]
    for count, own, (q, qd, _) in zip((1, 2), names, angles, strict=True):
        swap = dict(zip((*FLYWHEEL, gamma, v), (*own, q, qd), strict=True))
        T += sum(routh(way) for way in (1, -1)[:count]).subs(swap, simultaneous=True)
        forces.append(count * (-damping * v - spring * gamma).subs(swap, simultaneous=True))
    ours = solved((theta, w, *angles[0][:2], *angles[1][:2], torque, *names[0], *names[1], *BODY),
                  lagrange(T, V, [(theta, w, wd), *angles], forces), [wd, angles[0][2], angles[1][2]])
    X = [0.2, -1.5, 0.7, 3.0, -0.9, 2.0]
    expected = ours((*X, 4.0, *a, *b, *numbers))
    found = kernel(X, [0.0, 0.0], 4.0, body, [one, two])
    assert found[[1, 3, 5]] == pytest.approx(expected, rel=TOLERANCE)
    assert kernel(X[:4], [0.0], 4.0, body, [one])[1] != pytest.approx(expected[0], rel=1e-3)


def test_coulomb_drag():
    """It opposes turning, is whole from 1 rad/s on and fades to nothing at rest."""
    assert wheel_drag(0.0, 0.02, 1e-5, 0.0) == 0.0
    for speed in (1.0, 7.0, 300.0):
        assert wheel_drag(speed, 0.02, 1e-5, 0.0) == pytest.approx(0.02 + 1e-5 * speed, rel=1e-12)
        assert wheel_drag(-speed, 0.02, 1e-5, 0.0) == -wheel_drag(speed, 0.02, 1e-5, 0.0)
    assert wheel_drag(0.5, 0.02, 0.0, 0.0) == pytest.approx(0.01, rel=1e-12)


def test_one_acceleration_for_both_doors():
    """`lean_acceleration` is what `derivative` uses: same θ̈ for wheels."""
    rng = np.random.default_rng(6)
    _, body = random_body(rng)
    unit = np.zeros((1, at.UNIT_SIZE))
    unit[0, at.COUPLING], unit[0, at.OWN_INERTIA] = 3e-3, 4e-3
    X, out = np.array([0.1, 0.4, 30.0, 0.0]), np.zeros(4)
    alone = lean_acceleration(X, np.array([0.3]), 1.0, body, unit, out)
    assert alone == kernel(X, [0.3], 1.0, body, unit)[1]


def test_stiction_falls_from_its_peak_to_the_coulomb_drag():
    """Nothing at rest, all of it just above, half way down at 1 rad/s, Coulomb's far above; odd in speed."""
    def drag(speed):
        return wheel_drag(speed, 0.01, 0.0, 0.03)

    assert drag(0.0) == 0.0
    assert drag(STICKS) == pytest.approx(0.01 + 0.02 / (1.0 + STICKS**2), rel=1e-12)
    assert drag(1.0) == pytest.approx(0.02, rel=1e-12)
    assert drag(100.0) == pytest.approx(0.01, rel=1e-3)
    assert drag(-0.4) == -drag(0.4)
    assert drag(0.5) > wheel_drag(0.5, 0.01, 0.0, 0.0)            # the twin: without stiction it fades near rest
