"""A made-up machine that differs from its CAD, put on a made-up bench: the bench must find it, and know how well."""

from __future__ import annotations

from dataclasses import replace
from math import pi, sqrt

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.machine.machine import Machine
from balance.machine.solids import Box, Part
from balance.maths.inertia import rotated
from balance.maths.rotations import turned, unit
from balance.maths.swings import bifilar_inertia
from balance.maths.uncertainty import propagated
from balance.maths.weighing import weighed_centre
from balance.stance.build import build_stance
from balance.stance.measured import Bench, Moment, corrected, correction, disagreements, measured_stance, pole
from balance.stance.record import Stance
from tests.stance.machines import FEET, on_circle, pair, rig, three_legged

Array = NDArray[np.float64]

ROUNDING = 1e-12
NOTHING = Bench(np.nan, 0.0, np.full(3, np.nan), np.zeros(3), ())


def as_built(machine: Machine) -> Machine:
    """Return the machine with a harness that CAD forgot."""
    assert machine.body is not None
    harness = Part(mass=0.18, solid=Box((0.1, 0.05, 0.04)), at=(0.03, -0.04, -0.05), turn=(0.2, 0.1, 0.4))
    return replace(machine, body=dict(machine.body) | {"harness": harness})


def trunk_masses(s: Stance) -> tuple[Array, Array]:
    """Return centre of mass and tensor in the trunk's axes."""
    return s.R_WT.T @ (s.com_W - s.p_WT), rotated(s.I_com_W, s.R_WT.T)


def perfect_bench(s: Stance) -> Bench:
    """Return everything a bench could tell, without error."""
    centre, I_T = trunk_masses(s)
    axes = [unit(a) for a in ([1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 0], [1, 0, 1], [0, 1, 1])]
    return Bench(s.mass, 1e-3, centre, np.full(3, 5e-4), tuple(Moment(a, float(a @ I_T @ a), 1e-4) for a in axes))


def test_a_full_bench_turns_cad_into_the_built_machine() -> None:
    cad = build_stance(three_legged(), "without-fore")
    built = build_stance(as_built(three_legged()), "without-fore")
    found = measured_stance(cad, perfect_bench(built))
    for name in ("mass", "height", "offset", "inertia_locked"):
        assert getattr(found, name) == pytest.approx(getattr(built, name), rel=ROUNDING)
        assert getattr(cad, name) != pytest.approx(getattr(built, name), rel=1e-4)
    assert np.abs(found.I_com_W - built.I_com_W).max() < ROUNDING * built.I_com_W.max()


def test_the_trunk_carries_the_difference_into_every_other_stance() -> None:
    plain = three_legged()
    cad, built = build_stance(plain, "without-fore"), build_stance(as_built(plain), "without-fore")
    carried = correction(cad, measured_stance(cad, perfect_bench(built)))
    assert carried.mass == pytest.approx(0.18, rel=1e-11)              # a difference of numbers twenty times as large
    for name in ("without-left", "without-right"):
        found = corrected(build_stance(plain, name), carried)
        wanted = build_stance(as_built(plain), name)
        assert found.inertia_locked == pytest.approx(wanted.inertia_locked, rel=ROUNDING)
        assert found.offset == pytest.approx(wanted.offset, rel=ROUNDING)
        assert found.height == pytest.approx(wanted.height, rel=ROUNDING)


def test_nothing_measured_changes_nothing() -> None:
    cad = build_stance(three_legged(), "without-fore")
    assert measured_stance(cad, NOTHING).inertia_locked == pytest.approx(cad.inertia_locked, rel=ROUNDING)
    assert disagreements(three_legged(), cad, NOTHING) == ()


def test_disagreement_says_what_it_does_to_the_pole() -> None:
    machine = three_legged()
    cad = build_stance(machine, "without-fore")
    bench = perfect_bench(cad)
    heavier = replace(NOTHING, centre_T=np.array([np.nan, np.nan, bench.centre_T[2] + 0.004]),
                      centre_uncertainty=np.full(3, 5e-4), mass=1.02 * cad.mass, mass_uncertainty=0.2)
    mass, centre = disagreements(machine, cad, heavier)
    assert (mass.quantity, mass.unit, mass.beyond) == ("mass", "kg", False)     # 82 g of 200 g
    assert (centre.quantity, centre.beyond) == ("centre z", True)               # 4 mm of ½ mm
    alone = measured_stance(cad, replace(NOTHING, centre_T=heavier.centre_T))
    assert centre.pole_change == pytest.approx(pole(machine, alone) / pole(machine, cad) - 1.0, rel=1e-12)
    # mass alone: G grows by 2 %, J only by the part that is m h²
    arm = cad.height**2 + cad.offset**2
    free = pole(machine, cad) ** -2 * cad.mass * cad.gravity * sqrt(arm)
    assert mass.pole_change == pytest.approx(sqrt(1.02 / (1.0 + 0.02 * cad.mass * arm / free)) - 1.0, rel=1e-9)
    assert mass.pole_change > 0.0


