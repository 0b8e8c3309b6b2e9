"""What must hold between the values of a design file."""

from __future__ import annotations

from pathlib import Path

import pytest

from balance.base.errors import InputError
from balance.goal.read import read_goal, stance_problem

BENCH = Path("designs/bench-rig.yaml")


def problems(tmp_path, *edits):
    text = BENCH.read_text(encoding="utf-8")
    for old, new in edits:
        assert old in text, old
        text = text.replace(old, new, 1)
    path = tmp_path / "d.yaml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        read_goal(str(path))
    return caught.value.problems


@pytest.mark.parametrize("path", sorted(Path("designs").glob("*.yaml")), ids=lambda p: p.name)
def test_shipped_designs_are_read(path):
    assert read_goal(str(path)).design == path.stem


@pytest.mark.parametrize(("old", "new", "key", "says"), [
    ("latency: 2 ms", "latency: 2 s", "loop.latency", "samples"), ("law: lqr", "law: lqg", "control", "did you mean"),
    (", torque: 0.7 N*m}", "}", "control.allow", "torque"),
    ("control:\n  law: lqr\n", "control:\n  law: lqr\n  weights: {states: [1, 1, 1], input: 1}\n",
     "control.weights", "exactly one"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{for: 5 s}", "trials.shove", "nothing happens"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{push: {impulse: 0.25 N*s, height: 300 mm, from: 9 s}}",
     "trials.shove.push.from", "less than the trial's length"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{swing: {peak: 1 N*m}}", "trials.shove.swing", "points"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{swing: {points: [[0 s, 0 N*m], [0 s, 1 N*m]]}}",
     "trials.shove.swing.points", "later"),
    ("gain_margin_lower: 0.6", "gain_margin_lower: 1.6", "require.gain_margin_lower", "less than 1"),
    ("loop: {rate", "estimator: {kind: complementary, crossover: 400 Hz}\nloop: {rate",
     "estimator.crossover", "half the loop"),
    ("height: 300 mm}", "height: 300 mm, toward: up}", "trials.shove.push.toward", "outward")])
def test_each_rule(tmp_path, old, new, key, says):
    found = problems(tmp_path, (old, new))
    assert any(p.key.startswith(key) and says in str(p) and p.line > 0 for p in found), [str(p) for p in found]


def test_a_stance_that_does_not_exist_names_the_nearest():
    goal = read_goal("designs/scout-wheels.yaml")
    assert stance_problem(goal, ["on-left-right"]) is None           # the file says `every`
    from dataclasses import replace
    problem = stance_problem(replace(goal, stance="on-left-rigth"), ["on-left-right", "on-fore-left"])
    assert problem is not None
    assert "on-left-right" in problem.hint
