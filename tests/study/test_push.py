"""The bisection of what is recovered, on functions whose boundary is known, and on a rig whose best is known."""

import pytest

from balance.api.load import load
from balance.plant.build import build_plant
from balance.size.trial import unmeasured
from balance.stance.build import build_stance
from balance.study.push import boundary, largest_push


@pytest.mark.parametrize("edge", [0.02, 0.9, 1.0, 3.7, 40.0])
def test_finds_a_known_boundary(edge):
    found, runs = boundary(lambda x: x <= edge, 1.0)
    assert edge / 1.01 <= found <= edge
    assert runs < 20
    assert not edge * 1.01 <= found


def test_nothing_and_everything():
    assert boundary(lambda x: False, 1.0)[0] == 0.0
    assert boundary(lambda x: True, 1.0)[0] >= 50.0


def test_the_rig_comes_near_but_not_beyond_what_is_possible():
    job = load("designs/bench-rig.yaml")
    design = unmeasured(build_plant(job.machine, build_stance(job.machine, "line")), job.goal)
    found = largest_push(design, job.goal, "outward")
    assert 0.8 < found.impulse / found.best_possible < 1.0