def test_inertia_measured_larger_slows_the_fall() -> None:
    machine = three_legged()
    cad = build_stance(machine, "without-fore")
    across = unit(cad.R_WT.T @ cad.e_W)
    now = float(across @ trunk_masses(cad)[1] @ across)
    (found,) = disagreements(machine, cad, replace(NOTHING, moments=(Moment(across, now + 0.02, 0.005),)))
    assert found.beyond
    assert found.cad == pytest.approx(now, rel=ROUNDING)
    G = cad.mass * cad.gravity * np.hypot(cad.height, cad.offset)
    free = G / pole(machine, cad) ** 2
    assert found.pole_change == pytest.approx(sqrt(free / (free + 0.02)) - 1.0, rel=1e-9)


def test_pole_of_a_lumped_machine_is_written_in_its_file() -> None:
    machine = rig()
    assert pole(machine, build_stance(machine, "line")) == pytest.approx(sqrt(3.2 * 9.80665 * 0.28 / 0.33), rel=ROUNDING)


def test_pole_of_a_pair_leaves_its_spin_out() -> None:
    lying = replace(pair(False), spin_axis=(0.0, 1.0, 0.0), gimbal_axis=(1.0, 0.0, 0.0))
    machine = three_legged(stabilisers={"gyros": lying})
    stance = build_stance(machine, "without-fore")               # the line runs along y, as both spins do
    G = stance.mass * stance.gravity * np.hypot(stance.height, stance.offset)
    free = G / pole(machine, stance) ** 2
    rim, web = (0.075**2 - 0.06**2) * 0.014, (0.06**2 - 0.004**2) * 0.003
    spin = 0.42 / (rim + web) * (rim * (0.075**2 + 0.06**2) + web * (0.06**2 + 0.004**2)) / 2.0
    assert stance.inertia_locked - free == pytest.approx(2.0 * spin, rel=1e-10)       # a small difference of two numbers


def test_weighing_and_swinging_the_scout_finds_it_within_its_uncertainty() -> None:
    """Weigh level and nose-up on three scales of 5 g, hang on two wires and time 20 swings to 0.1 s, 40 times over."""
    rng = np.random.default_rng(13)
    machine = three_legged()
    built = build_stance(as_built(machine), "without-fore")
    centre, I_T = trunk_masses(built)
    feet_T = np.array([built.R_WT.T @ (np.array(on_circle(0.25, a)) - built.p_WT) for a in FEET.values()])
    tilt, sigma_tilt, sigma_load = -0.25, 1e-3, 5e-3

    def loads(angle: float) -> Array:
        R = turned(0.0, angle, 0.0)
        feet, com = feet_T @ R.T, R @ centre
        return np.linalg.solve(np.vstack([np.ones(3), feet[:, :2].T]), built.mass * np.array([1.0, *com[:2]]))

    def found_centre(x: Array) -> Array:
        turns = np.array([np.eye(3), turned(0.0, x[6], 0.0)])
        return weighed_centre(feet_T, turns, x[:6].reshape(2, 3))[1]

    sigma = np.array([sigma_load] * 6 + [sigma_tilt])
    true = np.array([*loads(0.0), *loads(tilt), tilt])
    assert found_centre(true) == pytest.approx(centre, abs=1e-13)
    _, covariance = propagated(found_centre, true, sigma)
    spread = np.sqrt(np.diag(covariance))
    drawn = np.array([found_centre(true + sigma * rng.normal(size=7)) for _ in range(400)])
    # 400 draws know a standard deviation to 3.5 %: four of those
    assert drawn.std(axis=0) == pytest.approx(spread, rel=0.14)
    assert spread[2] > 3.0 * spread[0]                     # the height comes from the tilt: the least certain of the three

    period = 2.0 * pi * sqrt(I_T[2, 2] * 1.2 / (built.mass * 9.80665 * 0.15**2))

    def found_inertia(x: Array) -> Array:
        return np.array([bifilar_inertia(x[0], 9.80665, x[1], x[1], x[2], x[3])])

    values = np.array([built.mass, 0.15, 1.2, period])
    inertia, spread_I = propagated(found_inertia, values, np.array([sigma_load, 5e-4, 1e-3, 0.1 / 20.0]))
    assert inertia[0] == pytest.approx(I_T[2, 2], rel=ROUNDING)
    parts = np.array([sigma_load / built.mass, 2.0 * 5e-4 / 0.15, 1e-3 / 1.2, 2.0 * 0.005 / period])
    assert sqrt(spread_I[0, 0]) == pytest.approx(I_T[2, 2] * np.linalg.norm(parts), rel=1e-3)      # first order by hand
    # the harness CAD forgot is beyond what this bench can miss
    bench = replace(NOTHING, centre_T=centre, centre_uncertainty=spread)
    cad = build_stance(machine, "without-fore")
    assert any(d.beyond for d in disagreements(machine, cad, bench))
    assert not any(d.beyond for d in disagreements(as_built(machine), built, bench))
