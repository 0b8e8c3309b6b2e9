"""Columns of closed forms against the plant that the same candidate really makes, one by one."""

import numpy as np
import pytest

from balance.api.load import load
from balance.plant.build import build_plant
from balance.size.candidate import added_mass
from balance.size.closed import discounted, margin, seen
from balance.size.grid import grid
from balance.size.parts import read_parts
from balance.size.question import question
from balance.size.search import survey
from balance.size.trim import built, smaller
from balance.stance.build import build_stance

DESIGNS = ("bench-rig", "scout-wheels", "quay-gyros")


@pytest.fixture(scope="module", params=DESIGNS)
def asked(request):
    job = load(f"designs/{request.param}.yaml")
    return question(job.machine, job.goal, job.stances, read_parts(job.goal))


def some(columns, seed):
    rng = np.random.default_rng(seed)
    return rng.choice(len(columns), 6, replace=False)


@pytest.mark.parametrize("family", ["reaction wheel", "scissored pair", "gimballed flywheel"])
def test_columns_are_what_the_plant_says(asked, family):
    columns = grid(family, asked.sizing, asked.parts, asked.machine.supply, asked.count)
    assert len(columns) > 100_000
    for i in some(columns, 3):
        candidate = columns.take(i)
        machine = built(candidate, asked)
        assert added_mass(candidate, asked.parts, asked.count) == pytest.approx(columns.added[i], rel=1e-12)
        for line in asked.lines:
            plant = build_plant(machine, build_stance(machine, line.name))
            s = seen(line, columns, asked.count)
            assert s.mass[i] == pytest.approx(plant.stance.mass, rel=1e-9)
            # wheels keep their own places, a pair stands half its spacing either side: the columns put all at the centre
            within = 0.04
            assert s.pole[i] == pytest.approx(plant.pole, rel=within)
            can = discounted(columns, asked.parts, asked.machine, line, np.full(len(columns), plant.pole), asked.count)[i]
            # the same pole on both sides: what is left is the motor's line, its gear and the gimbal's integral
            assert can == pytest.approx(plant.bounds.lean * plant.inertia_free * plant.pole, rel=1e-6)
            assert can != pytest.approx(1.01 * plant.bounds.lean * plant.inertia_free * plant.pole, rel=1e-6)


def test_more_momentum_can_more_and_weighs_more(asked):
    for family in asked.sizing.families:
        one = survey(asked, family)
        if not len(one.enough):
            continue
        candidate = one.grid.take(int(one.enough[0]))
        less = smaller(candidate, 0.7)
        assert less.length * less.diameter**4 * less.speed < candidate.length * candidate.diameter**4 * candidate.speed
        assert added_mass(less, asked.parts, asked.count) <= added_mass(candidate, asked.parts, asked.count)


def test_a_harder_goal_leaves_fewer(asked):
    from dataclasses import replace

    family = asked.sizing.families[1]
    columns = grid(family, asked.sizing, asked.parts, asked.machine.supply, asked.count)
    loose = margin(columns, asked.parts, asked.machine, asked.goal, asked.lines)[0]
    hard = replace(asked.goal, size=replace(asked.sizing, safety=2.0))
    tight = margin(columns, asked.parts, asked.machine, hard, asked.lines)[0]
    assert (tight <= loose).all()
    assert (tight >= 1.0).sum() < (loose >= 1.0).sum()
