"""From the words of a trial to what the kernel's clock reads: torques over time, sudden changes, troubles, a start."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from balance.goal.goal import Loop
from balance.goal.trials import Trial
from balance.goal.troubles import Missed
from balance.kernel import outcome
from balance.kernel.bundles import Events
from balance.simulate.changes import Change, body_rows, with_tables

Array = NDArray[np.float64]

SIDES = {"outward": 1.0, "inward": -1.0}
FOR_EVER = math.inf


@dataclass(frozen=True)
class Happening:
    """One trial in one direction, as arrays and numbers."""

    toward: str          # "outward" | "inward"
    events: Events
    lean: float          # rad, at the start
    lean_rate: float     # rad/s, at the start (after the release where there is one)
    stored: float        # N·m·s about the line, at the start
    quiet_from: float    # s: nothing is scheduled to change after this
    end_torque: float    # N·m: what stays on
    end_body: Array      # (BODY_SIZE,) the body at the end


@dataclass
class Score:
    """What has been gathered of a trial so far."""

    torques: list[list[float]] = field(default_factory=list)
    jumps: list[list[float]] = field(default_factory=list)
    changes: list[Change] = field(default_factory=list)
    spells: list[list[float]] = field(default_factory=list)
    start: tuple[float, float, float] = (0.0, 0.0, 0.0)
    release: tuple[float, float] = (0.0, 0.0)
    quiet: float = 0.0

    def until(self, time: float) -> None:
        """Nothing is quiet before `time`."""
        self.quiet = max(self.quiet, time)

    def load(self, begin: float, end: float, level: float, slope: float = 0.0, lever: float = math.inf) -> None:
        """A torque about the line, of a force at the height `lever` (inf: a couple); quiet once it ended or is for ever."""
        self.torques.append(_row(begin, end, outcome.LEVEL, level, slope, lever))
        self.until(begin if math.isinf(end) else end)


def directions(trial: Trial) -> tuple[str, ...]:
    """Return the directions a trial runs in: both where one of its parts says so, else its first part's."""
    parts = [part for part in vars(trial).values() if hasattr(part, "toward")]
    said = [part.toward for part in parts]
    if not said or "both" in said:
        return ("outward", "inward")
    return (said[0],)


def happening(trial: Trial, toward: str, body: Array, loop: Loop, longest: float, sensor: Array,
              seed: int) -> Happening:
    """Return what happens in `trial` run toward `toward`; parts that name their own direction keep it.

    A push is a horizontal force at its height on the leaning machine; its lever is taken as that height.
    `body`: the kernel's row of the stance; `longest`: s, sub-step; `sensor`, `seed`: as `kernel.sensing` reads them.
    """
    score = Score()
    add_torques(trial, toward, score)
    add_swing(trial, toward, score)
    add_tables(trial, toward, score)
    add_starts(trial, toward, score)
    add_changes(trial, toward, score)
    add_troubles(trial, loop, score)
    changes, end_body = body_rows(body, score.changes)
    lasting = [row for row in score.torques if math.isinf(row[outcome.END])]
    events = _events(score, changes, trial.lasts, longest)._replace(sensor=sensor, seed=seed)
    return Happening(toward, events, *score.start, score.quiet, sum(row[outcome.LEVEL] for row in lasting),
                     with_tables(end_body, lasting))


def add_torques(trial: Trial, toward: str, score: Score) -> None:
    """Pushes, steps, ramps and gusts."""
    if trial.push:
        moment = _side(trial.push.toward, toward) * trial.push.impulse * trial.push.height
        if trial.push.lasts > 0.0:
            score.load(trial.push.start, trial.push.start + trial.push.lasts, moment / trial.push.lasts,
                       lever=trial.push.height)
        else:
            score.jumps.append([trial.push.start, moment, 0.0, trial.push.height])
            score.until(trial.push.start)
    if trial.torque:
        end = FOR_EVER if trial.torque.lasts is None else trial.torque.start + trial.torque.lasts
        score.load(trial.torque.start, end, _side(trial.torque.toward, toward) * trial.torque.step)
    if trial.ramp:
        full, end = _side(trial.ramp.toward, toward) * trial.ramp.to, trial.ramp.start + trial.ramp.lasts
        score.load(trial.ramp.start, end, 0.0, full / trial.ramp.lasts)
        score.load(end, FOR_EVER, full)
    if trial.gusts:
        gusts = trial.gusts
        add_points(gusts.points, gusts.start, _side(gusts.toward, toward), score, gusts.lever)


def add_points(points: tuple[tuple[float, float], ...], start: float, side: float, score: Score,
               lever: float = math.inf) -> None:
    """A torque given by points: straight between them, nothing before the first and after the last."""
    for (a, p), (b, q) in pairwise(points):
        score.load(start + a, start + b, side * p, side * (q - p) / (b - a), lever)


def add_swing(trial: Trial, toward: str, score: Score) -> None:
    """The torque of a swinging leg: one full sine, or a table's points."""
    swing = trial.swing
    if swing is None:
        return
    side = _side(swing.toward, toward)
    if swing.points:
        add_points(swing.points, swing.start, side, score)
    elif swing.lasts and swing.peak:
        turn = 2.0 * math.pi / swing.lasts
        end = swing.start + swing.lasts
        score.torques.append(_row(swing.start, end, outcome.SWING, side * swing.peak, turn))
        score.until(swing.start + swing.lasts)


