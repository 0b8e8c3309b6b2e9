"""The drawing's geometry: hulls, solids and axes flattened where they are."""

from __future__ import annotations

from dataclasses import replace
from math import pi, radians

import numpy as np
import pytest

from balance.machine.solids import Box, Part, PointMass, RoundSize, Sphere
from balance.machine.solids import Cylinder as FullCylinder
from balance.machine.stabilisers import Rotor
from balance.report.figures.machine import draw_machine
from balance.report.outline import outline
from balance.report.shapes import hull, part_points, rotor_points, solid_points
from balance.stance.statics import statics_of


def area(outline: np.ndarray) -> float:
    x, y = outline.T
    return 0.5 * float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))


def test_hull_holds_every_point_and_turns_left():
    rng = np.random.default_rng(3)
    for _ in range(30):
        points = rng.normal(size=(40, 2))
        found = hull(points)
        assert area(found) > 0.0
        edges = np.roll(found, -1, axis=0) - found
        for start, edge in zip(found, edges, strict=True):
            off = points - start
            assert np.min(edge[0] * off[:, 1] - edge[1] * off[:, 0]) > -2e-6     # corners are rounded to 1e-6


@pytest.mark.parametrize(("points", "corners"), [([[0, 0], [1, 1], [2, 2]], 2), ([[1, 1]], 1), ([], 0)])
def test_hull_of_what_has_no_area(points, corners):
    assert len(hull(np.array(points, dtype=float).reshape(-1, 2))) == corners


def test_shadows_of_solids():
    """A box's shadow is its side, a ball's a circle (a polygon of 48 sides is 0.3 % smaller)."""
    assert area(hull(solid_points(Box((0.2, 0.1, 0.05)))[:, :2])) == pytest.approx(0.02, rel=1e-6)
    assert area(hull(solid_points(Sphere(0.2))[:, :2])) == pytest.approx(pi * 0.01, rel=4e-3)
    assert area(hull(solid_points(Sphere(0.2))[:, 1:])) == pytest.approx(pi * 0.01, rel=2e-2)      # 9 rings
    assert area(hull(solid_points(FullCylinder(RoundSize(0.3, 0.1, "x")))[:, :2])) == pytest.approx(0.03, rel=1e-3)
    assert solid_points(PointMass()).shape == (1, 3)


def test_turned_and_placed_part():
    part = Part(mass=1.0, solid=Box((0.2, 0.1, 0.05)), at=(1.0, 2.0, 3.0), turn=(0.0, 0.0, radians(90)))
    points = part_points(part)
    assert points.mean(axis=0) == pytest.approx([1.0, 2.0, 3.0])
    assert np.ptp(points, axis=0) == pytest.approx([0.1, 0.2, 0.05])        # yaw by 90° swaps x and y


def test_centre_of_mass_stands_over_the_line_at_the_balanced_lean(answered):
    design = answered("scout-wheels", "on-fore-left").designs[0]
    stance = replace(design.plant.stance, offset=0.02)
    plant = replace(design.plant, stance=stance, balanced_lean=-np.arctan2(0.02, stance.height))
    side = outline(answered("scout-wheels", "on-fore-left").machine, stance, plant).side
    assert side.centre == pytest.approx([20.0, 1e3 * stance.height])
    assert side.balanced == pytest.approx([0.0, 1e3 * np.hypot(0.02, stance.height)], abs=1e-9)


def test_wheels_lie_across_their_axes(answered):
    result = answered("scout-wheels", "on-fore-left")
    design = result.designs[0]
    for unit in design.plant.units:
        (points,) = rotor_points(result.machine.stabilisers[unit.name], unit)
        along = (points - unit.at_T) @ unit.axis_T
        across = np.linalg.norm(points - unit.at_T - np.outer(along, unit.axis_T), axis=1)
        assert np.ptp(along) == pytest.approx(0.014)        # the rim's length and radius in the machine file
        assert np.max(across) == pytest.approx(0.075)


def test_a_pair_has_two_rotors_the_spacing_apart(answered):
    result = answered("quay-gyros", "on-left-right")
    (unit,) = result.designs[0].plant.units
    one, other = rotor_points(result.machine.stabilisers["gyros"], unit)
    assert np.linalg.norm(one.mean(axis=0) - other.mean(axis=0)) == pytest.approx(0.170)


def test_a_rotor_of_stated_inertia_is_drawn_as_the_disc_of_that_inertia(answered):
    result = answered("scout-wheels", "on-fore-left")
    unit = replace(result.designs[0].plant.units[0], inertia=0.01)
    stated = replace(result.machine.stabilisers["long-wheel"], rotor=Rotor(mass=2.0, spin=0.01))
    (points,) = rotor_points(stated, unit)
    assert np.max(np.linalg.norm(points - unit.at_T, axis=1)) == pytest.approx(0.1)     # ½ m r² = 0.01 with m = 2
    assert rotor_points(replace(stated, rotor=Rotor(spin=0.01)), unit) == []


def test_only_feet_that_are_there(answered):
    """Two legs have no triangle; a machine of three numbers has no legs; both draw."""
    result = answered("bench-rig", "line")
    plant = result.designs[0].plant
    drawing = outline(result.machine, plant.stance, plant)
    assert len(drawing.top.polygon) < 3
    assert drawing.top.legs == ()
    assert len(outline(result.machine, plant.stance, None).top.axles) == 0
    three = answered("scout-wheels", "on-fore-left")
    stance = three.designs[0].plant.stance
    standing = outline(three.machine, stance, three.designs[0].plant)
    assert len(standing.top.polygon) == 3
    found = statics_of(three.machine, stance)
    assert (standing.margin, standing.shift) == (1e3 * found.support.margin, 1e3 * found.shift.distance)
    assert np.isnan([drawing.margin, drawing.shift]).all()
    for plants in ([], [three.designs[0].plant]):
        assert len(draw_machine(three.machine, [stance], plants).axes) == 2
    with pytest.raises(ValueError, match="no stance"):
        draw_machine(three.machine, [], [])
