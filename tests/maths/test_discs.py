"""Spinning discs against an independent numerical boundary-value solution of the same equations."""

import numpy as np
import pytest
from scipy.integrate import solve_bvp

from balance.maths import discs

STEEL = (7850.0, 0.29)


def numerical(thickness, slope, bore, outer, density, poisson):
    """(r, σ_r, σ_θ) at 1 rad/s: displacement form u'' + ... = 0 solved by collocation, Young's modulus 1."""
    k = 1.0 / (1.0 - poisson**2)

    def rates(r, y):
        u, s = y                                   # s = h r σ_r
        du = s / (thickness(r) * r * k) - poisson * u / r
        hoop = k * (u / r + poisson * du)
        return np.vstack([du, thickness(r) * hoop - density * r**2 * thickness(r)])

    grid = np.linspace(bore, outer, 400)
    found = solve_bvp(rates, lambda a, b: np.array([a[1], b[1]]), grid, np.zeros((2, 400)), tol=1e-9, max_nodes=200000)
    assert found.success
    r = grid
    u, s = found.sol(r)
    du = s / (thickness(r) * r * k) - poisson * u / r
    return r, s / (thickness(r) * r), k * (u / r + poisson * du)


PROFILES = {
    "taper": lambda r: 0.02 - 0.1 * r,
    "hollow ground": lambda r: 0.012 + 0.6 * (r - 0.06) ** 2,
    "exponential": lambda r: 0.03 * np.exp(-90.0 * r**2),
    "hyperbolic": lambda r: 0.0012 / (r + 0.03),
}


@pytest.mark.parametrize("name", PROFILES)
def test_arbitrary_profile_against_collocation(name):
    thickness = PROFILES[name]
    r, radial, hoop = numerical(thickness, None, 0.02, 0.12, *STEEL)
    edges, heights = discs.cut(thickness, 0.02, 0.12)
    ours = discs.stresses(edges, heights, *STEEL)
    order = np.argsort(ours.radii, kind="stable")
    # h σ_r jumps at ring edges by the thickness steps: compare at the middle of rings by averaging both sides
    unique, back = np.unique(ours.radii[order], return_inverse=True)
    count = np.bincount(back)
    mean = [np.bincount(back, part[order]) / count for part in (ours.radial, ours.hoop)]
    peak = max(radial.max(), hoop.max())
    # 1e-4 of the peak is what the issue asks for; 400 rings give about 1e-5, collocation 1e-8
    for theirs, mine in zip((radial, hoop), mean, strict=True):
        assert np.interp(r, unique, mine) == pytest.approx(theirs, abs=1e-4 * peak)
    assert ours.peak == pytest.approx(peak, rel=1e-3 if name == "hollow ground" else 5e-4)
    wrong = discs.stresses(edges, heights[::-1].copy(), *STEEL)                     # twin: the profile the wrong way round
    assert abs(wrong.peak / peak - 1.0) > 0.01


def test_rings_converge_with_the_square_of_their_number():
    thickness = PROFILES["taper"]
    hoop = [discs.stresses(*discs.cut(thickness, 0.02, 0.12, n), *STEEL).hoop[0] for n in (50, 100, 200, 6400)]
    errors = [abs(h - hoop[-1]) for h in hoop[:-1]]
    assert 3.4 < errors[0] / errors[1] < 4.6                  # a factor of 4 for each doubling, within a seventh
    assert 3.4 < errors[1] / errors[2] < 4.6


def test_one_ring_cut_into_many_is_the_same_disc():
    whole = discs.stresses(np.array([0.01, 0.1]), np.array([0.02]), *STEEL)
    cut = discs.stresses(np.linspace(0.01, 0.1, 31), np.full(30, 0.02), *STEEL)
    assert cut.peak == pytest.approx(whole.peak, rel=1e-12)   # exact in both, rounding only
    assert discs.stresses(np.linspace(0.04, 0.1, 31), np.full(30, 0.02), *STEEL).peak != pytest.approx(whole.peak, rel=1e-3)


def test_rim_and_web_balances_every_cut():
    """Equilibrium of half a wheel: ∫ h σ_θ dr = ρ ∫ h r² dr, whatever the elastic solution."""
    edges, heights = np.array([0.004, 0.06, 0.075]), np.array([0.003, 0.014])
    fine = np.concatenate([np.linspace(0.004, 0.06, 2001), np.linspace(0.06, 0.075, 1001)[1:]])
    found = discs.stresses(fine, np.where(fine[:-1] < 0.06 - 1e-9, 0.003, 0.014), *STEEL)
    inner, outer = found.hoop[0::2], found.hoop[1::2]
    ends = np.minimum(len(inner), len(outer))
    assert ends >= 3000
    # trapezium over each ring: pairs (inner, outer) stand side by side as long as no ring has an extra point
    radii = found.radii
    order = np.argsort(radii, kind="stable")
    total = np.trapezoid(found.hoop[order] * np.where(radii[order] <= 0.06, 0.003, 0.014), radii[order])
    # 3000 trapezia: 1e-4; the step at 60 mm is attributed to the web for one point of 6000
    assert total == pytest.approx(discs.mean_hoop(edges, heights, STEEL[0]) * (heights @ np.diff(edges)), rel=5e-4)


def test_mass_and_inertia_of_steps():
    mass, inertia = discs.inertia(np.array([0.0, 0.15]), np.array([0.02]), 1000.0)
    assert inertia == pytest.approx(0.5 * mass * 0.15**2, rel=1e-12)
