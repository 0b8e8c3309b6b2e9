"""One gain set on every stance: the same torque for the same lean, rate and stored momentum; chosen by its worst stance."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from balance.api.gains import gains
from balance.api.load import load
from balance.design.records import Design
from balance.design.robustness.one_law import carried, one_law, seen_as, share

ROOT = Path(__file__).parents[2]


@cache
def designed(name: str) -> tuple[Design, ...]:
    return gains(load(str(ROOT / "designs" / f"{name}.yaml")), worst=False)


def state(design: Design, lean: float, rate: float, momentum: float) -> np.ndarray:
    """Return the measurements of a machine with this much momentum stored, shared out as its law does."""
    x = np.zeros(len(design.law.measurements))
    x[0], x[1] = lean, rate
    row = design.plant.momentum_row
    units = row.copy()
    units[:2] = 0.0
    return x + units * (momentum - row[1] * rate) / float(units @ units)


def test_crossed_wheels_get_the_same_torque_about_every_line() -> None:
    designs = designed("scout-wheels")
    source = designs[2]
    for to in designs[:2]:
        law = carried(source, to)
        for lean, rate, momentum in ((0.02, 0.0, 0.0), (0.0, 0.3, 0.0), (0.0, 0.0, 0.2)):
            asked = law.D @ state(to, lean, rate, momentum)
            assert asked == pytest.approx(source.law.D @ state(source, lean, rate, momentum), rel=1e-9)   # rounding
        assert np.array_equal(law.allotment, to.law.allotment), "shared out as this line needs"
    twin = source.law.D @ state(designs[0], 0.0, 0.0, 0.2)
    assert twin != pytest.approx(source.law.D @ state(source, 0.0, 0.0, 0.2), rel=0.05), "the row as it is does not"


def test_one_unit_keeps_its_numbers() -> None:
    designs = designed("quay-gyros")
    law = carried(designs[1], designs[0])
    assert np.array_equal(law.D, designs[1].law.D)
    assert np.array_equal(seen_as(designs[1].plant, designs[0].plant, law.measurements), np.eye(len(law.measurements)))


@pytest.mark.parametrize("name", ["scout-wheels", "quay-gyros"])
def test_no_other_stance_has_a_better_set(name: str) -> None:
    designs = designed(name)
    chosen = one_law(designs)
    assert chosen.stances == tuple(d.plant.stance.name for d in designs)
    assert [m.disk for m in chosen.own] == [d.margins.disk for d in designs]
    assert all(m.stable for m in chosen.shared)
    for source in designs:
        goal = load(str(ROOT / "designs" / f"{name}.yaml")).goal
        tried = share([replace(source), *[d for d in designs if d is not source]], goal)
        assert min(d.margins.disk for d in tried) == pytest.approx(min(m.disk for m in chosen.shared), rel=1e-6)


def test_the_design_file_can_ask_for_it_and_one_stance_alone_gets_the_same_gains() -> None:
    job = load(str(ROOT / "designs" / "scout-wheels.yaml"))
    job = replace(job, goal=replace(job.goal, control=replace(job.goal.control, one_gain_set=True)))
    every = gains(job, worst=False)
    assert len({d.law_of for d in every}) == 1
    source = next(d for d in every if d.plant.stance.name == d.law_of)
    for d in every:
        assert d.law.D[:2] @ np.array([1.0, 0.0]) == pytest.approx(source.law.D[0], rel=1e-9)
        assert d.own is not None
        assert d.margins.stable
    alone = gains(replace(job, stances=(every[0].plant.stance.name,)), worst=False)
    assert len(alone) == 1
    assert np.allclose(alone[0].law.D, every[0].law.D, rtol=1e-12)
    own = designed("scout-wheels")[0]
    assert not np.allclose(own.law.D, every[0].law.D, rtol=1e-12), "the twin: asked for nothing, each keeps its own"


def test_one_stance_has_nothing_to_compare() -> None:
    assert one_law(designed("bench-rig")) is None
    assert one_law(designed("scout-wheels")[:1]) is None
