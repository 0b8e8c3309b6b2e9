"""Verdicts on the worst case: stable wherever the tolerances allow, and the margins asked for there."""

from __future__ import annotations

import math

from balance.check.records import Verdict
from balance.design.records import Design
from balance.design.robustness.ranges import told
from balance.design.steady import tolerable_offset
from balance.goal.goal import Requirements

LIMITS = (
    ("worst_phase_margin", "phase", "rad", "at least"),
    ("worst_gain_margin_lower", "gain_lower", "", "at most"),
    ("worst_gain_margin_upper", "gain_upper", "", "at least"),
    ("worst_delay_margin", "delay", "s", "at least"),
    ("worst_modulus_margin", "modulus", "", "at least"),
    ("worst_disk_margin", "disk", "", "at least"),
)
"""Requirement, margin, unit, sense."""


def judge_tolerances(require: Requirements, design: Design) -> list[Verdict]:
    """Return what the tolerances themselves ask for, where any act (stability, a standing offset), then each limit."""
    asked = [(name, margin, unit, sense) for name, margin, unit, sense in LIMITS if getattr(require, name) is not None]
    moved = design.robustness is not None and design.margins.stable
    verdicts = [_stability(design), *_offset(design)] if moved else []
    return verdicts + [_judged(design, *one, limit=float(getattr(require, one[0]))) for one in asked]


def _stability(design: Design) -> Verdict:
    """Return whether the loop was stable everywhere it was tried."""
    found = design.robustness
    assert found is not None
    reason = f"{found.evaluations} machines within the tolerances tried"
    if not found.stable:
        where = next(case for case in found.cases if math.isnan(case.value))
        reason = f"unstable at {told(where.at, found.ranges)}"
    return Verdict("stable_within_tolerances", design.plant.stance.name, "stable" if found.stable else "unstable", "",
                   "stable", "is", found.stable, reason)


def _offset(design: Design) -> list[Verdict]:
    """Return whether a centre of mass off by its whole tolerance is borne for ever; no margin shows that."""
    assert design.robustness is not None
    limit = next((one.high for one in design.robustness.ranges if one.name == "offset"), None)
    if limit is None:
        return []
    value = float(tolerable_offset(design))
    borne = bool(value >= limit)
    reason = "" if borne else (f"a centre of mass {1e3 * value:.1f} mm off fills the momentum in the long run; the "
                               f"machine file allows {1e3 * limit:.1f} mm")
    name = "offset_within_tolerances"
    return [Verdict(name, design.plant.stance.name, value, "m", limit, "at least", borne, reason)]


def _judged(design: Design, name: str, margin: str, unit: str, sense: str, limit: float) -> Verdict:
    """Return one margin's worst case against its limit; where no tolerance acts, that is the margin as it is."""
    stance, found = design.plant.stance.name, design.robustness
    if found is None:
        value, where = float(getattr(design.margins, margin)), "the machine as stated"
    else:
        case = next(one for one in found.cases if one.margin == margin)
        value, where = case.value, told(case.at, found.ranges)
    if not design.margins.stable or math.isnan(value):
        return Verdict(name, stance, math.nan, unit, limit, sense, False, f"the loop is unstable at {where}")
    passed = bool(value <= limit if sense == "at most" else value >= limit)
    missed = "" if passed else f"; {_loss(design, margin)}"
    return Verdict(name, stance, value, unit, limit, sense, passed, f"worst at {where}{missed}")


def _loss(design: Design, margin: str) -> str:
    """Return what the margin is without tolerances: whether they took it, or it was not there to take."""
    nominal = float(getattr(design.margins, margin))
    words = {"phase": f"{math.degrees(nominal):.1f}°", "delay": f"{1e3 * nominal:.1f} ms"}
    return f"the machine as stated has {words.get(margin, f'{nominal:.2f}')}"
