"""What no controller can beat: closed forms of the literature and simulation (references 4.01, 4.02, 4.04, 14.01)."""

from __future__ import annotations

from math import acosh, asin, cos, degrees, exp, inf, pi, radians, sin, sqrt

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from balance.kernel.equations import derivative, gimbal_terms
from balance.machine.machine import Lumped, Machine
from balance.machine.motors import Motor
from balance.machine.stabilisers import Gimbal, ReactionWheel, Rotor, ScissoredPair
from balance.maths.sampled import hold
from balance.plant.build import build_plant
from balance.plant.limits import any_law, gimbal_discounted, impulsive, late, torque_and_momentum, torque_only
from balance.stance.build import build_stance

INERTIA, WEIGHT, TORQUE, SPIN = 0.35, 12.0, 0.8, 4e-3        # 4.02: kg·m², N·m/rad, N·m, kg·m²
OMEGA = sqrt(WEIGHT / INERTIA)
HEIGHT = 0.25                                               # m; only m g h and the inertia matter


def pendulum(**stabilisers):
    """Return the plant of 4.02's pendulum with the given stabiliser."""
    mass = WEIGHT / (9.81 * HEIGHT)
    motor = Motor(torque_constant=0.1, resistance=0.1, peak_current=TORQUE / 0.1, continuous_current=1.0)
    machine = Machine(1, "pendulum", stabilisers, gravity=9.81, lumped=Lumped(mass, HEIGHT, INERTIA), motors={"m": motor})
    return build_plant(machine, build_stance(machine, "line"))


def wheel(speed_limit):
    return ReactionWheel(rotor=Rotor(spin=SPIN), motor="m", speed_limit=speed_limit)


def test_flywheel_with_an_angle_limit():
    """4.01: Pratt, Carff, Drakunov, Goswami 2006 and Stephens 2007 (formulas from memory), re-derived."""
    m, z, J, most, stop, g = 75.0, 0.95, 8.0, 100.0, 0.5, 9.81
    omega, T = sqrt(g / z), sqrt(J * stop / most)
    assert (omega, T) == pytest.approx((3.2134585, 0.2), rel=1e-7)
    assert torque_only(most, m * g) == pytest.approx(0.1359157, rel=1e-6)
    # the point mass's lean is x/z: with J = m z the quadrature answers in metres
    limit = any_law(lambda s: most if s < T else -most, 2 * T, m * z, omega)
    assert limit == pytest.approx(most / (m * g) * (1 - exp(-omega * T)) ** 2, rel=1e-9)
    assert limit == pytest.approx(0.0305531, rel=1e-5)
    assert (limit * omega, m * limit * omega) == pytest.approx((0.0981811, 7.363586), rel=1e-5)
    assert limit + 0.1 == pytest.approx(0.1305531, rel=1e-6)          # the foot adds its own reach
    assert 0.5 / omega == pytest.approx(0.1555956, rel=1e-6)          # capture point of 0.5 m/s

    def left(start):
        """Return ξ and the flywheel's angle and rate after the simulated pulse."""
        y = np.array([0.0, start * omega, 0.0, 0.0])
        for sign in (1.0, -1.0):
            rates = lambda t, y, s=sign: [y[1], omega**2 * y[0] - s * most / (m * z), y[3], s * most / J]  # noqa: E731
            y = solve_ivp(rates, (0.0, T), y, method="DOP853", rtol=1e-12, atol=1e-14).y[:, -1]
        return y[0] + y[1] / omega, y[2], y[3]

    assert left(limit) == pytest.approx((0.0, stop, 0.0), abs=1e-9)
    assert left(1.01 * limit)[0] > 1e-4                                # the twin: 1 % more is not caught


@pytest.mark.parametrize(("speed", "lean", "kick"), [
    (20.0, 0.0295463, 0.039036), (50.0, 0.0512437, 0.09759), (400.0, 0.0666661, 0.78072)])
def test_wheel_with_a_speed_limit(speed, lean, kick):
    """4.02: null-controllable set of one unstable mode, torque and momentum bounded (own derivation of the page)."""
    plant = pendulum(wheel=wheel(speed))
    assert plant.pole == pytest.approx(5.8554004, rel=1e-7)
    assert plant.momentum_capacity == pytest.approx(SPIN * speed, rel=1e-12)
    assert plant.bounds.torque_only_lean == pytest.approx(0.0666667, rel=1e-5)
    assert torque_and_momentum(TORQUE, plant.momentum_capacity, plant.stiffness, plant.pole) == pytest.approx(lean, rel=1e-5)
    assert plant.bounds.lean == pytest.approx(lean, rel=1e-5)
    assert plant.bounds.impulsive_lean == pytest.approx(kick, rel=1e-5)
    assert impulsive(plant.momentum_capacity, plant.inertia_free, plant.pole) == pytest.approx(kick, rel=1e-5)


def test_wheel_is_spent_just_when_the_pendulum_is_caught():
    """4.02, Ω = 50: the linear model itself, from rest at the limit, all torque until the wheel is full."""
    plant = pendulum(wheel=wheel(50.0))
    A, b = plant.model.A, plant.model.B[:, 0] * TORQUE
    until = SPIN * 50.0 / TORQUE

    def left(lean):
        step = expm(np.block([[A, b[:, None]], [np.zeros((1, 4))]]) * until)
        x = step @ [lean, 0.0, 0.0, 1.0]
        return x[0] + x[1] / plant.pole, SPIN * (x[2] + x[1])

    z, momentum = left(plant.bounds.lean)
    assert z == pytest.approx(0.0, abs=1e-8)
    assert momentum == pytest.approx(SPIN * 50.0, rel=1e-9)
    assert left(1.01 * plant.bounds.lean)[0] > 1e-3                     # the twin


