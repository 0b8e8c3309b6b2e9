"""What happened, in the words of the contract: verdict, settling, and which limit was met first."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome

Array = NDArray[np.float64]

SETTLED_SHARE = 0.02
SETTLED_LEAST = math.radians(0.1)
STAYS = 0.25
"""s: a lean that came into the band less than this before the end has not shown that it stays there."""

LOOKED_AT = 1.0
"""s at a trial's end in which a standing swing is looked for."""

WORDS = {
    outcome.TORQUE: "torque limit", outcome.CURRENT: "current limit", outcome.VOLTAGE: "voltage limit",
    outcome.SPEED: "wheel speed limit", outcome.RATE: "gimbal rate limit",
    outcome.DRIVE: "strength of the gimbal drive", outcome.STOP: "gimbal stop",
    outcome.SUPPLY: "supply's current limit", outcome.OVERVOLTAGE: "bus overvoltage limit",
    outcome.FORCED: "speed at which the bus brakes the wheel by itself",
    outcome.SENSOR: "range of gyro or accelerometer",
    outcome.UNREGULATED: "speed above which the driver no longer holds the current",
}
FULL = (outcome.VOLTAGE, outcome.SPEED, outcome.STOP)
"""Limits that mean: no more momentum."""


def settling_time(time: Array, lean: Array, target: float, quiet_from: float) -> float:
    """Return the time in s from `quiet_from` until the lean stays at `target`; inf where it never does.

    The band is 2 % of the peak |lean| or 0.1°, whichever is larger, about the lean at which the machine can stand:
    zero unless a torque or a moved centre of mass stays on. There the wheels keep a steady speed and gravity, not
    a motor, carries the load.
    """
    if not math.isfinite(target) or time[-1] - quiet_from < STAYS:
        return math.inf
    band = max(SETTLED_SHARE * float(np.max(np.abs(lean))), SETTLED_LEAST)
    outside = np.flatnonzero((np.abs(lean - target) > band) & (time >= quiet_from - 1e-12))
    if outside.size == 0:
        return 0.0
    last = int(outside[-1])
    if last + 1 >= time.size or time[-1] - time[last + 1] < STAYS:
        return math.inf
    return float(max(time[last + 1] - quiet_from, 0.0))


def standing_swing(time: Array, lean: Array) -> float:
    """Return the amplitude in rad of what the lean still does in the last second about its trend: √2 of its RMS.

    Play, stiction, dead bands and coarse sensors leave a limit cycle; so does noise. A slow return is trend, not swing.
    """
    last = time >= time[-1] - LOOKED_AT - 1e-12
    if np.count_nonzero(last) < 3:
        return 0.0
    t, x = time[last] - time[-1], lean[last]
    rest = x - np.polyval(np.polyfit(t, x, 2), t)
    return float(np.sqrt(2.0 * np.mean(rest**2)))


def time_to_full(time: Array, momentum: Array, capacity: float) -> float:
    """Return the time in s until the momentum is full at the rate of the trial's last tenth; inf: it shrinks."""
    then = int(np.searchsorted(time, time[-1] - max(0.1 * time[-1], STAYS)))
    span = float(time[-1] - time[then])
    growth = float(abs(momentum[-1]) - abs(momentum[then])) / span if span > 0.0 else 0.0
    return (capacity - abs(float(momentum[-1]))) / growth if growth > 0.0 else math.inf


def limit_story(first: Array, names: Sequence[str], capacity: float, command: str) -> str:
    """Return which limit was met first and, if momentum ran out later, when that was; "" where none was met.

    first: (units + 1, LIMITS, 2) as the kernel fills it; the last row is the law's own, whose output is `command`
    ("torque" or "gimbal rate").
    """
    met = [(float(first[i, k, 0]), i, k) for i in range(first.shape[0]) for k in range(1, outcome.LIMITS)
           if math.isfinite(first[i, k, 0])]
    if not met:
        return ""
    met.sort()
    told = [met[0]]
    full = [entry for entry in met if entry[2] in FULL]
    if full and full[0] != met[0]:
        told.append(full[0])
    told += [entry for entry in met if entry[2] == outcome.UNREGULATED and entry not in told][:1]
    return "; ".join(_one(first, entry, names, capacity, command) for entry in told)


def _one(first: Array, entry: tuple[float, int, int], names: Sequence[str], capacity: float, command: str) -> str:
    """Return the words for one limit."""
    when, unit, kind = entry
    whose = f"{names[unit]}: " if unit < len(names) and len(names) > 1 else ""
    word = f"{command} limit" if kind == outcome.OUTPUT else WORDS[kind]
    told = f"{whose}{word} reached at {when:.2f} s"
    if kind in FULL:
        told += f": {abs(float(first[unit, kind, 1])):.3g} of {capacity:.3g} N·m·s used"
    return told
