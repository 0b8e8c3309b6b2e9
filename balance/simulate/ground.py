"""What the ground had to give the feet in a trial, out of the kernel's metrics."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.simulate.records import FootLoad
from balance.stance.record import Stance

Array = NDArray[np.float64]


def foot_loads(stance: Stance, metrics: Array) -> tuple[FootLoad, ...]:
    """Return foot a and foot b; none where only mass, height and inertia of the machine are known."""
    if not stance.joints:
        return ()
    return tuple(_one(foot, row) for foot, row in zip((stance.foot_from, stance.foot_to), _rows(metrics), strict=True))


def most_friction(metrics: Array) -> float:
    """Return the friction coefficient that the worse foot needs while it carries load."""
    return float(_rows(metrics)[:, outcome.GRIP].max())


def lifted(metrics: Array) -> bool:
    """Tell whether a foot carried no load at one moment."""
    return bool(np.isfinite(_rows(metrics)[:, outcome.LIFT_OFF]).any())


def feet_story(feet: tuple[FootLoad, ...]) -> str:
    """Return what each foot does first that a foot must not do, in words; "" where both stay where they are."""
    told = []
    for foot in feet:
        done = [(when, what) for when, what in ((foot.lift_off, "lifts"), (foot.slip, "slips")) if math.isfinite(when)]
        if done:
            when, what = min(done)
            told.append((when, f"foot {foot.foot} {what} at {when:.2f} s"))
    return ", ".join(words for _, words in sorted(told))


def _rows(metrics: Array) -> Array:
    """Return the metrics of the feet, (2, FOOT_SIZE); the second stands as it began where both are looked at together."""
    return metrics[outcome.FEET:outcome.FEET + 2 * outcome.FOOT_SIZE].reshape(2, outcome.FOOT_SIZE)


def _one(foot: str, row: Array) -> FootLoad:
    """Return one foot's row in words."""
    return FootLoad(foot, float(row[outcome.LEAST_LOAD]), float(row[outcome.GRIP]), _when(row[outcome.LIFT_OFF]),
                    _when(row[outcome.SLIP]))


def _when(time: float) -> float:
    """Return a time in s; NaN for never."""
    return float(time) if math.isfinite(time) else math.nan
