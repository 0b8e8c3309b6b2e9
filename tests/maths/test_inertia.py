"""Solids against numerical integration over their volume, and the parallel-axis theorem against point clouds."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.maths.inertia import about_line, axial, joined, rotated, shifted, tensor
from balance.maths.rotations import turned, unit
from balance.maths.solids import box, laid, point, rim_and_web, rod, sphere, tube

Array = NDArray[np.float64]

GRID = 5e-3
"""Midpoint integration on a 120³ grid: the staircase along a curved skin, of relative size about 1/120 and mostly
cancelling, leaves less than this of the largest number."""


def cloud_tensor(points: Array, weights: Array) -> Array:
    """Return the tensor about the origin of point masses, by its definition: xy = −∫xy dm."""
    x, y, z = points.T
    return np.array([
        [weights @ (y * y + z * z), -weights @ (x * y), -weights @ (x * z)],
        [-weights @ (x * y), weights @ (x * x + z * z), -weights @ (y * z)],
        [-weights @ (x * z), -weights @ (y * z), weights @ (x * x + y * y)],
    ])


def integrated(inside: Callable[[Array, Array, Array], Array], half: float) -> tuple[float, Array]:
    """Return volume and tensor per mass of the solid where `inside` is true, in a cube of half side `half`."""
    n = 120
    side = (np.arange(n) + 0.5) / n * 2.0 * half - half
    x, y, z = (a.ravel() for a in np.meshgrid(side, side, side, indexing="ij"))
    kept = inside(x, y, z)
    points = np.column_stack([x, y, z])[kept]
    volume = float(len(points) * (2.0 * half / n) ** 3)
    return volume, cloud_tensor(points, np.full(len(points), 1.0 / len(points)))


def radius(x: Array, y: Array) -> Array:
    return np.hypot(x, y)


SOLIDS = {
    "box": (box(1.0, 0.6, 0.3), lambda x, y, z: (abs(x) < 0.5) & (abs(y) < 0.3) & (abs(z) < 0.15), 0.5),
    "cylinder": (tube(0.8, 0.0, 0.9), lambda x, y, z: (radius(x, y) < 0.4) & (abs(z) < 0.45), 0.45),
    "tube": (tube(1.0, 0.6, 0.5), lambda x, y, z: (radius(x, y) < 0.5) & (radius(x, y) > 0.3) & (abs(z) < 0.25), 0.5),
    "rim and web": (rim_and_web(1.0, 0.7, 0.5, 0.2, 0.2), lambda x, y, z: np.where(
        radius(x, y) > 0.35, (radius(x, y) < 0.5) & (abs(z) < 0.25), (radius(x, y) > 0.1) & (abs(z) < 0.1)), 0.5),
    "sphere": (sphere(1.0), lambda x, y, z: x * x + y * y + z * z < 0.25, 0.5),
    "tube along x": (laid(tube(1.0, 0.6, 0.5), "x"),
                     lambda x, y, z: (radius(y, z) < 0.5) & (radius(y, z) > 0.3) & (abs(x) < 0.25), 0.5),
    "cylinder along y": (laid(tube(0.6, 0.0, 1.0), "y"), lambda x, y, z: (radius(x, z) < 0.3) & (abs(y) < 0.5), 0.5),
}


@pytest.mark.parametrize("name", SOLIDS)
def test_solid_equals_its_integral(name: str) -> None:
    (volume, unit_tensor), inside, half = SOLIDS[name]
    counted, summed = integrated(inside, half)
    assert counted == pytest.approx(volume, rel=GRID)
    assert np.abs(summed - unit_tensor).max() < GRID * unit_tensor.max()


def test_a_tube_laid_the_wrong_way_misses_its_integral() -> None:
    (_, unit_tensor), inside, half = SOLIDS["tube along x"]
    upright = laid((0.0, np.diag([unit_tensor[1, 1], unit_tensor[1, 1], unit_tensor[0, 0]])), "z")[1]
    assert np.abs(integrated(inside, half)[1] - upright).max() > 10.0 * GRID * unit_tensor.max()


def test_thin_rod_and_point_are_limits_of_solids() -> None:
    thin = tube(1e-9, 0.0, 0.7)[1]
    assert np.abs(rod(0.7)[1] - thin).max() < 1e-15          # r² of the thin tube, 1e-19, and rounding
    assert np.abs(point()[1]).max() == 0.0
    assert rod(0.7)[0] == point()[0] == 0.0


def cloud(rng: np.random.Generator) -> tuple[Array, Array]:
    return rng.normal(size=(40, 3)), rng.uniform(0.1, 2.0, 40)


def test_joined_bodies_equal_the_cloud_of_all_their_points() -> None:
    rng = np.random.default_rng(3)
    masses, centres, tensors, points, weights = [], [], [], [], []
    for _ in range(6):
        p, w = cloud(rng)
        com = w @ p / w.sum()
        masses.append(w.sum()), centres.append(com), tensors.append(cloud_tensor(p - com, w))
        points.append(p), weights.append(w)
    mass, com, I_com = joined(np.array(masses), np.array(centres), np.array(tensors))
    p, w = np.concatenate(points), np.concatenate(weights)
    wanted_com = w @ p / w.sum()
    wanted = cloud_tensor(p - wanted_com, w)
    # sums of 240 terms: rounding of a few hundred units in the last place
    assert mass == pytest.approx(w.sum(), rel=1e-13)
    assert com == pytest.approx(wanted_com, abs=1e-13)
    assert np.abs(I_com - wanted).max() < 1e-13 * wanted.max()


def test_shift_and_line_follow_the_parallel_axis_theorem() -> None:
    rng = np.random.default_rng(4)
    p, w = cloud(rng)
    com = w @ p / w.sum()
    I_com = cloud_tensor(p - com, w)
    place, direction = rng.normal(size=3), unit(rng.normal(size=3))
    assert np.abs(shifted(I_com, w.sum(), com - place) - cloud_tensor(p - place, w)).max() < 1e-12 * I_com.max()
    arms = np.cross(p - place, direction)
    wanted = float(w @ np.einsum("ni,ni->n", arms, arms))
    assert about_line(I_com, w.sum(), com - place, direction) == pytest.approx(wanted, rel=1e-13)
    assert about_line(I_com, w.sum(), 0.9 * (com - place), direction) != pytest.approx(wanted, rel=1e-3)


def test_rotated_tensor_equals_the_rotated_cloud() -> None:
    rng = np.random.default_rng(5)
    p, w = cloud(rng)
    R = turned(0.3, -0.7, 1.9)
    wanted = cloud_tensor(p @ R.T, w)
    assert np.abs(rotated(cloud_tensor(p, w), R) - wanted).max() < 1e-13 * wanted.max()
    assert np.abs(rotated(cloud_tensor(p, w), R.T) - wanted).max() > 1e-3 * wanted.max()


def test_axial_tensor_is_the_rotated_diagonal() -> None:
    R = turned(0.4, 0.2, -1.0)
    wanted = rotated(tensor(2.0, 2.0, 3.0), R)
    assert np.abs(axial(3.0, 2.0, R[:, 2]) - wanted).max() < 1e-14      # rounding of O(1) numbers


def test_nothing_has_its_centre_at_the_origin() -> None:
    mass, com, _ = joined(np.zeros(1), np.ones((1, 3)), np.zeros((1, 3, 3)))
    assert mass == 0.0
    assert com == pytest.approx([0.0, 0.0, 0.0], abs=0.0)
