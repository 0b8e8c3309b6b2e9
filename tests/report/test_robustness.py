"""The words of tolerances: ranges, worst cases, one gain set, a pair's mismatch; grouped verdicts."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from balance.api.gains import gains
from balance.api.load import load
from balance.check.records import Verdict
from balance.design.records import Range, Retuning
from balance.design.robustness.one_law import OneLaw, one_law
from balance.machine.tolerances import PairMismatch, Tolerances
from balance.maths.rotations import turned
from balance.report.robustness import across_words, one_law_words, retuned_words, within, worst_table
from balance.report.subjects import grouped, subject_of, to_spare


def test_ranges_are_told_with_their_units(answered) -> None:
    found = answered("bench-rig", "line").designs[0].robustness
    ranges = (Range("mass", -0.03, 0.03, ""), Range("height", -0.005, 0.005, "m"), Range("latency", -3e-4, 8e-4, "s"),
              Range("pair_angle", -0.02, 0.02, "rad"))
    said = within(replace(found, ranges=ranges)).replace("\u00a0", " ")
    assert said == "Within mass ±3 %, height ±5 mm, latency −0.3 ms to +0.8 ms, pair angle ±1.15°."
    later = within(replace(found, ranges=(Range("latency", 0.0, 5e-4, "s"),))).replace("\u00a0", " ")
    assert later == "Within latency up to +0.5 ms."


def test_the_table_holds_every_margin_and_names_what_is_lost(answered) -> None:
    design = answered("scout-wheels", "on-fore-left").designs[0]
    table = worst_table(design)
    assert len(table.rows) == len(design.robustness.cases) == 6
    assert all(row.cells[2] not in ("", "the machine as stated") for row in table.rows)
    assert "all stable" in table.caption
    lost = replace(design.robustness, stable=False,
                   cases=tuple(replace(c, value=math.nan) for c in design.robustness.cases))
    table = worst_table(replace(design, robustness=lost))
    assert "NOT all stable" in table.caption
    assert {row.cells[1] for row in table.rows} == {"unstable"}
    assert worst_table(replace(design, robustness=None)) is None


def test_one_gain_set_says_which_is_better_and_by_how_much(root) -> None:
    found = one_law(gains(load(str(root / "designs" / "quay-gyros.yaml")), worst=False))
    assert "same within 1 %" in one_law_words(found)
    worse = replace(found, shared=tuple(replace(m, disk=0.8 * m.disk) for m in found.own))
    assert "20 % smaller" in one_law_words(worse).replace("\u00a0", " ")
    better = replace(found, shared=tuple(replace(m, disk=1.25 * m.disk) for m in found.own))
    assert "25 % larger" in one_law_words(better).replace("\u00a0", " ")
    lost = replace(found, shared=tuple(replace(m, stable=False) for m in found.own))
    assert "does not hold every stance" in one_law_words(lost)
    assert isinstance(found, OneLaw)


def test_retuning_is_told_before_and_after() -> None:
    said = retuned_words(Retuning({"lean": 0.5, "lean_rate": 2.0}, math.nan, 1.1, 90))
    assert "lean × 0.500, lean rate × 2.00" in said
    assert "from unstable to 1.10" in said
    assert "of 90 weights tried none" in retuned_words(Retuning({"lean": 1.0}, 0.9, 0.9, 90, 0.0))
    assert "75 % of the way" in retuned_words(Retuning({"lean": 0.7}, 0.9, 1.0, 90, 0.75)).replace("\u00a0", " ")


def test_a_mismatched_pair_acts_across_the_line_as_far_as_its_momentum_can_turn(answered) -> None:
    """Against the momenta of the two flywheels themselves, differenced: the largest rate along s₀ over the whole range."""
    plant = answered("quay-gyros", "on-left-right").designs[0].plant
    m, e = 0.02, math.radians(1.5)
    row = plant.unit_parameters[0]
    H, rate, stop = row[4], row[11], row[10]

    def along(angle: float) -> float:
        spin = [turned(0.0, a, 0.0) @ np.array([0.0, 0.0, 1.0]) for a in (e + angle, e - angle)]
        return float((H * (1 + m) * spin[0] - H * (1 - m) * spin[1])[2])

    step = 1e-6
    most = max(abs(along(a + step) - along(a - step)) / (2 * step) for a in np.linspace(-stop, stop, 401)) * rate
    said = across_words(plant, Tolerances(pair_mismatch=PairMismatch(m, e))).replace("\u00a0", " ")
    told = float(said.split(" N·m")[0].split()[-1])
    # the two parts do not peak at the same angle: the bound is above, by less than the smaller of them
    assert most <= told * 1.005
    assert told < 1.6 * most
    assert across_words(plant, Tolerances(pair_mismatch=PairMismatch(m, 0.0))) != ""
    assert across_words(plant, Tolerances(mass=0.1)) == ""
    assert across_words(answered("bench-rig", "line").designs[0].plant,
                        Tolerances(pair_mismatch=PairMismatch(m, e))) == "", "no pair on this machine"


def verdict(name: str, value, limit, sense: str = "at least", passed: bool = True, reason: str = "") -> Verdict:
    return Verdict(name, "line", value, "", limit, sense, passed, reason)


def test_verdicts_are_grouped_by_subject_with_the_tightest() -> None:
    verdicts = [verdict("stable_loop", "stable", "stable", "is"), verdict("phase_margin", 1.2, 1.0),
                verdict("disk_margin", 0.55, 0.5), verdict("modulus_margin", 0.1, 0.5, passed=False),
                verdict("worst_disk_margin", 0.9, 0.5), verdict("shove outward", "recovered", "recovered", "is"),
                verdict("momentum_used", 0.5, 0.8, "at most", reason="worst: shove outward")]
    groups = {g.subject: g for g in grouped(verdicts)}
    assert {name: (g.met, g.count) for name, g in groups.items()} == {
        "loop": (3, 4), "within tolerances": (1, 1), "trials": (1, 1), "over all trials": (1, 1)}
    assert groups["loop"].tightest.startswith("disk margin 0.550"), "the missed one is told in full, not here"
    assert groups["trials"].tightest == ""
    assert sum(g.count for g in groups.values()) == len(verdicts)


def test_every_shipped_verdict_has_a_subject_of_its_own(answered) -> None:
    for name in ("bench-rig", "bench-rig-short"):
        for one in answered(name, "line").verdicts:
            assert subject_of(one) in ("loop", "within tolerances", "trials", "over all trials"), one.name


def test_room_is_counted_on_the_good_side() -> None:
    assert to_spare(verdict("x", 1.2, 1.0)) == pytest.approx(0.2)
    assert to_spare(verdict("x", 1.2, 1.0, "at most")) == pytest.approx(-0.2)
    assert to_spare(verdict("x", math.inf, 1.0)) == math.inf
