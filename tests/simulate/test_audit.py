"""The audit: what it finds where steps are short enough, and where they are not."""

from __future__ import annotations

import math

import pytest

from balance.api.audit import audit, json_audit
from balance.api.gains import gains
from balance.api.load import load
from balance.cli.show_audit import show_audit
from balance.simulate import audit as audits
from balance.simulate.run import run_one


@pytest.fixture(scope="module")
def short():
    job = load("designs/bench-rig-short.yaml")
    return job, gains(job)


def test_trials_hang_on_no_step(short):
    """Trials that meet every limit and fall: lean differs by 8e-8 rad, momentum by 1.5e-6 of its capacity at the end of
    a fall, where the unstable pole has made most of it; ten times that is allowed."""
    job, designs = short
    found = audit(job, designs)
    assert len(found) == 8
    assert all(a.same_verdict for a in found)
    assert any(a.verdict != "recovered" for a in found)
    assert all(0.0 < a.lean < 1e-6 and a.momentum < 2e-5 for a in found)


def test_steps_that_are_too_long_are_found(short, monkeypatch):
    """The twin: in steps eight times too long it is fifty times more (limits are kinks: less than order four)."""
    job, designs = short
    fine = max(a.lean for a in audit(job, designs))

    def coarse(design, goal, name, trial, toward, record, finer=0.125):
        return run_one(design, goal, name, trial, toward, record, finer=finer)

    monkeypatch.setattr(audits, "run_trials", lambda design, goal, machine, record: tuple(
        coarse(design, goal, name, trial, toward, record) for name, trial in goal.trials.items()
        for toward in audits.directions(trial)))
    assert max(a.lean for a in audit(job, designs)) > 50.0 * fine


def test_what_is_said_names_what_changes():
    same = audits.Audit("shove", "line", "outward", 1e-9, 2e-8, "recovered", "recovered")
    other = audits.Audit("gust", "line", "inward", 0.01, 0.02, "recovered", "fell inward")
    assert "all the same" in show_audit((same,))
    assert f"{math.degrees(1e-9):.1e}°" in show_audit((same,))
    text = show_audit((same, other))
    assert "1 change" in text
    assert "gust inward (line): recovered; in finer steps: fell inward" in text
    told = json_audit((same, other))["audit"]
    assert [t["same_verdict"] for t in told] == [True, False]
    assert told[1]["momentum_difference"] == 0.02


def test_the_command_adds_it_to_its_answer(command):
    plain, more = (command("recover", "designs/bench-rig.yaml", "--json", *words).answer() for words in ((), ("--audit",)))
    assert "audit" not in plain
    assert len(more["audit"]) == len(more["trials"])
    assert {k: v for k, v in more.items() if k != "audit"} == plain
