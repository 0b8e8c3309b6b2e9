"""`measured:` from the file to the stance: readings of a machine with a part that CAD forgot give that machine back."""

from __future__ import annotations

from dataclasses import replace
from math import pi, sqrt

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.machine.measured import Bifilar, Hanging, Measured, Trifilar, Weighing
from balance.machine.read import read_machine
from balance.maths.inertia import rotated
from balance.maths.rotations import turned
from balance.stance.bench import bench_of
from balance.stance.build import build_stance, stand
from balance.stance.compared import bench_against_cad
from tests.stance.machines import three_legged
from tests.stance.test_measured import as_built

POSE = "without-fore"
TURNS = {"down": (0.0, 0.15, 0.0), "rolled": (0.1, 0.1, 0.0), "back": (-0.1, 0.1, 0.0)}


def measured(machine, sigma=1e-3, turns=TURNS):
    """Return what a bench would read of `machine` in POSE, without error."""
    plan = machine.stances[POSE]
    s = stand(machine, POSE, plan)
    places = {**plan.down, **plan.lifted}
    feet = np.array(list(places.values()))

    def loads(turn):
        R = turned(*turn)
        x, c = feet @ R.T, R @ s.com_W
        found = np.linalg.solve(np.vstack([np.ones(3), x[:, 0], x[:, 1]]), s.mass * np.array([1.0, c[0], c[1]]))
        return dict(zip(places, found, strict=True))

    I_T, m, g = rotated(s.I_com_W, s.R_WT.T), s.mass, machine.gravity
    hang, wires = 0.4, (0.11, 0.13)
    swings = {
        "x": Hanging((1.0, 0.0, 0.0), hang, 2 * pi * sqrt((I_T[0, 0] + m * hang**2) / (m * g * hang)), 1e-4),
        "y": Bifilar((0.0, 1.0, 0.0), wires, 1.2, 2 * pi * sqrt(I_T[1, 1] * 1.2 / (m * g * wires[0] * wires[1])), 1e-4),
        "z": Trifilar((0.0, 0.0, 1.0), 0.15, 1.3, 2 * pi * sqrt(I_T[2, 2] * 1.3 / (m * g * 0.15**2)), 1e-4),
    }
    return Measured(POSE, {name: Weighing(loads(turn), sigma, turn) for name, turn in turns.items()}, swings)


def test_the_bench_gives_back_the_machine_that_was_on_it():
    """Mass, height and offset exactly, in this pose; the twin is CAD, which is off by the forgotten part."""
    cad, real = three_legged(), as_built(three_legged())
    found = build_stance(replace(cad, measured=measured(real)), POSE)
    due, plain = build_stance(real, POSE), build_stance(cad, POSE)
    for name in ("mass", "height", "offset"):
        assert getattr(found, name) == pytest.approx(getattr(due, name), rel=1e-9)
        assert getattr(plain, name) != pytest.approx(getattr(due, name), rel=1e-4)
    I_found, I_due = (rotated(s.I_com_W, s.R_WT.T) for s in (found, due))
    assert np.diag(I_found) == pytest.approx(np.diag(I_due), rel=1e-9)
    other = build_stance(replace(cad, measured=measured(real)), "without-left")    # and the trunk carries it along
    assert other.mass == pytest.approx(due.mass, rel=1e-9)


def test_uncertainty_is_propagated_as_a_thousand_drawn_benches_scatter():
    """Against Monte Carlo: 400 benches with scattered scales, standard deviation within 15 % (its own scatter is 3.5 %)."""
    cad = three_legged()
    bench = measured(cad, sigma=2e-3)
    s = stand(cad, POSE, cad.stances[POSE])
    told = bench_of(cad, bench, s)
    rng, centres = np.random.default_rng(8), []
    for _ in range(400):
        drawn = {n: replace(w, loads={f: v + 2e-3 * rng.standard_normal() for f, v in w.loads.items()})
                 for n, w in bench.weighings.items()}
        centres.append(bench_of(cad, replace(bench, weighings=drawn), s).centre_T)
    assert np.std(centres, axis=0) == pytest.approx(told.centre_uncertainty, rel=0.15)


def test_what_differs_beyond_the_uncertainty_is_told_with_its_pole():
    cad, real = three_legged(), as_built(three_legged())
    found = {d.quantity: d for d in bench_against_cad(replace(cad, measured=measured(real)))}
    assert found["mass"].beyond
    assert found["mass"].measured - found["mass"].cad == pytest.approx(0.18, rel=1e-6)
    assert found["centre z"].pole_change != 0.0
    same = bench_against_cad(replace(cad, measured=measured(cad)))                 # the twin: a machine that is as drawn
    assert same
    assert not any(d.beyond for d in same)
    assert bench_against_cad(cad) == ()


def test_a_level_weighing_alone_says_nothing_of_the_height():
    cad = three_legged()
    bench = bench_of(cad, measured(cad, turns={"level": (0.0, 0.0, 0.0)}), stand(cad, POSE, cad.stances[POSE]))
    assert np.isnan(bench.centre_T).sum() == 1


def test_wrong_benches_are_answered_with_their_place(tmp_path):
    cad = three_legged()
    bench = measured(cad)
    loads = {"hind": 1.0, **dict(list(bench.weighings["down"].loads.items())[:2])}
    strange = replace(bench, weighings={"down": Weighing(loads, 1e-3)})
    with pytest.raises(InputError, match="hind"):
        build_stance(replace(cad, measured=strange), POSE)
    quick = replace(bench, swings={"x": replace(bench.swings["x"], period=0.5)})
    with pytest.raises(InputError, match=r"measured\.swings\.x\.period"):
        build_stance(replace(cad, measured=quick), POSE)
    flat = replace(bench, swings={"z": replace(bench.swings["z"], period=3.0 * bench.swings["z"].period)})
    with pytest.raises(InputError, match="principal moments"):
        build_stance(replace(cad, measured=flat), POSE)


def test_the_shipped_example_reads_and_a_wrong_pose_does_not(root, tmp_path):
    path = root / "plants" / "trellis-scout-built.yaml"
    machine = read_machine(str(path))
    assert machine.measured is not None
    wrong = tmp_path / "m.yaml"
    text = path.read_text(encoding="utf-8").replace("pose: on-left-right", "pose: on-left-rigth")
    wrong.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        read_machine(str(wrong))
    assert caught.value.problems[0].key == "measured.pose"
    assert "on-left-right" in caught.value.problems[0].hint