def add_tables(trial: Trial, toward: str, score: Score) -> None:
    """What varies over time by tables: changes of J, G_s, G_c and a torque; the last value of each stays."""
    varies = trial.varies
    if varies is None:
        return
    side = _side(varies.toward, toward)
    for points, column, sign in ((varies.inertia, outcome.OF_INERTIA, 1.0),
                                 (varies.height_moment, outcome.OF_STIFF_SIN, 1.0),
                                 (varies.offset_moment, outcome.OF_STIFF_COS, side),
                                 (varies.torque, outcome.LEVEL, side)):
        last = None
        for (a, p), (b, q) in pairwise(points or ()):
            score.torques.append(_row(varies.start + a, varies.start + b, column, sign * p, sign * (q - p) / (b - a)))
            last = _row(varies.start + b, FOR_EVER, column, sign * q, 0.0)
        if last is not None:
            score.torques.append(last)
            score.until(last[outcome.START])


def add_starts(trial: Trial, toward: str, score: Score) -> None:
    """How the trial begins: leaning and moving, or held until the third foot lets go."""
    for part in (trial.start, trial.lift_off):
        if part is not None:
            side = _side(part.toward, toward)
            lean, rate, stored = score.start
            score.start = (lean + side * part.lean, rate + side * part.lean_rate, stored + side * part.stored)
    if trial.lift_off:
        score.release = (trial.lift_off.at, score.start[1])
        score.until(trial.lift_off.at)


def add_changes(trial: Trial, toward: str, score: Score) -> None:
    """What changes of the body at one instant."""
    if trial.offset:
        score.jumps.append([trial.offset.at, 0.0, _side(trial.offset.toward, toward) * trial.offset.shift, math.inf])
    for part in (trial.offset, trial.payload, trial.slope):
        if part is not None:
            score.changes.append(Change(part, _side(part.toward, toward)))
            score.until(part.at)


def add_troubles(trial: Trial, loop: Loop, score: Score) -> None:
    """A weak supply, samples not taken, commands that come late; a trial's own jitter goes before the loop's."""
    if trial.supply:
        end = FOR_EVER if trial.supply.lasts is None else trial.supply.start + trial.supply.lasts
        score.spells.append([trial.supply.start, end, outcome.SUPPLY_LEFT, trial.supply.falls_to])
        score.until(trial.supply.start if math.isinf(end) else end)
    if trial.missed:
        score.spells.append([*_missed_between(trial.missed, 1.0 / loop.rate), outcome.MISSED, trial.missed.share or 1.0])
    if trial.jitter:
        end = FOR_EVER if trial.jitter.lasts is None else trial.jitter.start + trial.jitter.lasts
        score.spells.append([trial.jitter.start, end, outcome.LATE, trial.jitter.up_to])
    elif loop.jitter > 0.0:
        score.spells.append([0.0, FOR_EVER, outcome.LATE, loop.jitter])


def _missed_between(missed: Missed, sample_time: float) -> tuple[float, float]:
    """Return the spell in which samples are missed; a number of samples ends half a sample after the last."""
    if missed.samples is not None:
        first = math.ceil(missed.start / sample_time - 1e-9) * sample_time
        return first, first + (missed.samples - 0.5) * sample_time
    return missed.start, FOR_EVER if missed.lasts is None else missed.start + missed.lasts


def _side(said: str, toward: str) -> float:
    """Return +1 outward, -1 inward."""
    return SIDES[toward if said == "both" else said]


def _row(begin: float, end: float, column: int, level: float, slope: float, lever: float = math.inf) -> list[float]:
    """Return a row of the kernel's torques with a level and a slope from `column` on, of a force at the height `lever`."""
    row = [0.0] * outcome.TORQUE_SIZE
    row[outcome.LEVER] = lever
    row[outcome.START], row[outcome.END], row[column], row[column + 1] = begin, end, level, slope
    return row


def _events(score: Score, changes: Array, lasts: float, longest: float) -> Events:
    """Return the kernel's arrays; every instant of sudden change stands in `breaks` once."""
    instants = {score.release[0]} | {row[outcome.AT] for row in (*score.jumps, *changes)}
    spells = [row for row in score.spells if row[outcome.WHAT] == outcome.SUPPLY_LEFT]
    for row in (*score.torques, *spells):
        instants |= {row[outcome.START], row[outcome.END]}
    breaks = sorted(t for t in instants if 0.0 < t < lasts)
    return Events(np.array(score.torques, dtype=float).reshape(-1, outcome.TORQUE_SIZE),
                  np.array(sorted(score.jumps), dtype=float).reshape(-1, outcome.JUMP_SIZE),
                  np.array(breaks, dtype=float), *score.release, lasts, longest, np.zeros(0), 0, changes,
                  np.array(score.spells, dtype=float).reshape(-1, outcome.SPELL_SIZE))
