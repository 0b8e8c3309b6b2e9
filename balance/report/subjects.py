"""Many verdicts grouped for reading: by stance and by what they are about, each group with its tightest margin."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from balance.check.records import Verdict
from balance.report.amounts import share
from balance.report.verdicts import judged_value, limit_words, spoken

LOOP = ("stable_loop", "phase_margin", "gain_margin_lower", "gain_margin_upper", "delay_margin", "modulus_margin",
        "disk_margin", "peak_sensitivity", "offset_error")
OVER_TRIALS = ("momentum_used", "peak_lean", "settling_time", "friction_needed", "standing_swing", "feet_on_ground",
               "feet_grip", "gimbal_push_back", "turning_unloads")


@dataclass(frozen=True)
class Group:
    """One stance, one subject: how many are met, and the met number with least to spare ("" where there is none)."""

    stance: str
    subject: str
    met: int
    count: int
    tightest: str


def subject_of(verdict: Verdict) -> str:
    """Return what a verdict is about."""
    if verdict.name in LOOP:
        return "loop"
    if verdict.name.endswith("_within_tolerances") or verdict.name.startswith("worst_"):
        return "within tolerances"
    if isinstance(verdict.limit, str) and verdict.limit.startswith("recovered"):
        return "trials"
    return "over all trials" if verdict.name in OVER_TRIALS or verdict.reason.startswith("worst: ") else "machine"


def grouped(verdicts: Sequence[Verdict]) -> tuple[Group, ...]:
    """Group by stance, then by subject, both in the order they were judged."""
    found: dict[tuple[str, str], list[Verdict]] = {}
    for verdict in verdicts:
        found.setdefault((verdict.stance, subject_of(verdict)), []).append(verdict)
    return tuple(Group(stance, subject, sum(v.passed for v in mine), len(mine), _tightest(mine))
                 for (stance, subject), mine in found.items())


def to_spare(verdict: Verdict) -> float:
    """Return the share of its limit by which a number stands on the good side (below 0: missed); inf for words."""
    value, limit = verdict.value, verdict.limit
    if isinstance(value, str) or isinstance(limit, str) or not limit or math.isnan(value):
        return math.inf
    room = limit - value if verdict.sense == "at most" else value - limit
    return room / abs(limit)


def _tightest(verdicts: list[Verdict]) -> str:
    met = [v for v in verdicts if v.passed and math.isfinite(to_spare(v))]
    if not met:
        return ""
    one = min(met, key=to_spare)
    return f"{spoken(one.name)} {judged_value(one)} {limit_words(one)}, {share(to_spare(one))}"
