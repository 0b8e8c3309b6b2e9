"""The trials as curves to draw: both directions of one trial side by side, with its events."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Design
from balance.goal.trials import Trial
from balance.kernel.layout import FELL
from balance.simulate.records import Trace, TrialResult

Array = NDArray[np.float64]
MOST_POINTS = 900
"""Points kept per curve: twice what a column of a page can show."""


@dataclass(frozen=True)
class Event:
    """What was done to the machine: at one instant (`until` equal to `since`) or over a time, in s."""

    since: float
    until: float
    words: str


@dataclass(frozen=True)
class Curves:
    """One direction of one trial: SI but for the lean, which is in degrees."""

    toward: str
    verdict: str
    time: Array        # (n,) s
    lean: Array        # (n,) degrees
    torque: Array      # (n,) N·m
    limit: Array       # (n,) N·m, available at that moment
    momentum: Array    # (n,) N·m·s


@dataclass(frozen=True)
class TrialPicture:
    """One trial of one stance. `fell` and `touch_down` are leans in degrees (NaN: none to draw)."""

    name: str
    stance: str
    curves: tuple[Curves, ...]
    capacity: float    # N·m·s
    fell: float
    touch_down: float
    events: tuple[Event, ...]
    end: float         # s, of the simulated time asked for
    shown: float       # s, after which nothing moves any more


def events_of(trial: Trial | None) -> tuple[Event, ...]:
    """List what happens in a trial, in order of time."""
    if trial is None:
        return ()
    found = []
    if trial.push:
        found.append(Event(trial.push.start, trial.push.start + trial.push.lasts, "push"))
    if trial.torque:
        lasts = trial.lasts if trial.torque.lasts is None else trial.torque.lasts
        found.append(Event(trial.torque.start, min(trial.torque.start + lasts, trial.lasts), "torque"))
    if trial.ramp:
        found.append(Event(trial.ramp.start, trial.ramp.start + trial.ramp.lasts, "torque grows"))
    if trial.gusts:
        points = trial.gusts.points
        found.append(Event(trial.gusts.start + points[0][0], trial.gusts.start + points[-1][0], "gusts"))
    if trial.start:
        found.append(Event(0.0, 0.0, "start"))
    if trial.offset:
        found.append(Event(trial.offset.at, trial.offset.at, "load shifts"))
    for part, word in ((trial.payload, "load"), (trial.slope, "ground tilts")):
        if part is not None:
            found.append(Event(part.at, part.at, word))
    found += trouble_events(trial)
    if trial.lift_off:
        found.append(Event(trial.lift_off.at, trial.lift_off.at, "lift-off"))
    if trial.swing:
        found.append(swing_event(trial))
    return tuple(sorted(found, key=lambda event: event.since))


def trouble_events(trial: Trial) -> list[Event]:
    """What makes the trial harder: a weak supply, samples not taken."""
    found = []
    for part, word in ((trial.supply, "weak supply"), (trial.missed, "samples missed")):
        if part is not None:
            end = trial.lasts if part.lasts is None else min(part.start + part.lasts, trial.lasts)
            found.append(Event(part.start, part.start if word != "weak supply" and part.lasts is None else end, word))
    return found


def swing_event(trial: Trial) -> Event:
    """The time the leg swings, from the table of points or the sine."""
    assert trial.swing is not None
    if trial.swing.points:
        points = trial.swing.points
        return Event(trial.swing.start + points[0][0], trial.swing.start + points[-1][0], "leg swings")
    return Event(trial.swing.start, trial.swing.start + (trial.swing.lasts or 0.0), "leg swings")


def kept(trace: Trace) -> NDArray[np.intp]:
    """Choose the samples to draw: the largest and smallest lean, torque and momentum of each stretch are among them."""
    count = trace.time.size
    if count <= MOST_POINTS:
        return np.arange(count)
    edges = np.linspace(0, count, MOST_POINTS // 6 + 1).astype(int)
    chosen = {0, count - 1}
    for a, b in pairwise(edges):
        for curve in (trace.lean, trace.torque, trace.momentum):
            chosen.update((a + int(np.argmin(curve[a:b])), a + int(np.argmax(curve[a:b]))))
    return np.array(sorted(chosen))


def curves_of(result: TrialResult, trace: Trace) -> Curves:
    """One direction, thinned for drawing."""
    keep = kept(trace)
    return Curves(result.toward, result.verdict, trace.time[keep], np.degrees(trace.lean[keep]),
                  trace.torque[keep], trace.torque_limit[keep], trace.momentum[keep])


def still_after(curves: tuple[Curves, ...], events: tuple[Event, ...], end: float) -> float:
    """Return the time (s) that is worth drawing: past the last event and until every curve stays at its end value.

    "Stays" is within 2 % of the curve's own range; half as much time again is shown, in round numbers.
    """
    last = max((event.until for event in events), default=0.0)
    for one in curves:
        if one.time[-1] < 0.98 * end:      # a fall or a touch-down ended it
            last = max(last, one.time[-1])
            continue
        for curve in (one.lean, one.torque, one.momentum):
            moving = np.flatnonzero(np.abs(curve - curve[-1]) > 0.02 * max(float(np.ptp(curve)), 1e-9))
            last = max(last, float(one.time[moving[-1]]) if moving.size else 0.0)
    step = 0.5 if last < 2.0 else 1.0
    return min(end, max(step, step * math.ceil(1.5 * last / step)))


def picture_trials(design: Design, trials: tuple[TrialResult, ...], planned: dict[str, Trial]) -> tuple[TrialPicture, ...]:
    """Gather the pictures of one stance's trials, in the order they ran; trials without a recording have none."""
    stance = design.plant.stance
    catch = stance.touch_down_lean
    lean = math.nan if catch is None else math.degrees(-catch - design.plant.balanced_lean)
    pictures = []
    for name in dict.fromkeys(t.name for t in trials if t.stance == stance.name):
        mine = tuple(curves_of(t, t.trace) for t in trials
                     if t.name == name and t.stance == stance.name and t.trace is not None and t.trace.time.size)
        plan = planned.get(name)
        if mine:
            events = events_of(plan)
            end = plan.lasts if plan else float(max(c.time[-1] for c in mine))
            pictures.append(TrialPicture(
                name, stance.name, mine, design.plant.momentum_capacity, math.degrees(design.plant.body_parameters[FELL]),
                lean, events, end, still_after(mine, events, end)))
    return tuple(pictures)
