"""Rolling feet and the friction they need (references 16.01, 16.02, 16.03)."""

from __future__ import annotations

from math import acos, degrees, hypot, pi, sqrt

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq, minimize_scalar

from balance.kernel import layout as at
from balance.kernel.equations import derivative
from balance.kernel.feet import foot_forces
from balance.machine.legs import Feet
from balance.machine.machine import Lumped, Machine
from balance.machine.motors import Motor
from balance.machine.stabilisers import ReactionWheel, Rotor
from balance.plant.build import build_plant
from balance.stance.build import build_stance


def standing(mass, height, inertia, radius=0.0):
    """Return the plant of a body by three numbers with a wheel."""
    wheel = ReactionWheel(rotor=Rotor(spin=5e-3), motor="m")
    motor = Motor(torque_constant=0.05, resistance=0.2, peak_current=200.0, continuous_current=5.0)
    machine = Machine(1, "rig", {"wheel": wheel}, gravity=9.81, lumped=Lumped(mass, height, inertia),
                      motors={"m": motor}, feet=Feet(radius=radius))
    return build_plant(machine, build_stance(machine, "line"))


def rates(plant, X, torque=0.0):
    out = np.zeros(4)
    derivative(np.asarray(X, float), np.array([torque]), 0.0, plant.body_parameters, plant.unit_parameters, out)
    return out


def needed(plant, X, torque=0.0):
    """Return F/N at a state."""
    dX = rates(plant, X, torque)
    across, normal = foot_forces(np.asarray(X, float), dX, 0.0, plant.body_parameters, plant.unit_parameters)
    return across / normal


@pytest.mark.parametrize(("radius", "growth"), [(0.0, 4.7218063), (0.05, 4.416845), (0.2, 3.338821)])
def test_rolling_foot_slows_the_fall(radius, growth):
    """16.01: derived with sympy; a multibody engine's rolling cylinder agreed (page)."""
    plant = standing(5.0, 0.4, 0.08 + 5.0 * 0.4**2, radius)
    assert plant.pole == pytest.approx(growth, rel=1e-6)
    assert plant.unstable_pole == pytest.approx(growth, rel=1e-6)
    small = 1e-5
    slope = (rates(plant, [small, 0, 0, 0])[1] - rates(plant, [-small, 0, 0, 0])[1]) / (2 * small)
    assert sqrt(slope) == pytest.approx(growth, rel=1e-6)


def test_foot_rounder_than_the_machine_is_high_rocks():
    """16.01: h = 0.2, r = 0.4 oscillates; period by the linear model and by the kernel from a small lean."""
    plant = standing(5.0, 0.2, 0.08 + 5.0 * 0.2**2, 0.4)
    assert plant.stiffness < 0.0
    assert plant.unstable_pole == pytest.approx(0.0, abs=1e-9)
    assert 2 * pi / np.abs(np.linalg.eigvals(plant.model.A).imag).max() == pytest.approx(1.061511, rel=1e-5)
    up = lambda _, X: X[0]                                              # noqa: E731
    up.direction = 1.0
    run = solve_ivp(lambda _, X: rates(plant, X), (0.0, 2.5), [1e-4, 0, 0, 0], method="DOP853", rtol=1e-11, atol=1e-15,
                    events=up)
    assert run.t_events[0][1] - run.t_events[0][0] == pytest.approx(1.061511, rel=1e-5)


def test_foot_as_round_as_the_machine_is_high_is_neutral():
    """Between the two: G = m g (h − r) = 0, no pole, nothing to bound; a hair less round and it topples again."""
    plant = standing(5.0, 0.4, 0.08 + 5.0 * 0.4**2, 0.4)
    assert plant.stiffness == plant.pole == plant.balanced_lean == 0.0
    assert rates(plant, [0.3, 0, 0, 0])[1] == pytest.approx(0.0, abs=1e-12)
    assert standing(5.0, 0.4, 0.08 + 5.0 * 0.4**2, 0.39).pole > 0.0


