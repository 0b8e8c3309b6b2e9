"""The search over a box: finds what corners miss, tries the same points every time, and is no better than what it tried."""

from __future__ import annotations

import numpy as np

from balance.design.robustness.screen import JUDGED, quick_margins
from balance.design.robustness.search import CORNERS, first_points, search

STEP = 1.0 / 64.0
"""The last of 1/2, 1/4, … that is not below `search.LAST`."""
DISK = JUDGED.index("disk")


def bowl(centre: np.ndarray):
    """Return a smooth function whose lowest value, 1, stands at `centre`."""
    return lambda points: 1.0 + np.sum((points - centre) ** 2, axis=1, keepdims=True)


def test_a_lowest_value_inside_is_found() -> None:
    centre = np.array([0.31, -0.52, 0.07, 0.83])
    pool = search(bowl(centre), 4)
    # the last step tried is 1/64: where none of the steps helps, each coordinate is within half of it
    assert np.abs(pool.lowest(0) - centre).max() <= STEP / 2
    assert pool.values.min() <= 1.0 + 4 * (STEP / 2) ** 2
    assert bowl(centre)(first_points(4)).min() > 1.01, "the twin: the points tried at first do not hold it"


def test_several_functions_are_searched_at_once() -> None:
    a, b = np.array([1.0, 1.0, -1.0]), np.array([0.2, -0.4, 0.6])
    pool = search(lambda x: np.hstack([bowl(a)(x), bowl(b)(x)]), 3)
    assert np.array_equal(pool.lowest(0), a)
    assert np.abs(pool.lowest(1) - b).max() <= STEP / 2


def test_the_same_points_are_tried_every_time() -> None:
    one, other = (search(bowl(np.array([0.1, 0.2])), 2) for _ in range(2))
    assert np.array_equal(one.points, other.points)
    assert len(np.unique(one.points, axis=0)) == len(one.points), "nothing is tried twice"


def test_many_coordinates_do_not_make_it_endless() -> None:
    count = len(first_points(14))
    assert count <= 1 + 2 * 14 + CORNERS + 12 * 14
    assert not np.any(first_points(14)[0]), "the nominal machine comes first"


def resonant_loop(points: np.ndarray, frequency: np.ndarray) -> np.ndarray:
    """Return L (N, f): an integrator crossing at 10 rad/s, a mode of gain 0.75 at 200 rad/s, and a delay of 0 to 2π/200 s.

    Over the delay's range the mode's phase turns once around: at both ends it points away from −1 as much as at zero delay.
    """
    s = 1j * frequency
    delay = (points[:, :1] + 1.0) / 2.0 * (2.0 * np.pi / 200.0)
    crossing = 10.0 * (1.0 + 0.1 * points[:, 1:2])
    mode = 0.75 * (2.0 * 0.02 * 200.0 * s) / (s**2 + 2.0 * 0.02 * 200.0 * s + 200.0**2)
    return (crossing / s + mode) * np.exp(-s * delay)


def test_a_grid_point_on_a_pole_of_the_loop_is_no_hole() -> None:
    frequency = np.geomspace(0.1, 1500.0, 400)
    loop = resonant_loop(np.zeros((2, 2)), frequency)
    holed = loop.copy()
    holed[1, 3] = np.nan
    margins = quick_margins(holed, frequency)
    assert np.all(np.isfinite(margins[1, :3]))
    assert np.allclose(margins[0, :3], margins[1, :3])


def test_the_planted_worst_delay_lies_inside_where_no_corner_sees_it() -> None:
    """With the mode turned by half a turn L comes to about −0.75 there: modulus 0.25; at the ends of the range it is 0.7."""
    frequency = np.unique(np.concatenate([np.geomspace(0.1, 1500.0, 400), np.linspace(180.0, 220.0, 200)]))

    def values_of(points: np.ndarray) -> np.ndarray:
        return quick_margins(resonant_loop(points, frequency), frequency)

    corners = np.array([[a, b] for a in (-1.0, 1.0) for b in (-1.0, 1.0)])
    at_corners = values_of(corners)[:, DISK].min()
    pool = search(values_of, 2)
    found = pool.values[:, DISK].min()
    assert found < 0.5 * at_corners
    # a fine grid, made without the search: 0.1 % is what the step of 0.01 leaves of a quadratic bottom
    fine = np.array([[a, b] for a in np.linspace(-1.0, 1.0, 201) for b in (-1.0, 0.0, 1.0)])
    assert found <= values_of(fine)[:, DISK].min() * 1.001
    assert -0.9 < pool.lowest(DISK)[0] < 0.9, "inside the range of delay"
