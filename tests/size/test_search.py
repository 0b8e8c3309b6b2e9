"""The search: the same front for one and two workers, going on after a stop, fronts, and what to say when nothing fits."""

from dataclasses import replace
from html import escape
from math import inf, pi
from pathlib import Path

import pytest

from balance.api.load import load
from balance.api.size import apply, size, size_page
from balance.base.errors import InputError
from balance.cli.show_size import show_size
from balance.files.document import load as load_tree
from balance.report.amounts import speed
from balance.report.sizing import best_rows, crossed, ledger_rows, ledger_words, power_rows, push_rows, shaken
from balance.size.answer import front
from balance.size.confirm import Task, confirm, from_plain, to_plain
from balance.size.rotor import rotor_check
from balance.size.trim import FINE, least


@pytest.fixture(scope="module")
def job():
    """The rig, one family and one trial: what is simulated is few."""
    whole = load("designs/bench-rig.yaml")
    return replace(whole, goal=replace(whole.goal, size=replace(whole.goal.size, families=("scissored pair",)),
                                       trials={"shove": whole.goal.trials["shove"]}))


@pytest.fixture(scope="module")
def alone(job, tmp_path_factory):
    state = tmp_path_factory.mktemp("state") / "state.jsonl"
    return size(job, 1, str(state)), state


def test_two_workers_find_what_one_does(job, alone):
    assert size(job, 2).confirmed == alone[0].confirmed
    assert all(c.passed for c in alone[0].confirmed)


def test_goes_on_after_a_stop(job, alone, tmp_path):
    found, state = alone
    lines = state.read_text(encoding="utf-8").splitlines(keepends=True)
    stopped = tmp_path / "state.jsonl"
    stopped.write_text("".join(lines[:3]) + lines[3][:40], encoding="utf-8")      # the last line cut short
    told = []
    assert size(job, 1, str(stopped), told.append).confirmed == found.confirmed
    assert sum(line.endswith("passes") for line in told) == len(found.confirmed) - 2
    other = replace(job, goal=replace(job.goal, size=replace(job.goal.size, safety=1.26)))
    assert load("designs/bench-rig.yaml").goal != other.goal
    stopped.write_text("another question\n" + "".join(lines[1:]), encoding="utf-8")
    told.clear()
    size(job, 1, str(stopped), told.append)
    assert sum(line.endswith("passes") for line in told) == len(found.confirmed)    # nothing of it was believed


def test_plain_and_back(alone):
    for c in alone[0].confirmed:
        assert from_plain(to_plain(c)) == c


def test_closed_form_and_simulated_minimum_agree(alone):
    best = alone[0].best[0]
    assert best.binding == "momentum"
    told = best.ledger
    assert told.possible == pytest.approx(1.0, abs=0.1)      # the 10 % where the controller allows it
    assert ledger_words(told) in " ".join(show_size(alone[0]).split())
    biggest = max(told.entries, key=lambda e: abs(e.ratio - 1.0))
    assert biggest.what in ledger_words(told)
    same = replace(told, entries=tuple(replace(e, simulated=e.closed) for e in told.entries))
    assert "does as well" in ledger_words(same)
    assert all(c.ledger is None for c in alone[0].confirmed if not c.binding)


def test_front_has_six_of_a_family(alone):
    assert len([c for c in alone[0].confirmed if c.passed]) >= 6


def test_page_says_what_the_terminal_says(alone, tmp_path):
    found = alone[0]
    page = Path(size_page(found, str(tmp_path))).read_text(encoding="utf-8")
    for rows in (best_rows(found), push_rows(found), power_rows(found), ledger_rows(found.best[0].ledger)):
        for row in rows:
            assert all(escape(cell) in page for cell in row)
    assert page.count("<figure>") == 1
    assert "no mode for the unbalance to meet" in page
    assert "below half the sampling rate" in page
    tight = replace(found, best=(), rotors=(), relax=())
    other = Path(size_page(tight, str(tmp_path / "tight"))).read_text(encoding="utf-8")
    assert "NOTHING FITS" in other
    assert best_rows(found)[0][1] not in other


