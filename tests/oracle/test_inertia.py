"""Inertias against published and textbook numbers (references 11.02, 11.03, 11.05)."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

from balance.maths.inertia import joined, shifted
from balance.maths.solids import box, laid, rod, sphere, tube
from balance.maths.swings import (
    bifilar_inertia,
    pendulum_inertia,
    torsion_inertia,
    torsion_stiffness,
    trifilar_inertia,
    two_pivot_arm,
)

G = 9.81


class TestBicycleWheels:
    """J. K. Moore, bicycle parameter data set (moorepants/BicycleParameters @e061bc9c); READ."""

    @pytest.fixture
    def stiffness(self) -> float:
        squares = (0.0301033 / 2.0) ** 2
        calibration_rod = 4.65 / 12.0 * (3.0 * squares + 0.8355**2)
        return torsion_stiffness(calibration_rod, 0.95691904392)

    def test_the_rod_is_our_own_cylinder(self, stiffness: float) -> None:
        across = 4.65 * laid(tube(0.0301033, 0.0, 0.8355), "x")[1][2, 2]
        assert torsion_stiffness(across, 0.95691904392) == pytest.approx(stiffness, rel=1e-14)
        assert stiffness == pytest.approx(11.6733793, rel=1e-8)              # printed to nine digits

    @pytest.mark.parametrize(("period", "printed"), [(0.486888331488, 0.0700963805), (0.421156995746, 0.0524475128)])
    def test_diametral_by_torsion(self, stiffness: float, period: float, printed: float) -> None:
        assert torsion_inertia(stiffness, period) == pytest.approx(printed, rel=1e-8)      # digits printed
        assert torsion_inertia(stiffness, 1.001 * period) != pytest.approx(printed, rel=1e-4)

    @pytest.mark.parametrize(("mass", "arm", "period", "printed"), [
        (4.90, 0.2802763, 1.22756837985, 0.129341894), (1.55, 0.2957195, 1.43308791869, 0.0983720589)])
    def test_axial_by_swinging(self, mass: float, arm: float, period: float, printed: float) -> None:
        assert pendulum_inertia(mass, G, arm, period) == pytest.approx(printed, rel=1e-7)      # the arm has seven digits
        assert pendulum_inertia(mass, G, arm, 1.001 * period) != pytest.approx(printed, rel=1e-3)


class TestWorkedExamples:
    """R. S. Khurmi & J. K. Gupta, "Theory of Machines", ch. 4; Bevan, ch. 2; READ (textbook companions @d34b2ae7).

    Tolerances are the books' own roundings.
    """

    def test_4_5_compound_pendulum(self) -> None:
        assert pendulum_inertia(85.0, G, 0.1, 1.45) == pytest.approx(3.6, rel=5e-3)

    def test_4_6_hung_from_both_ends(self) -> None:
        arm = two_pivot_arm(1.0, G, 1.9, 1.65)
        assert arm == pytest.approx(0.7586, rel=1e-3)
        assert pendulum_inertia(60.0, G, arm, 1.9) == pytest.approx(6.302, rel=1e-3)
        assert pendulum_inertia(60.0, G, 1.0 - arm, 1.65) == pytest.approx(pendulum_inertia(60.0, G, arm, 1.9))
        assert two_pivot_arm(1.0, G, 1.65, 1.9) == pytest.approx(1.0 - arm)

    def test_4_7_uniform_rod_and_its_shortest_period(self) -> None:
        def along(arm: float) -> float:
            about_pivot = shifted(rod(1.2)[1], 1.0, np.array([0.0, 0.0, arm]))[0, 0]
            return float(2.0 * pi * np.sqrt(about_pivot / (G * arm)))

        assert along(0.55) == pytest.approx(1.758, rel=5e-4)
        assert pendulum_inertia(1.0, G, 0.55, along(0.55)) == pytest.approx(0.12, rel=1e-12)   # m L²/12
        shortest = minimize_scalar(along, bounds=(0.1, 0.6), method="bounded")
        assert shortest.fun == pytest.approx(1.67, rel=5e-4)

    def test_4_9_bifilar(self) -> None:
        inertia = bifilar_inertia(1.5, G, 0.12, 0.12, 1.25, 2.0)
        assert np.sqrt(inertia / 1.5) == pytest.approx(0.107, rel=1e-3)
        assert inertia == pytest.approx(0.0172, rel=3e-3)

    def test_4_10_and_4_11_trifilar(self) -> None:
        assert np.sqrt(trifilar_inertia(1.0, G, 0.25, 2.5, 3.4)) == pytest.approx(0.267, rel=5e-3)
        # the book's example gives 7 kg on three wires of 1.25 m at 0.125 m, 10 swings in 30 s
        assert trifilar_inertia(7.0, G, 0.125, 1.25, 3.0) == pytest.approx(0.196, rel=3e-3)
        assert trifilar_inertia(7.0, G, 0.125, 1.25, 3.1) != pytest.approx(0.196, rel=3e-3)

    def test_bevan_4_connecting_rod(self) -> None:
        # 150 lb, 25 in from pivot to centre of mass, g = 32.2 ft/s²: the formula knows no units
        assert pendulum_inertia(150.0, 32.2, 25.0 / 12.0, 92.5 / 50.0) == pytest.approx(221.3, rel=1e-3)


class TestStandardSolids:
    """Standard tables; DERIVED.  Tolerance: the tables' numbers are exact, ours round."""

    def test_discs_rings_and_annuli(self) -> None:
        assert 5.0 * tube(0.3, 0.0, 0.02)[1][2, 2] == pytest.approx(0.05625, rel=1e-9)
        assert 0.3 * tube(0.2, 0.2 * (1.0 - 1e-12), 0.01)[1][2, 2] == pytest.approx(0.003, rel=1e-9)
        assert 1.0 * tube(0.16, 0.08, 0.03)[1][2, 2] == pytest.approx(0.004, rel=1e-9)
        assert 1.0 * tube(0.16, 0.08, 0.03)[1][0, 0] == pytest.approx(0.002075, rel=1e-9)

    def test_rods(self) -> None:
        across = 0.4 * rod(0.6)[1]
        assert across[0, 0] == pytest.approx(0.012, rel=1e-9)
        assert shifted(across, 0.4, np.array([0.0, 0.0, 0.3]))[0, 0] == pytest.approx(0.048, rel=1e-9)

    def test_box_and_sphere(self) -> None:
        assert 2.0 * box(0.2, 0.1, 0.05)[1][2, 2] == pytest.approx(0.0083333, rel=1e-4)
        assert 1.0 * sphere(0.1)[1][1, 1] == pytest.approx(0.001, rel=1e-9)

    def test_cone_as_a_stack_of_discs(self) -> None:
        n = 4000
        radii = 0.1 * (np.arange(n) + 0.5) / n
        slices = [tube(2.0 * r, 0.0, 1.0 / n) for r in radii]
        volumes = np.array([volume for volume, _ in slices])
        masses = volumes / volumes.sum()
        centres = np.column_stack([np.zeros(n), np.zeros(n), (np.arange(n) + 0.5) / n])
        tensors = np.array([m * unit for m, (_, unit) in zip(masses, slices, strict=True)])
        _, centre, I_com = joined(masses, centres, tensors)
        assert I_com[2, 2] == pytest.approx(0.003, rel=1e-6)       # midpoint rule: error of order 1/n²
        assert centre[2] == pytest.approx(0.75, rel=1e-6)
