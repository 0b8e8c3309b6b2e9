"""Weighing, propagation of uncertainty, tensor fit and hull, each by the property that defines it."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.spatial import ConvexHull

from balance.maths.hull import hull_order
from balance.maths.rotations import turned, unit
from balance.maths.tensor_fit import fitted_tensor
from balance.maths.uncertainty import propagated
from balance.maths.weighing import weighed_centre

Array = NDArray[np.float64]

CONTACTS = np.array([[0.3, 0.0, -0.4], [-0.15, 0.26, -0.4], [-0.15, -0.26, -0.38]])
CENTRE = np.array([0.02, -0.03, 0.11])
LEVEL, NOSE_UP, ON_ITS_SIDE = np.eye(3), turned(0.0, -0.2, 0.0), turned(0.15, 0.0, 0.0)


def loads_under(R: Array, mass: float) -> Array:
    """Return the three vertical forces that hold a weight at CENTRE, from the balance of moments."""
    feet, centre = CONTACTS @ R.T, R @ CENTRE
    matrix = np.vstack([np.ones(3), feet[:, 0], feet[:, 1]])
    return np.linalg.solve(matrix, mass * np.array([1.0, centre[0], centre[1]]))


@pytest.mark.parametrize("tilted", [[NOSE_UP], [ON_ITS_SIDE], [NOSE_UP, ON_ITS_SIDE]])
def test_level_and_tilted_weighing_finds_the_centre(tilted: list[Array]) -> None:
    turns = np.array([LEVEL, *tilted])
    loads = np.array([loads_under(R, 5.5) for R in turns])
    mass, centre = weighed_centre(CONTACTS, turns, loads)
    assert mass == pytest.approx(5.5, rel=1e-14)
    assert centre == pytest.approx(CENTRE, abs=1e-14)         # solving a 3 × 3 of condition 10
    off = loads.copy()
    off[-1, 0] += 0.01
    assert weighed_centre(CONTACTS, turns, off)[1] != pytest.approx(CENTRE, abs=1e-4)


def test_one_level_weighing_is_blind_to_height_and_says_so() -> None:
    _, centre = weighed_centre(CONTACTS, LEVEL[None], loads_under(LEVEL, 5.5)[None])
    assert centre[:2] == pytest.approx(CENTRE[:2], abs=1e-14)
    assert np.isnan(centre[2])


def test_propagation_is_exact_for_a_linear_formula() -> None:
    D = np.array([[1.0, -2.0, 0.5], [0.0, 3.0, 1.0]])
    sigma = np.array([0.1, 0.2, 0.0])
    values, covariance = propagated(lambda x: D @ x, np.array([1.0, 2.0, 3.0]), sigma)
    assert values == pytest.approx(D @ [1.0, 2.0, 3.0], rel=1e-15)
    assert np.abs(covariance - D @ np.diag(sigma**2) @ D.T).max() < 1e-14


def test_propagation_of_a_curved_formula_agrees_with_drawing_lots() -> None:
    rng = np.random.default_rng(7)
    values, sigma = np.array([2.0, 0.3]), np.array([0.02, 0.004])

    def formula(x: Array) -> Array:
        return np.array([x[0] ** 2 * x[1]])

    _, covariance = propagated(formula, values, sigma)
    drawn = formula((values + sigma * rng.normal(size=(200_000, 2))).T)
    # 200 000 draws know a spread to 1/√(2n) = 0.16 %; second order adds (σ/x)² = 0.02 %
    assert np.sqrt(covariance[0, 0]) == pytest.approx(drawn.std(), rel=0.006)
    assert np.sqrt(propagated(formula, values, 1.1 * sigma)[1][0, 0]) != pytest.approx(drawn.std(), rel=0.006)


def test_fitted_tensor_has_the_measured_moments_and_keeps_the_rest() -> None:
    I_com = np.array([[0.2, 0.01, -0.02], [0.01, 0.3, 0.005], [-0.02, 0.005, 0.25]])
    directions = np.array([unit([0.0, 0.0, 1.0]), unit([1.0, 1.0, 0.0])])
    moments = np.array([0.27, 0.24])
    fitted = fitted_tensor(I_com, directions, moments)
    assert np.einsum("ki,ij,kj->k", directions, fitted, directions) == pytest.approx(moments, rel=1e-14)
    assert fitted == pytest.approx(fitted.T, abs=0.0)
    across = unit([1.0, -1.0, 0.0])                     # square to all that was measured
    assert across @ fitted @ across == pytest.approx(across @ I_com @ across, rel=1e-14)


def test_fitted_tensor_is_the_nearest_one() -> None:
    rng = np.random.default_rng(8)
    I_com, n = np.diag([0.2, 0.3, 0.25]), unit([1.0, 2.0, -1.0])
    fitted = fitted_tensor(I_com, n[None], np.array([0.4]))
    least = np.linalg.norm(fitted - I_com)
    for _ in range(50):
        # any other symmetric tensor with the same moment: add one whose own moment about n is zero
        other = rng.normal(size=(3, 3)) * 0.05
        other = other + other.T
        other -= (n @ other @ n) * np.outer(n, n)
        assert np.linalg.norm(fitted + other - I_com) > least


def test_six_moments_fix_the_whole_tensor() -> None:
    rng = np.random.default_rng(9)
    true = np.array([[0.2, 0.01, -0.02], [0.01, 0.3, 0.005], [-0.02, 0.005, 0.25]])
    directions = rng.normal(size=(6, 3))
    directions /= np.linalg.norm(directions, axis=1, keepdims=True)
    moments = np.einsum("ki,ij,kj->k", directions, true, directions)
    assert np.abs(fitted_tensor(np.eye(3), directions, moments) - true).max() < 1e-12   # condition about 100


def test_hull_agrees_with_the_library() -> None:
    rng = np.random.default_rng(10)
    for n in (3, 4, 6, 12):
        points = rng.normal(size=(n, 2))
        wanted = list(ConvexHull(points).vertices)             # counter-clockwise in the plane
        found = hull_order(points)
        start = wanted.index(found[0])
        assert found == wanted[start:] + wanted[:start]


def test_points_in_one_line_have_no_hull() -> None:
    assert len(hull_order(np.array([[0.0, 0.0], [1.0, 1.0], [2.0, 2.0]]))) < 3
    assert len(hull_order(np.array([[0.0, 0.0], [1.0, 1.0], [2.0, 2.1]]))) == 3