def test_friction_under_full_wheel_torque():
    """16.02: μ = hτ/(I g) at the upright (derived); the machine's mass does not matter."""
    for mass in (4.0, 9.0):
        plant = standing(mass, 0.35, 1.1289)
        assert abs(needed(plant, [0, 0, 0, 0], 3.0)) == pytest.approx(0.0948123, rel=1e-5)
        # the twin: the locked wheel's inertia would give another number
        assert abs(needed(plant, [0, 0, 0, 0], 3.0)) != pytest.approx(0.35 * 3 / (1.1339 * 9.81), rel=1e-3)


def test_falling_rod():
    """16.02: a uniform rod let go upright on a rough floor: 0.371 at 35.1° (classic problem, from memory)."""
    plant = standing(1.0, 0.5, 1.0 / 3.0)

    def friction(angle):
        speed = sqrt(2 * plant.stiffness * (1 - np.cos(angle)) / plant.inertia_free)
        return needed(plant, [angle, speed, 0, 0])

    peak = minimize_scalar(lambda a: -friction(a), bounds=(0.1, 0.8), method="bounded", options={"xatol": 1e-9})
    assert -peak.fun == pytest.approx(0.370579, rel=1e-4)
    assert degrees(peak.x) == pytest.approx(35.097, rel=1e-3)
    turn = brentq(friction, 0.7, 1.0, xtol=1e-12)
    assert degrees(turn) == pytest.approx(48.1897, rel=1e-5)
    assert turn == pytest.approx(acos(2 / 3), rel=1e-9)
    # energy, used above for the speed, is what the kernel's own fall gives
    fall = solve_ivp(lambda _, X: rates(plant, X), (0.0, 1.6), [0.01, 0, 0, 0], method="DOP853", rtol=1e-11, atol=1e-13)
    angle, speed = fall.y[:2, -1]
    assert angle > 0.5
    assert speed == pytest.approx(
        sqrt(2 * plant.stiffness * (np.cos(0.01) - np.cos(angle)) / plant.inertia_free), rel=1e-8)


def test_largest_torque_without_slip():
    """16.03: τ = μ g I/h (own), found on the kernel's foot forces."""
    plant = standing(6.2, 0.35, 1.1289)
    torque = brentq(lambda t: abs(needed(plant, [0, 0, 0, 0], t)) - 0.3, 0.0, 20.0)
    assert torque == pytest.approx(9.4924, rel=1e-4)


def test_rolling_feet_by_the_rolling_of_the_centre():
    """F and N of a ball foot are m times the acceleration of the centre of mass that the kernel's own motion shows."""
    mass, height, r = 5.0, 0.4, 0.15
    plant = standing(mass, height, 0.08 + mass * height**2, r)
    X = np.array([0.3, 1.2, 0.0, 0.0])
    step = 1e-3
    path = solve_ivp(lambda _, X: rates(plant, X), (0.0, step), X, method="DOP853", rtol=1e-13, atol=1e-15).y[:2, -1]
    back = solve_ivp(lambda _, X: rates(plant, X), (0.0, -step), X, method="DOP853", rtol=1e-13, atol=1e-15).y[:2, -1]

    def centre(t):
        return np.array([r * t + (height - r) * np.sin(t), r + (height - r) * np.cos(t)])

    second = (centre(path[0]) - 2 * centre(X[0]) + centre(back[0])) / step**2          # error of order step²
    across, normal = foot_forces(X, rates(plant, X), 0.0, plant.body_parameters, plant.unit_parameters)
    assert [across, normal] == pytest.approx(mass * (second + np.array([0.0, 9.81])), rel=1e-5)
    plant.body_parameters[at.FOOT_RADIUS] = 0.0                                             # the twin: point feet
    point = foot_forces(X, rates(plant, X), 0.0, plant.body_parameters, plant.unit_parameters)
    assert hypot(point[0] - across, point[1] - normal) > 0.05 * hypot(across, normal)
