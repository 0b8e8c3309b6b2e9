"""Verdicts on the trials: each outcome, and the worst of each quantity asked for."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

from balance.check.gyros import judge_gyros
from balance.check.records import Verdict
from balance.check.rescue import what_it_needs
from balance.design.records import Design
from balance.goal.goal import Goal
from balance.simulate.records import TrialResult


def judge_trials(goal: Goal, design: Design, trials: Sequence[TrialResult]) -> list[Verdict]:
    """Return one verdict per trial and direction of one stance, then the worst case of each requirement on trials."""
    verdicts = [judge_outcome(goal, design, result) for result in trials]
    if trials:
        verdicts += worst_cases(goal, design, trials)
    return verdicts


def judge_outcome(goal: Goal, design: Design, result: TrialResult) -> Verdict:
    """Return whether the machine was caught; a touch-down counts only where the trial allows it."""
    may_touch = goal.trials[result.name].touch_down == "allowed"
    passed = caught(goal, result)
    limit = "recovered or touched down" if may_touch else "recovered"
    reason = result.reason
    if not passed:
        more = _advice(goal, design, result)
        reason = f"{reason}; {more}" if reason else more
    return Verdict(f"{result.name} {result.toward}", result.stance, result.verdict, "", limit, "is", passed, reason)


def caught(goal: Goal, result: TrialResult) -> bool:
    """Tell whether a trial is passed, without asking what it would have needed."""
    may_touch = goal.trials[result.name].touch_down == "allowed"
    return result.verdict == "recovered" or (may_touch and result.verdict == "touched down")


def _advice(goal: Goal, design: Design, result: TrialResult) -> str:
    """Return what a trial that is not passed would have needed."""
    if not design.margins.stable:
        return "the closed loop is unstable: no stabiliser is large enough for this law"
    if result.verdict == "did not settle" and not result.reason:
        return (f"still at {math.degrees(result.end_lean):.2g}° and {result.end_momentum:.2g} N·m·s at the end, no limit "
                "met: the law is too slow for the time the trial lasts, or swings")
    return what_it_needs(design, goal, result.name, goal.trials[result.name], result.toward)


def worst_cases(goal: Goal, design: Design, trials: Sequence[TrialResult]) -> list[Verdict]:
    """Return the verdicts on the worst trial. Friction is judged against the feet where the file names no limit."""
    require, plant = goal.require, design.plant
    friction = require.friction_needed
    if friction is None and plant.stance.joints:
        friction = plant.stance.friction
    capacity = plant.momentum_capacity
    verdicts: list[Verdict] = []
    if require.momentum_used is not None:
        verdicts.append(_worst("momentum_used", trials, lambda r: r.momentum_used, "", require.momentum_used,
                               lambda r, v, lim: f"{_which(r)} stores {v * capacity:.3g} of {capacity:.3g} N·m·s, "
                                                 f"{_percent(v / lim - 1.0)} more than asked for"))
    if require.peak_lean is not None:
        verdicts.append(_worst("peak_lean", trials, lambda r: r.peak_lean, "rad", require.peak_lean, lambda r, v, lim:
                               f"{_which(r)} leans {math.degrees(v - lim):.2g}° too far"))
    if require.settling_time is not None:
        verdicts.append(_worst("settling_time", trials, lambda r: r.settling_time, "s", require.settling_time,
                               _too_slow))
    if friction is not None:
        verdicts.append(_worst("friction_needed", trials, lambda r: r.friction_needed, "", friction, lambda r, v, lim:
                               f"{_which(r)} needs {v:.2f} under {_worse_foot(r)}, {v - lim:.2f} too much"))
    if require.bus_voltage is not None and plant.supply_parameters is not None:
        verdicts.append(_worst("bus_voltage", trials, lambda r: r.peak_bus_voltage, "V", require.bus_voltage,
                               lambda r, v, lim: f"{_which(r)} pumps the bus {v - lim:.2g} V too high: braking wheels give "
                                                 "back more than supply, capacitor and brake resistor take"))
    if require.standing_swing is not None:
        verdicts.append(_worst("standing_swing", trials, lambda r: r.standing_swing, "rad", require.standing_swing,
                               lambda r, v, lim: f"{_which(r)} keeps swinging {math.degrees(v - lim):.2g}° too far"
                               if math.isfinite(v) else f"{_which(r)} does not stand at the end ({r.verdict})"))
    verdicts += judge_gyros(design, trials)
    return verdicts + feet_verdicts(plant.stance.name, trials, require.friction_needed is not None)


def feet_verdicts(stance: str, trials: Sequence[TrialResult], grip: bool) -> list[Verdict]:
    """Return a verdict where a foot lifts, and (`grip`) one where a foot needs more than the machine's `feet.friction`."""
    verdicts = []
    lifted = [r for r in trials if r.lift_off]
    if lifted:
        verdicts.append(Verdict("feet_on_ground", stance, "lifted", "", "on the ground", "is", False, _told(
            lifted[0], "lift_off", "carries no load", "the feet carry no load at one moment")))
    slipped = [r for r in trials if not r.verdict.startswith("fell") and any(math.isfinite(foot.slip) for foot in r.feet)]
    if grip and slipped:
        verdicts.append(Verdict("feet_grip", stance, "slipped", "", "hold", "is", False,
                                _told(slipped[0], "slip", "needs more friction than the feet have", "")))
    return verdicts


def _told(result: TrialResult, when: str, what: str, otherwise: str) -> str:
    """Return which foot is the first to do it, and when."""
    feet = [(getattr(foot, when), foot.foot) for foot in result.feet if math.isfinite(getattr(foot, when))]
    if not feet:
        return f"{_which(result)}: {otherwise}"
    time, foot = min(feet)
    return f"{_which(result)}: foot {foot} {what} at {time:.2f} s; what comes after is not simulated"


def _worse_foot(result: TrialResult) -> str:
    """Return the foot that needs most friction in words."""
    if not result.feet:
        return "the feet"
    return f"foot {max(result.feet, key=lambda foot: foot.friction_needed).foot}"


def _worst(name: str, trials: Sequence[TrialResult], value_of: Callable[[TrialResult], float], unit: str, limit: float,
           why: Callable[[TrialResult, float, float], str]) -> Verdict:
    """Return the verdict on the largest value; the reason names the trial, met or not."""
    worst = max(trials, key=value_of)
    value = float(value_of(worst))
    passed = value <= limit
    return Verdict(name, worst.stance, value, unit, limit, "at most", passed,
                   f"worst: {_which(worst)}" if passed else why(worst, value, limit))


def _too_slow(result: TrialResult, value: float, limit: float) -> str:
    """Return why the settling time is not met."""
    if math.isinf(value):
        return f"{_which(result)} never settles ({result.verdict})"
    return f"{_which(result)} takes {value - limit:.2g} s too long"


def _which(result: TrialResult) -> str:
    """Return a trial and its direction in words."""
    return f"{result.name} {result.toward}"


def _percent(part: float) -> str:
    """Return a share as a percentage."""
    return f"{100.0 * part:.0f} %"
