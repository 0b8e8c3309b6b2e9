"""Open-loop models of two published cube prototypes, built from a machine record (references 2.01, 2.04)."""

from __future__ import annotations

import numpy as np
import pytest

from balance.machine.machine import Lumped, Machine
from balance.machine.motors import Motor
from balance.machine.stabilisers import Drag, ReactionWheel, Rotor
from balance.plant.build import build_plant
from balance.stance.build import build_stance
from tests.oracle.wheels import first_cube, second_cube


def cube(l_b, l_w, m_b, m_w, I_b, I_w, C_b, C_w):
    """Return the plant of an edge-balancing cube with one wheel; the wheel's mass counts at its axis."""
    mass = m_b + m_w
    wheel = ReactionWheel(rotor=Rotor(spin=I_w), motor="m", drag=Drag(viscous=C_w))
    motor = Motor(torque_constant=0.03, resistance=1.0, peak_current=10.0, continuous_current=3.0)
    lumped = Lumped(mass, (m_b * l_b + m_w * l_w) / mass, I_b + m_w * l_w**2, drag=C_b)
    machine = Machine(1, "cube", {"wheel": wheel}, gravity=9.81, lumped=lumped, motors={"m": motor})
    return build_plant(machine, build_stance(machine, "line"))


FIRST = (0.075, 0.085, 0.419, 0.204, 3.34e-3, 0.57e-3, 1.02e-3, 0.05e-3)
SECOND = (0.0751442, 0.08455, 0.294, 0.1298, 3.3e-3, 0.088e-3, 2.1e-3, 2.1268e-5)


def test_first_cube():
    """2.01: parameters read in a stored student script; A, B, poles derived.  Each tolerance is the page's."""
    plant = cube(*FIRST)
    A, B = plant.model.A, plant.model.B[:, 0]
    assert A[1, 0] == pytest.approx(99.3756933, rel=1e-7)
    assert A[1, 1] == pytest.approx(-0.2118864, rel=1e-6)
    assert A[1, 2] == pytest.approx(0.0103866, rel=1e-5)
    assert A[2, 2] == pytest.approx(-0.0981059, rel=1e-6)
    assert B[1] == pytest.approx(-207.731777, rel=1e-8)
    assert B[2] == pytest.approx(1962.11774, rel=1e-8)
    poles = np.sort(np.linalg.eigvals(A).real)
    assert poles[[0, 2]] == pytest.approx([-10.0805379, 9.8582641], rel=1e-7)
    assert poles[1] == pytest.approx(-0.0877185, rel=1e-5)
    assert plant.unstable_pole == pytest.approx(9.8582641, rel=1e-7)


def test_second_cube():
    """2.04: parameters read in a stored student script; A, B, poles derived.  Each tolerance is the page's."""
    plant = cube(*SECOND)
    A, B = plant.model.A, plant.model.B[:, 0]
    assert A[1, 0] == pytest.approx(76.725324, rel=1e-7)
    assert A[1, 1] == pytest.approx(-0.4967003, rel=1e-6)
    assert A[1, 2] == pytest.approx(0.005030391, rel=1e-6)
    assert A[2, 2] == pytest.approx(-0.24671221, rel=1e-7)
    assert B[1] == pytest.approx(-236.523954, rel=1e-8)
    assert B[2] == pytest.approx(11600.1603, rel=1e-8)
    poles = np.sort(np.linalg.eigvals(A).real)
    assert poles[[0, 2]] == pytest.approx([-9.0138276, 8.5120931], rel=1e-7)
    assert poles[1] == pytest.approx(-0.241678, rel=1e-5)


def test_whole_matrices_and_the_swapped_lengths():
    """2.01's trap: with the two lengths swapped A21 is 111.304 and B2 −222.841; every entry against the page's form."""
    for numbers, reference in ((FIRST, first_cube()), (SECOND, second_cube())):
        plant = cube(*numbers)
        A, B = reference
        assert np.abs(plant.model.A - A).max() <= 1e-12 * np.abs(A).max()      # rounding only
        assert plant.model.B[:, 0] == pytest.approx(B, rel=1e-12)
    swapped = cube(FIRST[1], FIRST[0], *FIRST[2:])
    assert swapped.model.A[1, 0] == pytest.approx(111.304, rel=1e-5)
    assert swapped.model.B[1, 0] == pytest.approx(-222.841, rel=1e-5)
    assert abs(swapped.model.A[1, 0] / 99.3756933 - 1.0) > 0.1
