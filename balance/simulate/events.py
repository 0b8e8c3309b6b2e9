"""From the words of a trial to what the kernel's clock reads: torques over time, sudden changes, a start."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.goal.trials import LiftOff, OffsetShift, Push, Start, Swing, TorqueStep, Trial
from balance.kernel import outcome
from balance.kernel.bundles import Events

Array = NDArray[np.float64]

SIDES = {"outward": 1.0, "inward": -1.0}


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
    end_shift: float     # m: of the centre of mass


def directions(trial: Trial) -> tuple[str, ...]:
    """Return the directions a trial runs in: both where one of its parts says so, else its first part's."""
    said = [part.toward for part in _parts(trial)]
    if not said or "both" in said:
        return ("outward", "inward")
    return (said[0],)


def happening(trial: Trial, toward: str, longest: float, sensor: Array, seed: int) -> Happening:
    """Return what happens in `trial` run toward `toward`; parts that name their own direction keep it.

    A push is a horizontal force at its height on the leaning machine; its lever is taken as that height.
    `sensor`, `seed`: as `kernel.sensing` reads them.
    """
    torques: list[list[float]] = []
    jumps: list[list[float]] = []
    start, release, quiet = (0.0, 0.0, 0.0), (0.0, 0.0), 0.0
    shift = 0.0
    if trial.push:
        moment = _side(trial.push.toward, toward) * trial.push.impulse * trial.push.height
        until = trial.push.start + trial.push.lasts
        if trial.push.lasts > 0.0:
            torques.append([trial.push.start, until, moment / trial.push.lasts, 0.0, 0.0, 0.0])
        else:
            jumps.append([trial.push.start, moment, 0.0])
        quiet = max(quiet, until)
    if trial.torque:
        until = math.inf if trial.torque.lasts is None else trial.torque.start + trial.torque.lasts
        step = _side(trial.torque.toward, toward) * trial.torque.step
        torques.append([trial.torque.start, until, step, 0.0, 0.0, 0.0])
        quiet = max(quiet, trial.torque.start if math.isinf(until) else until)
    if trial.start:
        side = _side(trial.start.toward, toward)
        start = (side * trial.start.lean, side * trial.start.lean_rate, side * trial.start.stored)
    if trial.offset:
        shift = _side(trial.offset.toward, toward) * trial.offset.shift
        jumps.append([trial.offset.at, 0.0, shift])
        quiet = max(quiet, trial.offset.at)
    if trial.lift_off:
        side = _side(trial.lift_off.toward, toward)
        start = (start[0] + side * trial.lift_off.lean, start[1] + side * trial.lift_off.lean_rate,
                 start[2] + side * trial.lift_off.stored)
        release = (trial.lift_off.at, start[1])
        quiet = max(quiet, trial.lift_off.at)
    if trial.swing:
        torques += swing_rows(trial.swing, _side(trial.swing.toward, toward))
        quiet = max([quiet] + [row[outcome.END] for row in torques if math.isfinite(row[outcome.END])])
    events = _events(torques, sorted(jumps), release, trial.lasts, longest)._replace(sensor=sensor, seed=seed)
    lasting = sum(row[outcome.LEVEL] for row in torques if math.isinf(row[outcome.END]))
    return Happening(toward, events, *start, quiet, lasting, shift)


def swing_rows(swing: Swing, side: float) -> list[list[float]]:
    """Return the torque rows of a swinging leg: one full sine, or a table's pieces.

    A table's times count from `from`; before the table's first and after its last point there is no torque.
    """
    if swing.points:
        pairs = zip(swing.points, swing.points[1:], strict=False)
        return [[swing.start + a, swing.start + b, side * p, side * (q - p) / (b - a), 0.0, 0.0]
                for (a, p), (b, q) in pairs if b > a]
    lasts, peak = swing.lasts or 0.0, swing.peak or 0.0
    if lasts == 0.0:
        return []
    return [[swing.start, swing.start + lasts, 0.0, 0.0, side * peak, 2.0 * math.pi / lasts]]


def _parts(trial: Trial) -> list[Push | TorqueStep | Start | OffsetShift | LiftOff | Swing]:
    """Return the parts of a trial that are given, in the order of the record."""
    parts = (trial.push, trial.torque, trial.start, trial.offset, trial.lift_off, trial.swing)
    return [part for part in parts if part is not None]


def _side(said: str, toward: str) -> float:
    """Return +1 outward, -1 inward."""
    return SIDES[toward if said == "both" else said]


def _events(torques: list[list[float]], jumps: list[list[float]], release: tuple[float, float], lasts: float,
            longest: float) -> Events:
    """Return the kernel's arrays; every instant of sudden change stands in `breaks` once."""
    instants = {row[outcome.START] for row in torques} | {row[outcome.END] for row in torques}
    instants |= {row[outcome.AT] for row in jumps} | {release[0]}
    breaks = sorted(t for t in instants if 0.0 < t < lasts)
    return Events(np.array(torques, dtype=float).reshape(-1, outcome.TORQUE_SIZE),
                  np.array(jumps, dtype=float).reshape(-1, outcome.JUMP_SIZE), np.array(breaks, dtype=float),
                  release[0], release[1], lasts, longest, np.zeros(0), 0)
