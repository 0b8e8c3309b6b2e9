"""What `balance size --apply` wrote for the three scenarios: each passes the check unchanged, and its twin does not.

The machine files in `sized/` were written by the program (tests/size/write_sized.py writes them anew).  The twin: the
quantity that binds, divided by the safety factor and five per cent more, makes the machine fail.
"""

from dataclasses import replace
from pathlib import Path

import pytest

from balance.api.check import check
from balance.api.load import Job, load
from balance.machine.read import read_machine
from balance.machine.stabilisers import ReactionWheel
from balance.size.trial import hardest, nominal, quick, thorough

SIZED = sorted((Path(__file__).parent / "sized").glob("*.yaml"))
DESIGNS = ("bench-rig", "quay-gyros", "scout-wheels")


def job_of(path):
    design = next(d for d in DESIGNS if path.stem.startswith(d))
    return load(f"designs/{design}.yaml"), read_machine(str(path))


def less_momentum(machine, factor):
    """The same machine with its stabilisers' momentum divided: by the wheel's speed limit, the flywheel's spin."""
    units = {n: replace(s, speed_limit=s.speed_limit / factor) if isinstance(s, ReactionWheel)
             else replace(s, spin_speed=s.spin_speed / factor) for n, s in machine.stabilisers.items()}
    return replace(machine, stabilisers=units)


def test_every_scenario_and_family_is_there():
    assert len(SIZED) == 9


@pytest.mark.parametrize("path", SIZED, ids=lambda p: p.stem)
def test_passes_on_every_stance_and_its_twin_fails(path):
    """Margins and every trial on every stance, tolerances left out; the twin on the trials that are hardest."""
    job, machine = job_of(path)
    assert "momentum binds" in path.read_text(encoding="utf-8")
    goal, safety = nominal(job.goal), job.goal.size.safety
    whole = thorough(machine, goal, job.stances)
    assert whole.passed, whole.failed
    pairs = hardest(whole, 2)
    # nothing is asked of the twin that the file as it stands does not meet with the safety factor alone taken off; 1 %
    # of room: the least momentum is looked for to 1.2 %
    assert quick(less_momentum(machine, 0.99 * safety), goal, pairs).passed
    twin = quick(less_momentum(machine, 1.05 * safety), goal, pairs)
    assert not twin.passed
    assert any("momentum" in words or "fell" in words or "did not settle" in words for words in twin.failed)


@pytest.mark.parametrize("stem", ["bench-rig-gimballed-flywheel", "bench-rig-reaction-wheel", "bench-rig-scissored-pair",
                                  "quay-gyros-scissored-pair", "scout-wheels-reaction-wheel"])
def test_passes_the_whole_check_unchanged(stem):
    """Tolerances and worst cases included, on the first stance: all nine on every stance take minutes."""
    path = next(p for p in SIZED if p.stem == stem)
    job, machine = job_of(path)
    result = check(Job(machine, job.goal, job.stances[:1]))
    assert result.passed, [(v.name, v.value, v.limit) for v in result.verdicts if not v.passed]
