"""Verdicts on what flywheels in gimbals ask of their drives and of the feet; nobody has to ask for them."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite, isnan

from balance.check.records import Verdict
from balance.design.records import Design
from balance.plant.gyros import holds_lean_rate, turning
from balance.simulate.records import TrialResult


def judge_gyros(design: Design, trials: Sequence[TrialResult]) -> list[Verdict]:
    """Return per stance whether drives bear the push-back of the fastest lean, feet the turning, and motors the spin."""
    return [*_push_back(design, trials), *_turning(design), *_spinning(design)]


def _push_back(design: Design, trials: Sequence[TrialResult]) -> list[Verdict]:
    """H σ' θ̇ at the largest lean rate of any trial, as a share of the drive's torque; the hardest pressed unit counts."""
    plant = design.plant
    held = {unit.name: holds_lean_rate(row) for unit, row in zip(plant.units, plant.unit_parameters, strict=True)}
    held = {name: rate for name, rate in held.items() if isfinite(rate)}
    if not held or not trials:
        return []
    name = min(held, key=lambda unit: held[unit])
    worst = max(trials, key=lambda r: r.peak_lean_rate)
    value = worst.peak_lean_rate / held[name]
    passed = value <= 1.0
    where = f"{worst.name} {worst.toward}"
    reason = (f"worst: {where}" if passed else f"{where} leans so fast that the flywheel pushes {name}'s gimbal back with "
              f"{value:.2g} times what its drive has: it gives way for a while")
    return [Verdict("gimbal_push_back", plant.stance.name, value, "", 1.0, "at most", passed, reason)]


def _turning(design: Design) -> list[Verdict]:
    """The share of the lighter foot's load that turning a table at its rate limit takes off, gimbals and wheels full."""
    plant, found = design.plant, []
    for i, unit in enumerate(plant.units):
        table = turning(plant, i)
        if table is None or not isfinite(table.share):
            continue
        passed = table.share <= 1.0
        reason = (f"{unit.name}: {table.stops:.3g} N·m at {table.rate:.3g} rad/s" if passed else
                  f"{unit.name} turned at {table.rate:.3g} rad/s makes {table.stops:.3g} N·m, more than the lighter foot's "
                  "load bears: turn slower, or with the gimbals level (a wheel: slow)")
        found.append(Verdict("turning_unloads", plant.stance.name, table.share, "", 1.0, "at most", passed, reason))
    return found


def _spinning(design: Design) -> list[Verdict]:
    """The spin speed as a share of its own motor's no-load speed; one never so fast holds less than is said."""
    found = []
    for unit in design.plant.units:
        if isnan(unit.spin_share):
            continue
        passed = unit.spin_share < 1.0
        reason = (f"{unit.name}: after {unit.spin_up:.3g} s" if passed else
                  f"{unit.name}'s motor runs out of voltage at {1.0 / unit.spin_share:.2g} of the stated spin speed: the "
                  "momentum counted on is never there")
        found.append(Verdict("spin_of_no_load_speed", design.plant.stance.name, unit.spin_share, "", 1.0, "at most", passed,
                             reason))
    return found