def test_static_and_fast_limits_of_the_sine():
    """4.02: what the kernel's sine of gravity allows under full torque, and one degree held and let fall."""
    plant = pendulum(wheel=wheel(inf))
    still = asin(TORQUE / WEIGHT)
    assert degrees(still) == pytest.approx(3.82255, rel=1e-5)
    out = np.zeros(4)

    def rates(_, X):
        derivative(X, np.array([TORQUE]), 0.0, plant.body_parameters, plant.unit_parameters, out)
        return out.copy()

    assert rates(0.0, np.array([still, 0.0, 0.0, 0.0]))[1] == pytest.approx(0.0, abs=1e-12)
    caught, lost = (_ends(rates, 0.3904324 * k) for k in (1 - 2e-5, 1 + 2e-5))
    assert caught < 0.0 < lost
    assert plant.pole * plant.bounds.torque_only_lean == pytest.approx(0.39036, rel=1e-5)
    hold_one = plant.stiffness * radians(1.0)
    assert (hold_one, SPIN * 400.0 / hold_one) == pytest.approx((0.2094395, 7.63944), rel=1e-5)
    fall = acosh(20.0) / plant.pole
    assert fall == pytest.approx(0.629889, rel=1e-5)
    x = expm(plant.model.A * fall) @ [radians(1.0), 0.0, 0.0]
    assert degrees(x[0]) == pytest.approx(20.0, rel=1e-9)


def _ends(rates, rate):
    """Return the lean rate where it turns back (< 0) or passes 10 degrees (> 0)."""
    past = lambda _, X: X[0] - radians(10.0)                             # noqa: E731
    back = lambda _, X: X[1] + 0.05                                      # noqa: E731
    past.terminal = back.terminal = True
    run = solve_ivp(rates, (0.0, 20.0), [0.0, rate, 0.0, 0.0], method="DOP853", rtol=1e-11, atol=1e-13, events=[past, back])
    assert run.status == 1
    return run.y[1, -1]


def test_scissored_pair():
    """4.04: H = 0.5 N·m·s each, 0 to 60° at 4 rad/s (own derivation of the page)."""
    stop, rate = pi / 3, 4.0
    gimbal = Gimbal(angle_limit=stop, rate_limit=rate, torque_limit=100.0, drive="position servo", inertia=1e-4)
    rotor = Rotor(mass=0.3, spin=5e-4, transverse=3e-4)
    plant = pendulum(gyros=ScissoredPair(rotor=rotor, spin_speed=1000.0, gimbal=gimbal))
    assert plant.momentum_capacity == pytest.approx(0.866025, rel=1e-5)
    assert plant.bounds.impulsive_lean == pytest.approx(0.4225771, rel=1e-5)
    at_zero, at_stop = (-gimbal_terms(0, angle, rate, 0.0, plant.unit_parameters)[1] for angle in (0.0, stop))
    assert (at_zero, at_stop) == pytest.approx((4.0, 2.0), rel=1e-9)
    assert plant.bounds.lean == pytest.approx(0.2317678, rel=1e-5)
    closed = gimbal_discounted(1.0, rate, stop, OMEGA) / (INERTIA * OMEGA)
    by_sum = any_law(lambda s: rate * cos(rate * s), stop / rate, INERTIA, OMEGA)
    assert (closed, by_sum) == pytest.approx((0.2317678, 0.2317678), rel=1e-5)
    assert closed == pytest.approx(by_sum, rel=1e-12)
    # the twin: a wheel of that momentum and starting torque gives it all at 4 N·m and reaches further
    assert torque_and_momentum(4.0, sin(stop), WEIGHT, OMEGA) > 1.01 * closed


def test_bounded_input_and_delay():
    """14.01: Hu & Lin, null-controllable sets (concept from memory)."""
    # ẋ = 2x + u, |u| ≤ 3 is ż = p z − T/(J p) with p = 2 and J = 1/2
    assert any_law(lambda _: 3.0, inf, 0.5, 2.0) == pytest.approx(1.5, rel=1e-9)
    assert torque_only(3.0, 0.5 * 2.0**2) == pytest.approx(1.5, rel=1e-9)
    Ad, Bd = hold(np.array([[2.0]]), np.array([[1.0]]), 0.01)
    assert Bd[0, 0] * 3.0 / (Ad[0, 0] - 1.0) == pytest.approx(1.5, rel=1e-9)
    assert late(1.0, 5.8554, 0.01) == pytest.approx(0.943127, rel=1e-5)
    plant = pendulum(wheel=wheel(inf))
    assert late(plant.bounds.torque_only_lean, plant.pole, 0.01) == pytest.approx(0.0628752, rel=1e-5)
    # simulated: 10 ms of falling bring the late limit just to the limit itself
    lean = late(plant.bounds.torque_only_lean, plant.pole, 0.01)
    x = expm(plant.model.A * 0.01) @ [lean, 0.0, 0.0]
    assert x[0] + x[1] / plant.pole == pytest.approx(plant.bounds.torque_only_lean, rel=1e-9)