def test_legs_that_give_meet_the_rotor(job, alone):
    """The rig on legs: the mode of the machine that was tested is what the rotor's speed is held against."""
    assert all(c.mode == inf for c in alone[0].confirmed)
    soft = load("designs/bench-rig-on-legs.yaml").machine
    asked = alone[0].question
    on_legs = replace(asked, machine=replace(asked.machine, leg_compliance=soft.leg_compliance),
                      goal=replace(asked.goal, trials={}))
    c = confirm(on_legs, Task(alone[0].confirmed[-1].candidate, False))
    assert 0.0 < c.mode < inf
    top = c.candidate.speed
    r = rotor_check(on_legs, c.candidate, 0.1, 1.0, c.mode)
    assert r.crossing == (c.mode if c.mode < top else inf)
    assert speed(c.mode) in crossed(replace(c, mode=0.5 * top), replace(r, crossing=c.mode))
    assert "always" in crossed(replace(c, mode=2.0 * top), replace(r, crossing=inf))


def test_vibration_that_the_loop_cannot_see(alone):
    c, r, found = alone[0].best[0], alone[0].rotors[0], alone[0]
    fast = replace(c, candidate=replace(c.candidate, speed=2.0 * pi * 480.0))
    assert "480 Hz, which sampling shows as 20.0 Hz" in shaken(fast, replace(r, seen_at=20.0, imu_share=0.125), found)
    assert "12 % of the accelerometer's range" in shaken(fast, replace(r, seen_at=20.0, imu_share=0.125), found)


def test_front_is_what_nothing_beats(alone):
    good = alone[0].confirmed
    kept = front(good, lambda c: -c.push)
    for c in good:
        beaten = any((o.added <= c.added and o.push > c.push) or (o.added < c.added and o.push >= c.push) for o in good)
        assert (c in kept) is not beaten


def test_never_over_a_file(alone, tmp_path):
    path = tmp_path / "mine.yaml"
    apply(alone[0], alone[0].best[0], str(path))
    before = path.read_text(encoding="utf-8")
    with pytest.raises(InputError, match="never overwritten"):
        apply(alone[0], alone[0].best[0], str(path))
    assert path.read_text(encoding="utf-8") == before
    assert load_tree(str(path))


def test_nothing_fits_and_what_to_relax(job):
    tight = replace(job.goal.size, space=replace(job.goal.size.space, diameter=0.035, length=0.004))
    found = size(replace(job, goal=replace(job.goal, size=tight)))
    assert not found.passed
    assert {r.what for r in found.relax} >= {"rotor diameter", "of every trial"}
    nearest = found.relax[0]
    assert nearest.factor != 1.0
    text = show_size(found)
    assert "NOTHING FITS" in text
    assert nearest.words() in " ".join(text.split())


def test_the_answer_in_words(alone):
    text = show_size(alone[0])
    for words in ("needed about", "limited by", "Caution: Burst", "Local codes", "front of mass"):
        assert words in text
    assert f"{alone[0].best[0].binding}:" in text
    assert "NOTHING FITS" not in text


def test_without_a_section_and_with_a_wrong_part(job):
    with pytest.raises(InputError, match="key is missing"):
        size(replace(job, goal=replace(job.goal, size=None)))
    with pytest.raises(InputError, match="at least one trial"):
        size(replace(job, goal=replace(job.goal, trials={})))
    with pytest.raises(InputError, match="replaced_mass"):
        size(replace(job, goal=replace(job.goal, size=replace(job.goal.size, replaces=("stator",)))))


@pytest.mark.parametrize("edge", [0.15, 0.5, 0.93, 1.3])
@pytest.mark.parametrize("guess", [0.2, 0.5, 1.2])
def test_least_finds_a_known_edge(edge, guess):
    found = least(lambda x: x >= edge, guess)
    assert edge <= found <= edge * (1 + FINE) * 1.001
    assert least(lambda x: False, guess) is None
