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
    ("height: 300 mm}", "height: 300 mm, toward: up}", "trials.shove.push.toward", "outward"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{supply: {falls_to: 0.5}}", "trials.shove", "moves nothing"),
    ("height: 300 mm}", "height: 300 mm}, missed: {samples: 2, share: 0.1}", "trials.shove.missed.share", "exactly one"),
    ("height: 300 mm}", "height: 300 mm}, missed: {}", "trials.shove.missed", "neither"),
    ("height: 300 mm}", "height: 300 mm}, missed: {samples: 2, for: 1 s}", "trials.shove.missed.for", "only with `share`"),
    ("height: 300 mm}", "height: 300 mm}, supply: {falls_to: 1.5}", "trials.shove.supply.falls_to", "less than 1"),
    ("height: 300 mm}", "height: 300 mm}, jitter: {up_to: 80 ms}", "trials.shove.jitter.up_to", "40 samples"),
    ("latency: 2 ms", "latency: 2 ms, jitter: 80 ms", "loop.jitter", "at most 20 samples"),
    ("latency: 2 ms", "latency: 2 ms, latency_tolerance: 80 ms", "loop.latency_tolerance", "at most 20 samples"),
    ("latency: 2 ms", "latency: 2 ms, command_bits: 40", "loop.command_bits", "at most 32"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{ramp: {to: 1 N*m}}", "trials.shove.ramp.for", "missing"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{payload: {mass: 0 kg, height: 300 mm}}",
     "trials.shove.payload.mass", "taken off"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{slope: {at: 0.1 s}}", "trials.shove.slope", "neither"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{slope: {across: 60 deg}}", "trials.shove.slope.across", "45 deg"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}", "{varies: {from: 0 s}}", "trials.shove.varies", "nothing that varies"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}",
     "{varies: {inertia: [[0 s, 0.1 kg*m^2], [1 s, 0.2 kg*m^2]]}}", "trials.shove.varies.inertia", "first value of 0"),
    ("{push: {impulse: 0.25 N*s, height: 300 mm}}",
     "{varies: {torque: [[1 s, 0.1 N*m], [1 s, 0.2 N*m]]}}", "trials.shove.varies.torque", "later than the last")])
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
