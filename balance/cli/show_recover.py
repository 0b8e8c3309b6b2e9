"""What `balance recover` prints: every trial, and why it ended as it did."""

from __future__ import annotations

from balance.base.tables import text_table
from balance.check.records import Verdict
from balance.cli.words import closing, failures, folded
from balance.design.records import Design
from balance.report.amounts import amount, share
from balance.report.facts import settled
from balance.report.ground import each_foot
from balance.simulate.records import TrialResult


def show_recover(designs: tuple[Design, ...], trials: tuple[TrialResult, ...], verdicts: tuple[Verdict, ...]) -> str:
    """Return the text of the answer."""
    parts = [folded(f"{designs[0].plant.machine}: recovery trials, {len(trials)} in all")]
    parts += [trial_table(d, tuple(t for t in trials if t.stance == d.plant.stance.name)) for d in designs]
    return "\n\n".join(p for p in [*parts, failures(verdicts), closing(verdicts)] if p)


def trial_table(design: Design, trials: tuple[TrialResult, ...]) -> str:
    """Return the trials of one stance, one line per direction."""
    name = design.plant.stance.name
    if design.refused:
        return folded(f"{name}: no trial was run: {design.refused}")
    head = ["trial", "toward", "outcome", "peak lean", "settled", "torque", "momentum"]
    rows = [
        [
            t.name,
            t.toward,
            t.verdict,
            amount(t.peak_lean, "rad"),
            settled(t),
            amount(t.peak_torque, "N*m"),
            share(t.momentum_used),
        ]
        for t in trials
    ]
    notes = [folded(f"{', '.join(names)}: {reason}") for reason, names in _met_on_the_way(trials).items()]
    notes += [folded(f"foot {one.foot}: least load {one.words[0]}, friction needed {one.words[1]}, {one.words[2]}")
              for one in each_foot(trials)]
    return "\n".join([f"stance {name}", text_table(head, rows, "lllrrrr"), *notes])


def _met_on_the_way(trials: tuple[TrialResult, ...]) -> dict[str, list[str]]:
    """Limits met in trials that recovered all the same -> those trials; why the others failed is said further down."""
    met: dict[str, list[str]] = {}
    for trial in trials:
        if trial.reason and trial.verdict == "recovered":
            met.setdefault(trial.reason, []).append(f"{trial.name} {trial.toward}")
    return met
